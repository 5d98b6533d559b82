"""NEWS2 over the record: bounds at every set of observations, and a rise over the patient's own low.

The points are those of `scores_news2`, for arrays. A set is three or more of the observed values at one moment; a
value up to the policy's freshness before it fills in, none from before a change or a break (as in the score itself);
what is missing bounds the points and is never normal.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

import numpy as np

from core.judgement.markers.observed import Observed
from core.judgement.markers.spells import Point, Spell, from_points
from core.judgement.oxygen_breathed import oxygen_course
from core.judgement.policy_sections import MarkerRule
from core.judgement.score_inputs import Walls, barriers
from core.judgement.scores_binning import half_up_array
from core.judgement.scores_news2 import ACVPU, BINS, SCALE_1, SCALE_2_ON_AIR, SCALE_2_ON_OXYGEN, Bins
from core.record.instant import HOUR, MINUTE
from core.record.message import Message, Value
from core.record.samples import Flags, Times, Values

OBSERVED = ("rr", "spo2", "hr", "sbp", "temp")


@dataclass(frozen=True, slots=True)
class Course:
    """NEWS2 at each set of observations, shapes (n,): the least and the most points it can be."""

    t: Times
    low: Values
    high: Values
    known: Flags
    """Which inputs each set holds, shapes (n, 7)."""


def news2_course(seen: Observed) -> Course:
    """NEWS2 at every set of observations that people took."""
    spots = {c: seen.spots(c) for c in OBSERVED}
    moments, counts = np.unique(np.concatenate([s.t for s in spots.values()]), return_counts=True)
    t = moments[counts >= 3]
    low, high = np.zeros(t.shape), np.zeros(t.shape)
    oxygen = oxygen_course(seen.settings, seen.support, t)
    known: list[Flags] = []
    for name in ("rr", "hr", "sbp", "temp"):
        decimals, bins = BINS[name]
        points = _points(bins, _fresh(seen, name, t), decimals)
        _add(low, high, points, 0, max(p for _, p in bins))
        known.append(~np.isnan(points))
    spo2 = _fresh(seen, "spo2", t)
    if seen.episode.latest_text("spo2_scale") == "2":
        air, given = _points(SCALE_2_ON_AIR, spo2, 0), _points(SCALE_2_ON_OXYGEN, spo2, 0)
        low += np.where(np.isnan(spo2), 0, np.where(oxygen == 1, given, air))
        high += np.where(np.isnan(spo2), 3, np.where(oxygen == 0, air, given))
    else:
        _add(low, high, _points(SCALE_1, spo2, 0), 0, 3)
    low += np.where(oxygen == 1, 2, 0)
    high += np.where(oxygen == 0, 0, 2)
    awake = _consciousness(seen, t)
    _add(low, high, awake, 0, 3)
    known += [~np.isnan(spo2), ~np.isnan(oxygen), ~np.isnan(awake)]
    return Course(t, low, high, np.column_stack(known))


def _add(low: Values, high: Values, points: Values, least: float, most: float) -> None:
    missing = np.isnan(points)
    low += np.where(missing, least, points)
    high += np.where(missing, most, points)


def _fresh(seen: Observed, channel: str, t: Times) -> Values:
    spots = seen.spots(channel)
    if not len(spots):
        return np.full(t.shape, np.nan)
    i = np.searchsorted(spots.t, t, side="right") - 1
    k = np.maximum(i, 0)
    fresh = (i >= 0) & (t - spots.t[k] <= int(seen.policy.freshness.of(channel) * MINUTE))
    return np.where(fresh & _unparted(seen, spots.t[k], t), spots.v[k], np.nan)


def _unparted(seen: Observed, before: Times, t: Times) -> Flags:
    """Whether no change and no edge of a break lies between two moments; at its very moment a value is before it."""
    walls = seen.once(_walls)
    same: Flags = np.searchsorted(walls, before, side="left") == np.searchsorted(walls, t, side="left")
    return same


def _walls(seen: Observed) -> Walls:
    return barriers(tuple(step.at for a in seen.ctx.anchors for step in a.steps), seen.ctx.support)


def _points(bins: Bins, values: Values, decimals: int) -> Values:
    edges = np.array([upper for upper, _ in bins[:-1]]) + 1e-9
    points = np.array([p for _, p in bins], np.float64)
    rounded = half_up_array(values, decimals)
    return np.where(np.isnan(values), np.nan, points[np.searchsorted(edges, np.nan_to_num(rounded), side="left")])


def _consciousness(seen: Observed, t: Times) -> Values:
    words = seen.episode.text("acvpu")
    points = np.array([np.nan, *(float(ACVPU.get(w, 0)) for w in words.v)])
    i = np.searchsorted(words.t, t, side="right")
    at = np.concatenate(([0], words.t))[i]
    fresh = t - at <= int(seen.policy.freshness.of("acvpu") * MINUTE)
    return np.where((i > 0) & fresh & _unparted(seen, at, t), points[i], np.nan)


def news2_rise(seen: Observed, rule: MarkerRule) -> Iterable[Spell]:
    """NEWS2 2 or more over the patient's own low of the last 4 h, whatever is missing.

    A set that lacks an input of the one that met it ends nothing while that input could still make up the rise.
    """
    course = seen.once(news2_course)
    span, rise = int(rule.limits["within_h"] * HOUR), rule.limits["points"]
    t, low, high = course.t.tolist(), course.low.tolist(), course.high.tolist()
    firsts = np.searchsorted(course.t, course.t - span).tolist()
    points: list[Point] = []
    met: int | None = None
    for k in range(1, len(t)):
        if firsts[k] == k:
            continue
        own = min(range(firsts[k], k), key=high.__getitem__)
        told: dict[str, Value] = {"score": "news2", "before": high[own], "before_at": t[own], "lowest": low[k],
                                  "highest": high[k], "at": t[k]}  # fmt: skip
        if low[k] - high[own] >= rise:
            met = k
            points.append(Point(t[k], True, (Message("evidence.score_rise", told),)))
            continue
        lacks = met is not None and bool((course.known[met] & ~course.known[k]).any())
        open_still = lacks and high[k] - high[own] >= rise
        met = met if open_still else None
        points.append(Point(t[k], None if open_still else False))
    return from_points(points)
