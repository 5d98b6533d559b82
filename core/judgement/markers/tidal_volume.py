"""Tidal volume: one too large in hypoxaemic failure, and one that cannot be trusted for leak."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from math import isnan

import numpy as np
from numpy.typing import NDArray

from core.judgement.device_medians import medians
from core.judgement.leak_trend import leak_definition, limits_at
from core.judgement.markers import evidence as say
from core.judgement.markers.observed import Observed
from core.judgement.markers.population import inside
from core.judgement.markers.spells import Point, Spell, from_points
from core.judgement.policy_sections import MarkerRule
from core.judgement.sustained import spells as crossings
from core.physiology.tidal_volume_trust import Trust, trust, unintentional_leak
from core.physiology.ventilation import base_weight, predicted_body_weight
from core.record.episode import Series
from core.record.instant import HOUR, MINUTE
from core.record.message import Message, Value
from core.record.samples import Values


@dataclass(frozen=True, slots=True)
class Volumes:
    """Tidal volumes of the machine on the mask, with how far each can be trusted (codes of `Trust`)."""

    vte: Series
    codes: NDArray[np.int8]


def volumes(seen: Observed) -> Volumes:
    """Every tidal volume while support ran, with its trust at the leak of that minute."""
    vte = seen.worn_machine("vte")
    leak = seen.machine("leak")
    definition = leak_definition(seen.ctx) or "not known"
    at = _leak_at(leak, vte)
    port: Values = np.full(vte.t.shape, np.nan)
    if definition == "total" and len(vte):
        port = limits_at(seen.ctx, vte.t, definition)[0] - seen.policy.leak.unintentional_limit_L_per_min.value
    unintentional = unintentional_leak(at, definition, port)
    return Volumes(vte, trust(vte.v, unintentional, seen.settings.steps("ti").on(vte.t)))


def _leak_at(leak: Series, vte: Series) -> Values:
    """The leak of the same minute; NaN where the newest is more than two minutes old."""
    if not len(leak):
        return np.full(vte.t.shape, np.nan)
    i = np.searchsorted(leak.t, vte.t, side="right") - 1
    k = np.maximum(i, 0)
    return np.where((i >= 0) & (vte.t - leak.t[k] <= 2 * MINUTE), leak.v[k], np.nan)


def vt_not_trusted(seen: Observed, _rule: MarkerRule) -> Iterable[Spell]:
    """A tidal volume that leak makes doubtful for 10 of 12 minutes."""
    if leak_definition(seen.ctx) is None:
        return []
    found = seen.once(volumes)
    doubtful = (found.codes == Trust.DOUBTFUL) | (found.codes == Trust.VOID)
    if not doubtful.any():
        return []
    rules = seen.policy.leak
    n, m = int(rules.over_minutes.value), int(rules.of_minutes.value)
    out = []
    for s in crossings(found.vte.t, doubtful.astype(np.float64), 0.5, n, m):
        newest = int(found.vte.t[np.searchsorted(found.vte.t, s.end if s.end is not None else seen.as_of + 1) - 1])
        told: dict[str, Value] = {"quantity": "vte", "since": s.start, "at": newest, "minutes": s.minutes}
        out.append(Spell(s.start, s.end, (Message("evidence.not_trusted", told),)))
    return out


def vt_high_hypoxaemic(seen: Observed, rule: MarkerRule) -> Iterable[Spell]:
    """Tidal volume above 9.5 mL/kg predicted, two quarters of an hour in a row, P/F at most 200, in the first 4 h.

    Volumes that leak makes doubtful are left out. Without height and sex there is no predicted weight: silent.
    """
    height, sex = seen.episode.latest("height"), seen.episode.latest_text("sex")
    weight = float(predicted_body_weight(np.nan if height is None else height, base_weight(sex)))
    if isnan(weight):
        return []
    poor = (g for g in seen.gases if g.pf_mmHg is not None and g.pf_mmHg <= rule.limits["pf"])
    if not any(inside(seen, rule.population, g.at) or rule.outside == "remark" for g in poor):
        return []
    found = seen.once(volumes)
    usable = (found.codes == Trust.TRUSTED) | (found.codes == Trust.NOT_KNOWN)
    vte = found.vte.cut(usable)
    span = int(seen.policy.trend.device_median_min.value * MINUTE)
    quarters = medians(vte.t, vte.v / weight, span)
    # a quarter that is not over has a median that still moves: it says nothing yet
    high = (quarters.v > rule.limits["ml_per_kg"]) & ((quarters.bin + 1) * span <= seen.as_of)
    points = []
    for k in np.flatnonzero(high | np.concatenate(([False], high[:-1]))).tolist() if high.any() else ():
        at = int(quarters.bin[k] + 1) * span
        if at > seen.as_of:
            break
        if not high[k]:
            points.append(Point(at, False))
        elif k and high[k - 1] and quarters.bin[k] - quarters.bin[k - 1] == 1:
            points.append(_with_pf(seen, rule, at, float(quarters.v[k]), int(quarters.first[k])))
    return from_points(points)


def _with_pf(seen: Observed, rule: MarkerRule, at: int, per_kg: float, since: int) -> Point:
    gas = next((g for g in reversed(seen.gases) if g.at <= at and g.pf_mmHg is not None), None)
    if gas is None or gas.pf_mmHg is None or at - gas.at > rule.limits["pf_within_h"] * HOUR:
        return Point(at, None)
    fits = inside(seen, rule.population, at) and _early(seen, rule, at)
    met = gas.pf_mmHg <= rule.limits["pf"] and (fits or rule.outside == "remark")
    told = [say.value_is("vte_per_kg", round(per_kg, 2), say.ABOVE, rule.limits["ml_per_kg"], at, since=since),
            say.value_is("pf", gas.pf_mmHg, say.AT_MOST, rule.limits["pf"], gas.at)]  # fmt: skip
    if leak_definition(seen.ctx) is None:
        told.append(say.unknown("leak"))
    return Point(at, met, (*told, *say.gas_doubts(gas)), not fits)


def _early(seen: Observed, rule: MarkerRule, at: int) -> bool:
    """Within the first hours on the mask, in which it was validated."""
    start = seen.support.start
    return start is not None and seen.support.hours_on_mask(start, at) <= rule.limits["support_h"]
