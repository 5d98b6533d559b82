"""The mask: leak over its limit, a tidal volume that cannot be trusted, intolerance."""

from __future__ import annotations

from collections.abc import Iterable

import numpy as np

from core.judgement.leak_trend import leak_definition, limits_at
from core.judgement.markers import evidence as say
from core.judgement.markers.observed import Observed
from core.judgement.markers.spells import Spell
from core.judgement.policy_sections import MarkerRule
from core.judgement.sustained import spells as crossings
from core.record.samples import Values


def leak_over_limit(seen: Observed, _rule: MarkerRule) -> Iterable[Spell]:
    """Leak over its limit for 10 of 12 minutes, the definition of leak known, no break and no probable break."""
    return _leak(seen, 0.0)


def leak_large(seen: Observed, _rule: MarkerRule) -> Iterable[Spell]:
    """Leak over the limit at which to act, as long."""
    leak = seen.policy.leak
    return _leak(seen, leak.act_limit_L_per_min.value - leak.unintentional_limit_L_per_min.value)


def _leak(seen: Observed, extra: float) -> list[Spell]:
    definition = leak_definition(seen.ctx)
    if definition is None:
        return []
    leak = seen.worn_machine("leak")
    limit: Values = limits_at(seen.ctx, leak.t, definition)[0] + extra
    rules = seen.policy.leak
    n, m = int(rules.over_minutes.value), int(rules.of_minutes.value)
    found = []
    for s in crossings(leak.t, leak.v, limit, n, m):
        i, j = np.searchsorted(leak.t, [s.start, s.end if s.end is not None else leak.t[-1] + 1])
        median = float(np.median(leak.v[i:j]))
        newest = int(leak.t[j - 1])
        told = say.sustained("leak", say.ABOVE, round(float(limit[j - 1]), 1), s.minutes, s.start, newest, median)
        found.append(Spell(s.start, s.end, (told,)))
    return found
