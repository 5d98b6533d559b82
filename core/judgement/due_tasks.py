"""Other things that are due: the mask after a leak, oxygen out of range, a score to complete, facts to record."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace

from core.judgement.due_item import Item
from core.judgement.markers.observed import Observed
from core.judgement.markers.saturation import single_out_of_range
from core.judgement.markers.scores import to_complete
from core.judgement.policy_sections import DueRule
from core.judgement.shapes import FlagFigure
from core.record.instant import HOUR, MINUTE, Instant
from core.record.message import Message

LEAK_MARKERS = ("leak_over_limit", "leak_large")
OXYGEN_MARKERS = (
    "over_oxygenation", "over_oxygenation_far", "spo2_above_range", "spo2_below_range", "spo2_deep",
    "fio2_need_rising",
)  # fmt: skip


def _rule(seen: Observed, key: str) -> DueRule | None:
    rule = seen.policy.due.get(key)
    return rule if rule is not None and rule.on else None


def _item(rule: DueRule, what: str, because: Message, at: Instant) -> Item:
    return Item(what, because, at + int(rule.from_min * MINUTE), at + int(rule.until_min * MINUTE), rule.soon_min)


def _after_flag(
    seen: Observed, flags: tuple[FlagFigure, ...], what: str, markers: tuple[str, ...], closing: tuple[str, ...]
) -> Item | None:
    """Something to do once one of some flags stands; done by the first of some entries after it was raised."""
    rule = _rule(seen, what)
    standing = [f for f in flags if f.marker in markers and f.ended_at is None]
    if rule is None or not standing:
        return None
    first = min(standing, key=lambda f: f.since)
    item = _item(rule, what, Message(f"due.{what}", {"marker": first.marker, "since": first.since}), first.since)
    done = _first_after(seen, closing, first.since)
    return item if done is None else replace(item, done_at=done[0], done_by=seen.entry_id(done[1], done[0]))


def _first_after(seen: Observed, channels: tuple[str, ...], since: Instant) -> tuple[Instant, str] | None:
    moments = [(int(t), c) for c in channels for t in seen.episode.text(c).t if t > since]
    moments += [(int(t), c) for c in channels for t in seen.episode.number(c).t if t > since]
    return min(moments, default=None)


def mask_item(seen: Observed, flags: tuple[FlagFigure, ...]) -> Item | None:
    """A check of the mask while a leak flag stands."""
    closing = ("mask_adjusted", "mask_changed", "checked_no_change")
    return _after_flag(seen, flags, "mask_check", LEAK_MARKERS, closing)


def oxygen_item(seen: Observed, flags: tuple[FlagFigure, ...]) -> Item | None:
    """A review of the oxygen while SpO2 is out of range or its need rises."""
    closing = ("fio2", "o2_flow", "review", "checked_no_change")
    return _after_flag(seen, flags, "oxygen_review", OXYGEN_MARKERS, closing)


def score_item(seen: Observed) -> Item | None:
    """HACOR to complete: only with what is missing could it pass its limit."""
    rule, found = _rule(seen, "complete_score"), to_complete(seen)
    if rule is None or found is None:
        return None
    gas, score = found
    limit = seen.policy.markers["hacor_above_5"].limits["points"]
    because = Message("due.complete_score", {"score": "hacor", "gas_at": gas.at, "missing": ", ".join(score.missing),
                      "lowest": score.lowest, "highest": score.highest, "limit": limit})  # fmt: skip
    return _item(rule, "complete_score", because, gas.at)


def ceiling_item(seen: Observed) -> Item | None:
    """A ceiling of care to decide: none is recorded."""
    rule, start = _rule(seen, "ceiling"), seen.support.start
    if rule is None or start is None or start > seen.as_of:
        return None
    begun = max(start, seen.first_at or start)
    ceiling = seen.episode.text("ceiling_of_care")
    item = _item(rule, "ceiling", Message("due.ceiling", {"started_at": begun}), begun)
    if seen.episode.latest_text("ceiling_of_care") in (None, "not recorded"):
        return item
    decided = int(ceiling.t[-1])
    done = replace(item, done_at=decided, done_by=seen.entry_id("ceiling_of_care", decided))
    return done if decided > begun else None


def break_end_items(seen: Observed) -> Iterator[Item]:
    """A break open for hours while the device ventilates: when did it end?"""
    rule = _rule(seen, "break_end")
    for b in seen.support.breaks:
        if rule is None or b.end is not None or not _ventilating(seen, b.start):
            continue
        hours = round((seen.as_of - b.start) / HOUR, 1)
        item = _item(rule, "break_end", Message("due.break_end", {"break_at": b.start, "hours": hours}), b.start)
        if seen.as_of >= item.due_from:
            yield item


def _ventilating(seen: Observed, since: Instant) -> bool:
    """The device has measured breaths in the last quarter of an hour."""
    low = max(since, seen.as_of - 15 * MINUTE)
    near = (seen.machine(c).between(low, seen.as_of) for c in ("vte", "mv", "rr_total"))
    return any(bool((s.v > 0).any()) for s in near)


def probable_break_items(seen: Observed) -> Iterator[Item]:
    """A break that the device suggests and nobody logged: ask what happened."""
    rule = _rule(seen, "probable_break")
    if rule is None:
        return
    for b in seen.suspected_breaks:
        if seen.as_of - b.start <= rule.limits["ask_h"] * HOUR:
            because = Message("due.probable_break", {"break_at": b.start, "end_at": b.end})
            yield _item(rule, "probable_break", because, b.start)


def recheck_item(seen: Observed) -> Item | None:
    """A second reading after a single one out of range."""
    rule, found = _rule(seen, "spo2_recheck"), single_out_of_range(seen)
    if rule is None or found is None:
        return None
    at, value, low, high = found
    because = Message("due.spo2_recheck", {"spo2": value, "at": at, "low": low, "high": high})
    return _item(rule, "spo2_recheck", because, at)
