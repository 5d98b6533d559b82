"""Breathing: a rate that stays high on support, the backup rate taking over."""

from __future__ import annotations

from collections.abc import Iterable

import numpy as np

from core.judgement.markers import evidence as say
from core.judgement.markers.observed import Observed
from core.judgement.markers.population import inside
from core.judgement.markers.spells import Point, Spell, clipped, from_points, united
from core.judgement.policy_sections import MarkerRule
from core.judgement.response_noise import direction, paco2_noise
from core.judgement.shapes import GasFigure
from core.judgement.sustained import Spell as Crossing
from core.judgement.sustained import spells as crossings
from core.record.episode import Series
from core.record.instant import HOUR, MINUTE, Instant
from core.record.message import Message
from core.record.samples import Flags, Values


def rr_above_25(seen: Observed, rule: MarkerRule) -> Iterable[Spell]:
    """Rate above 25, sustained, from an hour of support on."""
    return _rr_above(seen, rule)


def rr_above_30(seen: Observed, rule: MarkerRule) -> Iterable[Spell]:
    """Rate of 30 or more, sustained, from an hour of support on: its source counts 30 itself, unlike its key."""
    return _rr_above(seen, rule, say.AT_LEAST)


def rr_above_35(seen: Observed, rule: MarkerRule) -> Iterable[Spell]:
    """Rate above 35, sustained, from an hour of support on."""
    return _rr_above(seen, rule)


def _rr_above(seen: Observed, rule: MarkerRule, relation: str = say.ABOVE) -> list[Spell]:
    """Two counts in a row past the limit, or the machine's rate for N of M minutes; a count beats the machine.

    `relation`: above the limit, or at or above it.
    """
    start = seen.support.start
    if start is None:
        return []
    first = start + int(rule.limits["after_min"] * MINUTE)
    counted = seen.spots("rr")
    found = [*_by_machine(seen, rule, counted, relation), *_by_count(rule, counted, first, relation)]
    return united(clipped(found, first, None))


def _past(rates: Values, limit: float, relation: str) -> Flags:
    """Whether each rate is past the limit, shape (n,)."""
    return np.asarray(rates >= limit if relation == say.AT_LEAST else rates > limit)


def _by_count(rule: MarkerRule, counted: Series, first: Instant, relation: str) -> list[Spell]:
    limit = rule.limits["rr"]
    high = _past(counted.v, limit, relation)
    points = []
    before: tuple[float, int] | None = None
    for t, v, past in zip(counted.t.tolist(), counted.v.tolist(), high.tolist(), strict=True):
        if t < first:
            continue
        if not past:
            points.append(Point(t, False))
        elif before is not None:
            told = tuple(say.value_is("rr", x, relation, limit, at) for x, at in (before, (v, t)))
            points.append(Point(t, True, told))
        before = (v, t) if past else None
    return from_points(points)


def _by_machine(seen: Observed, rule: MarkerRule, counted: Series, relation: str) -> list[Spell]:
    limit, n, m = rule.limits["rr"], int(rule.limits["minutes"]), int(rule.limits["of_minutes"])
    found = []
    for channel in ("rr_total", "rr"):
        if not _past(seen.machine(channel).v, limit, relation).any() or seen.support.start is None:
            continue
        worn = seen.worn_machine(channel)
        worn = worn.since(seen.support.start + int(rule.limits["after_min"] * MINUTE))
        high = _past(worn.v, limit, relation) & ~_counted_lower(seen, worn, counted, limit, relation)
        for s in crossings(worn.t, high.astype(np.float64), 0.5, n, m):
            i, j = _span(worn, s)
            median = float(np.median(worn.v[i:j]))
            told = say.sustained("rr", relation, limit, s.minutes, s.start, int(worn.t[j - 1]), median)
            found.append(Spell(s.start, s.end, (told,)))
    return found


def _span(series: Series, s: Crossing) -> tuple[int, int]:
    i, j = np.searchsorted(series.t, [s.start, s.end if s.end is not None else series.t[-1] + 1])
    return int(i), int(j)


def _counted_lower(seen: Observed, rates: Series, counted: Series, limit: float, relation: str) -> Flags:
    """Whether the newest fresh count says that the rate is not past the limit."""
    if not len(counted):
        return np.zeros(rates.t.shape, np.bool_)
    i = np.searchsorted(counted.t, rates.t, side="right") - 1
    k = np.maximum(i, 0)
    fresh = rates.t - counted.t[k] <= int(seen.policy.freshness.vitals_min.value * MINUTE)
    return np.asarray((i >= 0) & fresh & ~_past(counted.v[k], limit, relation))


def backup_takeover(seen: Observed, rule: MarkerRule) -> Iterable[Spell]:
    """The backup rate newly does the breathing in ST mode, with a GCS that fell or a PaCO2 that rose.

    Never in a timed mode, nor where it is the aim (neuromuscular disease, obesity hypoventilation).
    """
    rates = seen.worn_machine("rr_total")
    if not len(rates) or not inside(seen, rule.population, seen.as_of):
        return []
    rates = rates.cut(_in_st(seen, rates))
    taking = _taking_over(seen, rule, rates) & ~_counted_faster(seen, rule, rates)
    found = []
    n, m = int(rule.limits["minutes"]), int(rule.limits["of_minutes"])
    for s in crossings(rates.t, taking.astype(np.float64), 0.5, n, m):
        if not _is_new(rule, rates, taking, s):
            continue
        worse = _worse_since(seen, rule, s)
        if worse is None:
            continue
        at, told = worse
        set_rate = float(seen.settings.steps("rate_set").at(s.start))
        i, j = _span(rates, s)
        median, newest = float(np.median(rates.v[i:j])), int(rates.t[j - 1])
        sustained = say.sustained("rr_total", say.AT_MOST, set_rate, s.minutes, s.start, newest, median)
        if s.end is None or at < s.end:
            found.append(Spell(max(s.start, at), s.end, (sustained, told)))
    return found


def _in_st(seen: Observed, rates: Series) -> Flags:
    mode = seen.episode.text("mode")
    st = np.array([False, *(v == "BPAP-ST" for v in mode.v)])
    return st[np.searchsorted(mode.t, rates.t, side="right")]


def _taking_over(seen: Observed, rule: MarkerRule, rates: Series) -> Flags:
    """Few breaths triggered where the device tells; else a total rate that is the set rate."""
    set_rate: Values = seen.settings.steps("rate_set").on(rates.t)
    at_set = rates.v <= set_rate + rule.limits["rate_tolerance"]
    triggered = seen.machine("spont_percent")
    if not len(triggered):
        return np.asarray(at_set)
    i = np.searchsorted(triggered.t, rates.t, side="right") - 1
    k = np.maximum(i, 0)
    told = (i >= 0) & (rates.t - triggered.t[k] <= 10 * MINUTE)
    return np.asarray(np.where(told, triggered.v[k] <= rule.limits["triggered_percent"], at_set))


def _counted_faster(seen: Observed, rule: MarkerRule, rates: Series) -> Flags:
    """Whether a fresh count says that the patient breathes faster than the set rate: a count beats the machine."""
    counted = seen.spots("rr")
    if not len(counted):
        return np.zeros(rates.t.shape, np.bool_)
    i = np.searchsorted(counted.t, rates.t, side="right") - 1
    k = np.maximum(i, 0)
    fresh = rates.t - counted.t[k] <= int(seen.policy.freshness.vitals_min.value * MINUTE)
    noise = seen.policy.noise.rr_counted.value
    set_rate: Values = seen.settings.steps("rate_set").on(rates.t)
    return np.asarray((i >= 0) & fresh & (counted.v[k] > set_rate + rule.limits["rate_tolerance"] + noise))


def _is_new(rule: MarkerRule, rates: Series, taking: Flags, s: Crossing) -> bool:
    """In the hours before, the patient's own rate led for some time."""
    i, j = np.searchsorted(rates.t, [s.start - int(rule.limits["new_within_h"] * HOUR), s.start])
    own = rates.t[i:j][~taking[i:j]]
    return bool(own.size) and own.size * MINUTE >= rule.limits["own_before_min"] * MINUTE


def _worse_since(seen: Observed, rule: MarkerRule, s: Crossing) -> tuple[Instant, Message] | None:
    """The first GCS that is lower, or PaCO2 that is higher beyond noise, than before the backup rate took over."""
    end = s.end if s.end is not None else seen.as_of
    reach = int(rule.limits["new_within_h"] * HOUR)
    found: list[tuple[Instant, Message]] = []
    gcs = seen.series("gcs")
    before = gcs.last_at_or_before(s.start)
    if before >= 0 and s.start - int(gcs.t[before]) <= reach:
        for k in range(before + 1, len(gcs)):
            if gcs.t[k] <= end and gcs.v[k] < gcs.v[before]:
                told = say.changed("gcs", float(gcs.v[before]), int(gcs.t[before]), float(gcs.v[k]), int(gcs.t[k]))
                found.append((int(gcs.t[k]), told))
                break
    gas = _paco2_risen(seen, s.start, end, reach)
    found += [gas] if gas is not None else []
    return min(found, key=lambda f: f[0], default=None)


def _paco2_risen(seen: Observed, start: Instant, end: Instant, reach: Instant) -> tuple[Instant, Message] | None:
    known: list[GasFigure] = [g for g in seen.gases if g.paco2_mmHg is not None and not g.off_support]
    base = next((g for g in reversed(known) if start - reach <= g.at <= start), None)
    if base is None or base.paco2_mmHg is None:
        return None
    noise = paco2_noise(seen.policy.noise, base.paco2_mmHg)
    for gas in known:
        later = start < gas.at <= end
        if later and gas.paco2_mmHg is not None and direction(gas.paco2_mmHg - base.paco2_mmHg, noise) == 1:
            return gas.at, say.changed("paco2", base.paco2_mmHg, base.at, gas.paco2_mmHg, gas.at, noise)
    return None
