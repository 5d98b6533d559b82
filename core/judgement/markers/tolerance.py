"""Tolerance: too much of the hour off the mask while acidotic, a mask that is not tolerated, readiness to wean."""

from __future__ import annotations

from collections.abc import Iterable

import numpy as np

from core.judgement.markers import evidence as say
from core.judgement.markers.observed import Observed
from core.judgement.markers.spells import Point, Spell, from_points
from core.judgement.policy_sections import MarkerRule
from core.judgement.probable_breaks import in_any
from core.judgement.shapes import GasFigure
from core.record.instant import HOUR, MINUTE
from core.record.message import Message, Value
from core.record.samples import Flags, Times


def intolerance(seen: Observed, rule: MarkerRule) -> Iterable[Spell]:
    """Logged breaks over a share of the last hour while the last gas was acidotic."""
    start, breaks = seen.support.start, seen.support.breaks
    if start is None or not breaks:
        return []
    end = min(seen.as_of, seen.support.end if seen.support.end is not None else seen.as_of)
    minutes: Times = np.arange(start // MINUTE, end // MINUTE + 1, dtype=np.int64) * MINUTE
    hour = int(rule.limits["of_min"])
    off = np.concatenate(([0], np.cumsum(in_any(minutes, breaks), dtype=np.int64)))
    share = (off[1:] - off[np.maximum(np.arange(1, off.size) - hour, 0)]) / hour * 100.0
    over = (share > rule.limits["percent"]) & _acidotic(seen, minutes)
    edges = np.flatnonzero(np.diff(np.concatenate(([False], over, [False])).astype(np.int8))).reshape(-1, 2)
    out = []
    for a, b in edges.tolist():
        last = b - 1
        count = sum(1 for k in breaks if k.start <= minutes[last] and (k.end is None or k.end > minutes[a]))
        told: dict[str, Value] = {
            "percent": float(share[a:b].max()), "limit": rule.limits["percent"], "minutes": hour, "breaks": count,
        }  # fmt: skip
        out.append(Spell(int(minutes[a]), int(minutes[b]) if b < minutes.size else None,
                         (Message("evidence.share", told),)))  # fmt: skip
    return out


def _acidotic(seen: Observed, times: Times) -> Flags:
    """Whether the newest gas at each time was acidotic."""
    gases = [g for g in seen.gases if g.ph is not None]
    known = np.array([False, *((g.ph or 8.0) < seen.policy.state.acidotic_below_ph.value for g in gases)])
    moments = np.array([g.at for g in gases], np.int64)
    return known[np.searchsorted(moments, times, side="right")]


def not_tolerated(seen: Observed, _rule: MarkerRule) -> Iterable[Spell]:
    """Comfort logged as not tolerated; ends with better comfort."""
    words = seen.episode.text("comfort")
    points = []
    for at, text in zip(words.t.tolist(), words.v, strict=True):
        told = Message("evidence.event", {"event": "comfort", "at": at, "text": text})
        points.append(Point(at, text == "not tolerated", (told,)))
    return from_points(points)


def weaning_ready(seen: Observed, rule: MarkerRule) -> Iterable[Spell]:
    """Out of acidosis on two gases after a day of support, with a calm rate, SpO2 in range and little oxygen.

    The source asks for a pH above 7.35, so on the gas that says it a pH of 7.35 is not enough.
    """
    start = seen.support.start
    if start is None:
        return []
    points = []
    before: GasFigure | None = None
    for gas in seen.gases:
        if gas.ph is None or not (seen.drawn_on_support(gas) or gas.off_support):
            continue
        twice = before is not None and before.state == "resolved" and gas.state == "resolved"
        long_enough = gas.at - start >= rule.limits["hours"] * HOUR
        if twice and long_enough and seen.support.hours_on_mask(start, gas.at) >= rule.limits["hours"]:
            points.append(Point(gas.at, *_ready(seen, rule, gas)))
        else:
            points.append(Point(gas.at, False))
        before = gas
    return from_points(points)


def _ready(seen: Observed, rule: MarkerRule, gas: GasFigure) -> tuple[bool, tuple[Message, ...]]:
    ph = seen.policy.state.acidotic_below_ph.value
    if gas.ph is None or gas.ph <= ph or gas.fio2 is None or gas.fio2 > rule.limits["fio2"]:
        return False, ()
    rate, spo2 = seen.rate_near(gas.at), seen.vitals.spo2(gas.at, 0, min(gas.at + HOUR // 2, seen.as_of))
    if rate is None or spo2 is None:
        return False, ()
    low, _ = seen.targets(np.array([gas.at], np.int64))
    met = rate.value < rule.limits["rr"] and spo2.value >= float(low[0])
    return met, (
        say.value_is("ph", gas.ph, say.ABOVE, ph, gas.at, gas.ph_text),
        say.value_is("rr", rate.value, say.BELOW, rule.limits["rr"], rate.at, since=rate.since),
        say.value_is("spo2", spo2.value, say.AT_LEAST, float(low[0]), spo2.at, since=spo2.since),
        say.value_is("fio2", gas.fio2, say.AT_MOST, rule.limits["fio2"], gas.at),
        *say.gas_doubts(gas),
    )
