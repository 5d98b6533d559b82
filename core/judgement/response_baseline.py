"""Which gas an anchor is judged against, and which gases it may be judged by (rules of judgement 1)."""

from __future__ import annotations

from bisect import bisect_right
from dataclasses import dataclass

from core.judgement import response_reasons as why
from core.judgement.anchors import Anchor
from core.judgement.context import Context
from core.judgement.shapes import GasFigure
from core.record.instant import HOUR, MINUTE, Instant
from core.record.message import Message

VENOUS = "venous"


def minute(at: Instant) -> int:
    """The whole minute of an instant: a gas of an anchor's own minute belongs before it."""
    return at // MINUTE


@dataclass(frozen=True, slots=True)
class Baseline:
    """The gas before an anchor, or why there is none. `early` where a gas soon after it has to serve."""

    gas: GasFigure | None
    early: bool = False
    why: Message | None = None


def of_site(gases: tuple[GasFigure, ...], venous: bool) -> tuple[GasFigure, ...]:
    """The venous gases, or those that stand for arterial in pH and PCO2."""
    return tuple(g for g in gases if (g.site == VENOUS) is venous)


def up_to_minute(gases: tuple[GasFigure, ...], at: Instant) -> tuple[GasFigure, ...]:
    """The gases at or before the minute of `at`."""
    return gases[: bisect_right(gases, minute(at), key=lambda g: minute(g.at))]


def baseline(ctx: Context, anchor: Anchor, gases: tuple[GasFigure, ...], until: Instant | None) -> Baseline:
    """The last gas before the anchor in the same state of support, 2 h old at most for a start, else 6 h.

    `gases` are arterial and capillary, by time; `until` is the first step of the next anchor. Without one,
    a gas between the anchor's first step and its window may serve.
    """
    rules = ctx.policy.response
    limit_h = (rules.baseline_age_start_h if anchor.kind == "start" else rules.baseline_age_change_h).value
    count = bisect_right(gases, minute(anchor.first_at), key=lambda g: minute(g.at))
    newest = None if anchor.running_before else next(
        (g for g in reversed(gases[:count]) if _same_support(ctx, anchor, g)), None
    )  # fmt: skip
    if newest is not None and anchor.first_at - newest.at <= limit_h * HOUR:
        return Baseline(newest)
    reason = why.no_baseline(anchor.kind, limit_h, *_because(ctx, anchor, gases[:count], newest))
    if anchor.running_before:
        return Baseline(None, why=reason)
    late = minute(anchor.at) + rules.window_from_min.value
    for gas in gases[count:]:
        if minute(gas.at) >= late or (until is not None and minute(gas.at) > minute(until)):
            break
        if not gas.off_support:
            return Baseline(gas, early=True, why=why.about_gas("baseline_early", gas))
    return Baseline(None, why=reason)


def _same_support(ctx: Context, anchor: Anchor, gas: GasFigure) -> bool:
    if anchor.kind == "start":
        return True
    if anchor.kind == "break_end":
        ended = next((b for b in ctx.support.breaks if b.end == anchor.first_at), None)
        return ended is not None and minute(ended.start) < minute(gas.at)
    return not gas.off_support and not _before_support(ctx, gas)


def _before_support(ctx: Context, gas: GasFigure) -> bool:
    start = ctx.support.start
    return ctx.support.start_recorded and start is not None and minute(gas.at) <= minute(start)


def _because(
    ctx: Context, anchor: Anchor, before: tuple[GasFigure, ...], newest: GasFigure | None
) -> tuple[str, Instant | None]:
    if anchor.running_before:
        return "support was running", None
    if newest is not None:
        return "too old", newest.at
    if before:
        return "other support", before[-1].at
    venous = up_to_minute(of_site(ctx.gases, venous=True), anchor.first_at)
    return ("venous", venous[-1].at) if venous else ("no gas", None)


def venous_baseline(ctx: Context, anchor: Anchor, venous: tuple[GasFigure, ...]) -> GasFigure | None:
    """The last venous gas before an anchor, to compare a venous one with; 6 h old at most."""
    before = up_to_minute(venous, anchor.first_at)
    limit = ctx.policy.response.baseline_age_change_h.value * HOUR
    return before[-1] if before and anchor.first_at - before[-1].at <= limit else None


def timing(ctx: Context, anchor: Anchor, gas: GasFigure) -> tuple[float, str]:
    """Minutes from the anchor (its last step) and `early`, `in_window` or `late`."""
    rules = ctx.policy.response
    minutes = minute(gas.at) - minute(anchor.at)
    if minutes < rules.window_from_min.value:
        return float(minutes), "early"
    return float(minutes), "in_window" if minutes <= rules.window_to_min.value else "late"
