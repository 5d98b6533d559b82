"""Consciousness: GCS limits and falls, confusion that is new, a slow rate in a drowsy patient."""

from __future__ import annotations

from collections.abc import Iterable

import numpy as np

from core.judgement.markers import evidence as say
from core.judgement.markers.observed import Observed
from core.judgement.markers.spells import Point, Spell, from_points
from core.judgement.policy_sections import MarkerRule
from core.record.instant import HOUR, MINUTE, Instant
from core.record.message import Message

DROWSY = frozenset({"voice", "pain", "unresponsive"})
LEVELS = ("alert", "confusion", "voice", "pain", "unresponsive")
"""From best to worst."""


def _gcs_below(seen: Observed, limit: float) -> list[Spell]:
    series = seen.series("gcs")
    if not (series.v < limit).any():
        return []
    return from_points(
        Point(int(t), bool(v < limit), (say.value_is("gcs", float(v), say.BELOW, limit, int(t)),))
        for t, v in zip(series.t, series.v, strict=True)
    )


def gcs_below_11(seen: Observed, rule: MarkerRule) -> Iterable[Spell]:
    """GCS below 11."""
    return _gcs_below(seen, rule.limits["gcs"])


def gcs_below_8(seen: Observed, rule: MarkerRule) -> Iterable[Spell]:
    """GCS below 8."""
    return _gcs_below(seen, rule.limits["gcs"])


def gcs_fall(seen: Observed, rule: MarkerRule) -> Iterable[Spell]:
    """GCS at least 2 below the best of the last 24 h; ends once it is nearer to that again."""
    series = seen.series("gcs")
    span = int(rule.limits["within_h"] * HOUR)
    if not len(series) or series.v.max() - series.v.min() < rule.limits["points"]:
        return []
    points = []
    for i, (t, v) in enumerate(zip(series.t.tolist(), series.v.tolist(), strict=True)):
        j = int(np.searchsorted(series.t, t - span))
        if i == j:
            continue
        best = j + int(np.argmax(series.v[j:i]))
        fall = float(series.v[best]) - v
        told = say.changed("gcs", float(series.v[best]), int(series.t[best]), v, t)
        points.append(Point(t, fall >= rule.limits["points"], (told,)))
    return from_points(points)


def new_confusion(seen: Observed, _rule: MarkerRule) -> Iterable[Spell]:
    """New confusion or worse: a level below the best that was seen before; ends when that is reached again."""
    levels = seen.episode.text("acvpu")
    points = []
    best: int | None = None
    for t, word in zip(levels.t.tolist(), levels.v, strict=True):
        level = LEVELS.index(word)
        told = (Message("evidence.event", {"event": "acvpu", "at": t, "text": word}),)
        points.append(Point(t, best is not None and level > best, told))
        best = level if best is None else min(best, level)
    return from_points(points)


def rate_falling_worse_gcs(seen: Observed, rule: MarkerRule) -> Iterable[Spell]:
    """Rate down beyond noise while GCS fell, between two sets of observations."""
    gcs, rates = seen.series("gcs"), seen.spots("rr")
    noise = seen.policy.noise.rr_counted.value
    if not (np.diff(gcs.v) < 0).any():
        return []
    points = []
    for i in range(1, len(gcs)):
        before, at = int(gcs.t[i - 1]), int(gcs.t[i])
        if at - before > rule.limits["within_h"] * HOUR:
            continue
        then, now = (_at(rates.t, rates.v, t, seen) for t in (before, at))
        fell = float(gcs.v[i - 1] - gcs.v[i]) >= rule.limits["points"]
        if then is None or now is None:
            points.append(Point(at, None if fell else False))
            continue
        slower = round(then[1] - now[1] - noise, 6) > 0
        told = (say.changed("gcs", float(gcs.v[i - 1]), before, float(gcs.v[i]), at),
                say.changed("rr", then[1], then[0], now[1], now[0], noise))  # fmt: skip
        points.append(Point(at, fell and slower, told))
    return from_points(points)


def _at(
    t: np.ndarray[tuple[int], np.dtype[np.int64]], v: np.ndarray[tuple[int], np.dtype[np.float64]], at: Instant,
    seen: Observed,
) -> tuple[Instant, float] | None:  # fmt: skip
    """The newest value at or before a moment, if fresh."""
    i = int(np.searchsorted(t, at, side="right")) - 1
    if i < 0 or at - int(t[i]) > seen.policy.freshness.vitals_min.value * MINUTE:
        return None
    return int(t[i]), float(v[i])


def rate_below_12_drowsy(seen: Observed, rule: MarkerRule) -> Iterable[Spell]:
    """Rate below 12 with drowsiness at the same time: voice, pain or no response, or a low GCS."""
    rates, gcs, levels = seen.spots("rr"), seen.series("gcs"), seen.episode.text("acvpu")
    if not (rates.v < rule.limits["rr"]).any():
        return []
    moments = sorted({*rates.t.tolist(), *gcs.t.tolist(), *levels.t.tolist()})
    points = []
    for at in moments:
        rate = _at(rates.t, rates.v, at, seen)
        drowsy = _drowsy(seen, rule, at)
        if rate is None or drowsy is None:
            points.append(Point(at, None))
            continue
        told = (say.value_is("rr", rate[1], say.BELOW, rule.limits["rr"], rate[0]), *drowsy)
        points.append(Point(at, rate[1] < rule.limits["rr"] and bool(drowsy), told))
    return from_points(points)


def _drowsy(seen: Observed, rule: MarkerRule, at: Instant) -> tuple[Message, ...] | None:
    """What says that the patient is drowsy; empty when awake; None when nobody looked lately."""
    gcs, levels = seen.series("gcs"), seen.episode.text("acvpu")
    said: list[Message] = []
    score = _at(gcs.t, gcs.v, at, seen)
    if score is not None and score[1] <= rule.limits["gcs"]:
        said.append(say.value_is("gcs", score[1], say.AT_MOST, rule.limits["gcs"], score[0]))
    i = int(np.searchsorted(levels.t, at, side="right")) - 1
    fresh = i >= 0 and at - int(levels.t[i]) <= seen.policy.freshness.vitals_min.value * MINUTE
    if fresh and levels.v[i] in DROWSY:
        said.append(Message("evidence.event", {"event": "acvpu", "at": int(levels.t[i]), "text": levels.v[i]}))
    return None if score is None and not fresh else tuple(said)
