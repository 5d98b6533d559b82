"""Oxygenation: PaO2, P/F at one hour, S/F at the start, an FiO2 that has to rise."""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from math import isnan

import numpy as np

from core.judgement.markers import evidence as say
from core.judgement.markers.gas_points import from_gases
from core.judgement.markers.observed import Observed
from core.judgement.markers.population import inside
from core.judgement.markers.spells import Point, Spell, from_points, from_runs
from core.judgement.policy_sections import MarkerRule
from core.judgement.shapes import GasFigure
from core.record.episode import Series
from core.record.instant import HOUR, MINUTE, Instant
from core.record.samples import Flags, Times


def _arterial(seen: Observed) -> Iterator[GasFigure]:
    return (g for g in seen.gases if g.site == "arterial")


def _pao2_points(seen: Observed, rule: MarkerRule, highest: bool | None) -> Iterator[Point]:
    limit = rule.pressures["pao2"]
    for gas in _arterial(seen):
        if gas.pao2_mmHg is None:
            continue
        low: bool | None = say.is_below(gas.pao2_mmHg, limit)
        if not low:
            yield Point(gas.at, False)
            continue
        told = [say.pressure_is("pao2", gas.pao2_mmHg, say.BELOW, limit, gas.at)]
        told.append(say.unknown("fio2") if gas.fio2 is None else say.on_oxygen(gas.fio2, gas.at))
        if highest:
            fio2, flow = rule.limits["fio2"], rule.limits["o2_flow"]
            low = seen.on_highest_oxygen(gas, fio2, flow)  # not known: it says nothing either way
            if gas.fio2 is not None:
                told[-1] = say.value_is("fio2", gas.fio2, say.AT_LEAST, fio2, gas.at)
        yield Point(gas.at, low, (*told, *say.gas_doubts(gas)))


def pao2_below_60(seen: Observed, rule: MarkerRule) -> Iterable[Spell]:
    """PaO2 below 60 mmHg (8.0 kPa) on any arterial gas."""
    return from_gases(seen, _pao2_points(seen, rule, None))


def pao2_below_45(seen: Observed, rule: MarkerRule) -> Iterable[Spell]:
    """PaO2 below 45 mmHg (6.0 kPa) on any arterial gas."""
    return from_gases(seen, _pao2_points(seen, rule, None))


def pao2_below_45_on_highest_oxygen(seen: Observed, rule: MarkerRule) -> Iterable[Spell]:
    """PaO2 below 45 mmHg (6.0 kPa) on the highest oxygen."""
    return from_gases(seen, _pao2_points(seen, rule, True))


def pf_low_at_1h(seen: Observed, rule: MarkerRule) -> Iterable[Spell]:
    """P/F at or below 146 mmHg on the gas nearest to one hour after the start (45-90 min).

    A later gas nearer to the hour takes the earlier one's place; afterwards it ends with a P/F above the limit.
    """
    start = seen.ctx.responses[0] if seen.ctx.responses else None
    if start is None or start.anchor != "start" or not seen.support.start_recorded:
        return []
    limit, low, high = rule.limits["pf"], rule.limits["from_min"], rule.limits["to_min"]
    nearest: float | None = None
    points = []
    for gas in _arterial(seen):
        if gas.pf_mmHg is None or not seen.drawn_on_support(gas):
            continue
        minutes = gas.at // MINUTE - start.anchor_at // MINUTE
        if low <= minutes <= high and (nearest is None or abs(minutes - 60) < abs(nearest - 60)):
            nearest = minutes
            fits = inside(seen, rule.population, gas.at)
            met = None if gas.pf_mmHg <= limit and not fits else gas.pf_mmHg <= limit
            told = (say.value_is("pf", gas.pf_mmHg, say.AT_MOST, limit, gas.at),
                    say.timing("start", start.anchor_at, minutes), *say.gas_doubts(gas))  # fmt: skip
            points.append(Point(gas.at, met, told))
        elif nearest is not None:
            points.append(Point(gas.at, None if gas.pf_mmHg <= limit else False))
    return from_gases(seen, points)


def pf_below_150_ards(seen: Observed, rule: MarkerRule) -> Iterable[Spell]:
    """P/F at or below 150 mmHg on support in moderate ARDS: its source sets them apart from those above 150."""
    points = []
    for gas in _arterial(seen):
        if gas.pf_mmHg is not None and seen.drawn_on_support(gas):
            met = gas.pf_mmHg <= rule.limits["pf"] and inside(seen, rule.population, gas.at)
            told = say.value_is("pf", gas.pf_mmHg, say.AT_MOST, rule.limits["pf"], gas.at)
            points.append(Point(gas.at, met, (told, *say.gas_doubts(gas))))
    return from_gases(seen, points)


def steady_fio2(seen: Observed, times: Times) -> Flags:
    """Whether FiO2 was known and unchanged for the policy's minutes before each time, shape (n,)."""
    steps = seen.settings.fio2
    i = np.searchsorted(steps.t, times, side="right") - 1
    if not steps.t.size:
        return np.zeros(times.shape, np.bool_)
    since = steps.t[np.maximum(i, 0)].copy()
    # a value logged again unchanged is no change: walk back to the first of equal values
    first = np.concatenate(([True], steps.v[1:] != steps.v[:-1]))
    begun = steps.t[np.maximum.accumulate(np.where(first, np.arange(first.size), 0))]
    since = begun[np.maximum(i, 0)]
    known = (i >= 0) & ~np.isnan(steps.v[np.maximum(i, 0)])
    return known & (times - since >= int(seen.policy.oxygen.steady_fio2_min.value * MINUTE))


def sf_below_985(seen: Observed, rule: MarkerRule) -> Iterable[Spell]:
    """S/F below 98.5 in the first hours of support: SpO2 at most 97, FiO2 steady, in its population."""
    start = seen.support.start
    if start is None or not seen.support.start_recorded:
        return []
    window = seen.series("spo2").between(start, start + int(rule.limits["within_min"] * MINUTE))
    usable = steady_fio2(seen, window.t) & (window.v <= seen.policy.oxygen.no_sf_above_spo2.value)
    usable &= seen.worn(window.t)
    spo2 = window.cut(usable)
    sf = np.round(spo2.v / seen.settings.fio2.on(spo2.t), 9)  # without the dust of a binary quotient
    low = sf < rule.limits["sf"]
    if not low.any() or not inside(seen, rule.population, int(spo2.t[-1])):
        return []
    kept = _twice(spo2, low)
    return from_runs(spo2.t, kept, lambda _, b: (
        say.value_is("sf", float(sf[b]), say.BELOW, rule.limits["sf"], int(spo2.t[b])),
        say.timing("start", start, (int(spo2.t[b]) - start) // MINUTE),
    ))  # fmt: skip


def _twice(series: Series, low: Flags) -> Flags:
    """Low at this sample and the one before: a single reading says little."""
    return low & np.concatenate(([False], low[:-1])) if len(series) else low


def fio2_need_rising(seen: Observed, rule: MarkerRule) -> Iterable[Spell]:
    """FiO2 up by 0.10 or more within 4 h, to hold the same SpO2."""
    steps = seen.settings.fio2
    span, rise = int(rule.limits["within_h"] * HOUR), rule.limits["rise"]
    known = steps.v[~np.isnan(steps.v)]
    if not known.size or round(float(known.max() - known.min()) - rise, 6) < 0:
        return []
    settle = int(seen.policy.oxygen.steady_fio2_min.value * MINUTE)
    moments = sorted({*(int(t) + settle for t in steps.t), *(int(t) + span + 1 for t in steps.t)})
    points = []
    for at in moments:
        if at > seen.as_of:
            break
        found = _rise(seen, at, span, rise)
        points.append(found if found is not None else Point(at, False))
    return from_points(points)


def _rise(seen: Observed, at: Instant, span: Instant, rise: float) -> Point | None:
    steps = seen.settings.fio2
    now = steps.at(at)
    if not seen.support.on_support(at):
        return None
    if isnan(now):
        return Point(at, None)  # a flow without FiO2: whether the need has risen is not known
    i, j = np.searchsorted(steps.t, [at - span, at], side="right")
    first = max(int(i) - 1, 0)
    window = steps.v[first:j]
    known = np.flatnonzero(~np.isnan(window))
    low = first + int(known[np.argmin(window[known])])
    if round(now - float(steps.v[low]) - rise, 6) < 0:
        return None
    low_until = int(steps.t[low + 1]) - 1
    before, after = seen.vitals.spo2(low_until, 0, low_until), seen.vitals.spo2(at, low_until, at)
    told = say.changed("fio2", float(steps.v[low]), int(steps.t[low]), now, at)
    if before is None or after is None:
        return Point(at, None)
    noise = seen.policy.noise.spo2.value
    held = after.value - before.value <= noise
    return Point(at, held, (told, say.moved("spo2", before, after, noise)))
