"""SpO2 against its range: deep below it, below or above it for long, too much oxygen at hypercapnic risk.

The machine's values must stay out of range for minutes; a person's must be out twice in a row. Above range counts
only while oxygen is given.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import replace

import numpy as np

from core.judgement.markers import evidence as say
from core.judgement.markers.observed import Observed
from core.judgement.markers.range_in_force import changed_since
from core.judgement.markers.spells import Point, Spell, from_points, united
from core.judgement.policy_sections import MarkerRule
from core.judgement.sustained import spells as crossings
from core.record.episode import Series
from core.record.instant import MINUTE
from core.record.samples import Flags, Values


def ranged(seen: Observed) -> tuple[Series, Values, Values]:
    """SpO2 with the lower and the upper end of the range in force at each value."""
    spo2 = seen.series("spo2")
    return spo2, *seen.targets(spo2.t)


def spo2_deep(seen: Observed, rule: MarkerRule) -> Iterable[Spell]:
    """SpO2 5 points or more below range for 2 min (two readings in a row where people took them)."""
    margin = rule.limits["points"]
    spo2, low, _ = seen.once(ranged)
    # at least `points` below counts: the crossing is strict, so the limit lies a hair above
    return _out(seen, rule, spo2, low - margin + 1e-9, spo2.v <= low - margin, say.AT_MOST)


def spo2_below_range(seen: Observed, rule: MarkerRule) -> Iterable[Spell]:
    """SpO2 below range for 15 min, or twice in a row."""
    spo2, low, _ = seen.once(ranged)
    return _out(seen, rule, spo2, low, spo2.v < low, say.BELOW)


def spo2_above_range(seen: Observed, rule: MarkerRule) -> Iterable[Spell]:
    """SpO2 above range for 15 min while oxygen is given, in a patient not known to be at hypercapnic risk."""
    return _above(seen, rule, at_risk=False)


def over_oxygenation(seen: Observed, rule: MarkerRule) -> Iterable[Spell]:
    """SpO2 above range for 15 min while oxygen is given, at hypercapnic risk."""
    return _above(seen, rule, at_risk=True)


def over_oxygenation_far(seen: Observed, rule: MarkerRule) -> Iterable[Spell]:
    """SpO2 5 points or more above range for 15 min while oxygen is given, at hypercapnic risk."""
    return _above(seen, rule, at_risk=True, margin=rule.limits["points"])


def _above(seen: Observed, rule: MarkerRule, *, at_risk: bool, margin: float = 0.0) -> Iterable[Spell]:
    spo2, _, high = seen.once(ranged)
    # at least `margin` above counts: the crossing is strict, so the limit lies a hair below
    high = high + margin - 1e-9 if margin else high
    if not (spo2.v > high).any():
        return []
    counts = seen.oxygen_given(spo2.t) & (seen.at_risk(spo2.t) == at_risk)
    limit = np.where(counts, high, np.inf)
    return _out(seen, rule, spo2, limit, spo2.v > limit, say.AT_LEAST if margin else say.ABOVE)


def _out(seen: Observed, rule: MarkerRule, spo2: Series, limit: Values, out: Flags, relation: str) -> list[Spell]:
    """`relation`: how a value that counts stands to the limit that the evidence tells."""
    if not out.any():
        return []
    machine = ~spo2.spot
    found = [
        *_by_machine(rule, spo2.cut(machine), limit[machine], relation),
        *_by_people(spo2, limit, out, relation),
    ]
    return [_with_range(seen, s) for s in united(found)]


def _with_range(seen: Observed, spell: Spell) -> Spell:
    """The range of then beside values that were judged by another than that of now."""
    newest = max((int(m.values["at"] or 0) for m in spell.evidence), default=None)
    more = () if newest is None else changed_since(seen, newest)
    return replace(spell, evidence=(*spell.evidence, *more)) if more else spell


def _by_machine(rule: MarkerRule, spo2: Series, limit: Values, relation: str) -> list[Spell]:
    n, m = int(rule.limits["minutes"]), int(rule.limits["of_minutes"])
    below = relation in (say.BELOW, say.AT_MOST)
    spells = []
    for s in crossings(spo2.t, spo2.v, limit, n, m, below=below):
        i, j = np.searchsorted(spo2.t, [s.start, s.end if s.end is not None else spo2.t[-1] + 1])
        v, lim = spo2.v[i:j], limit[i:j]
        past = v[v < lim] if below else v[v > lim]
        median = float(np.median(past)) if past.size else float(np.median(v))
        edge, newest = round(float(lim[-1]), 3), int(spo2.t[j - 1])
        told = say.sustained("spo2", relation, edge, s.minutes, s.start, newest, median)
        spells.append(Spell(s.start, s.end, (told,)))
    return spells


def alone(spo2: Series, near: int = 5 * MINUTE) -> Flags:
    """Which readings a person took with no machine value around: only these need a second one. Shape (n,)."""
    machine = spo2.t[~spo2.spot]
    if not machine.size:
        return spo2.spot
    i = np.searchsorted(machine, spo2.t)
    before = np.abs(spo2.t - machine[np.maximum(i - 1, 0)])
    after = np.abs(spo2.t - machine[np.minimum(i, machine.size - 1)])
    return np.asarray(spo2.spot & (np.minimum(before, after) > near))


def _by_people(spo2: Series, limit: Values, out: Flags, relation: str) -> list[Spell]:
    lone = alone(spo2)
    if not lone.any():
        return []
    t, v, lim, bad = spo2.t[lone], spo2.v[lone], limit[lone], out[lone]
    points = []
    for k in range(t.size):
        if not bad[k]:
            points.append(Point(int(t[k]), False))
        elif k and bad[k - 1]:
            two = ((float(v[i]), round(float(lim[i]), 3), int(t[i])) for i in (k - 1, k))
            told = tuple(say.value_is("spo2", value, relation, edge, at) for value, edge, at in two)
            points.append(Point(int(t[k]), True, told))
    return from_points(points)


def single_out_of_range(seen: Observed) -> tuple[int, float, float, float] | None:
    """The newest reading, where a person took it alone, it is out of range and the one before was not.

    Its moment, its value and the range: a recheck is due.
    """
    spo2 = seen.series("spo2")
    if not len(spo2) or not alone(spo2)[-1]:
        return None
    low, high = seen.targets(spo2.t[-2:])
    out = (spo2.v[-2:] < low) | ((spo2.v[-2:] > high) & seen.oxygen_given(spo2.t[-2:]))
    if not out[-1] or (out.size > 1 and out[0] and spo2.spot[-2]):
        return None
    return int(spo2.t[-1]), float(spo2.v[-1]), float(low[-1]), float(high[-1])
