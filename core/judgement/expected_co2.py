"""The PaCO2 to expect after an anchor from the ventilation delivered, against what was observed. Shown, never judged.

Constant CO2 production and the baseline taken as steady give where PaCO2 would settle, baseline x VA before / VA
after; `core.physiology.co2_course` gives how fast. The band spans fast and slow half-times and a tenth of doubt about
production and dead space, two tenths where leak makes the volumes doubtful.
"""

from __future__ import annotations

from dataclasses import dataclass
from itertools import product

import numpy as np

from core.judgement.anchors import Anchor
from core.judgement.context import Context
from core.judgement.course import course_cuts, course_gases
from core.judgement.delivered_ventilation import Ventilation, delivered
from core.judgement.probable_breaks import probable_breaks
from core.judgement.response_baseline import minute
from core.judgement.setting_change import CO2
from core.judgement.shapes import ExpectedCO2, GasFigure
from core.physiology.co2_course import (
    FALL_HALF_TIME,
    FALL_HALF_TIMES,
    RISE_HALF_TIME,
    RISE_HALF_TIMES,
    STEADY_TOLERANCE,
)
from core.record.instant import HOUR, MINUTE, Instant
from core.record.message import Message
from core.record.samples import Times, Values

BEFORE = 30 * MINUTE
"""Ventilation before the anchor is taken over this span up to the baseline gas, and on to the anchor."""
LONGEST = 4 * HOUR
STEP = 5 * MINUTE
DOUBTED_TOLERANCE = 2 * STEADY_TOLERANCE
EXPLAIN_HIGHER = ("leak", "asynchrony", "more_production", "more_dead_space")
EXPLAIN_LOWER = ("own_effort", "less_production", "less_dead_space", "volume_under_read")


def expected(ctx: Context, anchor: Anchor, until: Instant | None = None) -> ExpectedCO2:
    """The expected course after an anchor, up to `until` (the next anchor's first step), 4 h or `as_of`.

    Empty with reasons where a gas on support before it, or ventilation on either side, is not known, or where
    something changed between that gas and the anchor.
    """
    cuts = course_cuts(ctx)
    base, reason = _baseline(ctx, anchor, cuts)
    if base is None or base.paco2_mmHg is None:
        return ExpectedCO2(reasons={"expected_mmHg": reason or Message("expected.no_baseline")})
    end = _end(ctx, anchor, cuts, until)
    off = (*ctx.support.breaks, *probable_breaks(ctx))
    before = delivered(ctx, base.at - BEFORE, anchor.first_at - 1, off)
    after = delivered(ctx, anchor.first_at + 1, end, off)
    if before is None or after is None:
        side = "before" if before is None else "after"
        return ExpectedCO2(reasons={"expected_mmHg": Message("expected.ventilation_not_known", {"side": side})})
    doubtful = before.doubtful or after.doubtful
    t = np.arange(anchor.first_at, end + 1, STEP, dtype=np.int64)
    gas = _observed(ctx, anchor, end)
    if gas is not None:
        t = np.unique(np.append(t, gas.at))
    tolerance = DOUBTED_TOLERANCE if doubtful else STEADY_TOLERANCE
    run = _Run(base.paco2_mmHg, float(np.median(before.va)), after, tolerance)
    middle, low, high = run.courses(t)
    assumptions = (Message("expected.baseline_steady", {"gas_at": base.at}), *after.assumptions)
    if before.doubtful and not after.doubtful:
        assumptions = (*assumptions, Message("expected.leak_doubt"))
    shown = t >= anchor.at
    figure = ExpectedCO2(
        tuple(t[shown].tolist()), tuple(middle[shown].tolist()), tuple(low[shown].tolist()),
        tuple(high[shown].tolist()), assumptions=assumptions,
    )  # fmt: skip
    return figure if gas is None else _against(figure, gas, t, middle, low, high)


def _baseline(ctx: Context, anchor: Anchor, cuts: tuple[Instant, ...]) -> tuple[GasFigure | None, Message | None]:
    if CO2 not in anchor.effects:
        return None, Message("expected.acts_not_on_co2")
    if anchor.kind != "change":
        return None, Message("expected.needs_support_before", {"anchor": anchor.kind})
    gases = [g for g in course_gases(ctx) if minute(g.at) <= minute(anchor.first_at) and g.paco2_mmHg is not None]
    start = ctx.support.start
    if not gases or (start is not None and minute(gases[-1].at) <= minute(start) and ctx.support.start_recorded):
        return None, Message("expected.no_baseline")
    if anchor.first_at - gases[-1].at > ctx.policy.response.baseline_age_change_h.value * HOUR:
        return None, Message("expected.baseline_too_old", {"gas_at": gases[-1].at})
    crossed = [c for c in cuts if minute(gases[-1].at) <= minute(c) < minute(anchor.first_at)]
    if crossed:
        return None, Message("expected.changed_before", {"changed_at": crossed[-1]})
    return gases[-1], None


def _end(ctx: Context, anchor: Anchor, cuts: tuple[Instant, ...], until: Instant | None) -> Instant:
    later = [c for c in cuts if c > anchor.at]
    stops = [ctx.as_of, anchor.at + LONGEST, *later[:1], *([until] if until is not None else [])]
    return min(stops)


def _observed(ctx: Context, anchor: Anchor, end: Instant) -> GasFigure | None:
    """The newest gas after the anchor that no change separates from it."""
    own = [g for g in course_gases(ctx) if minute(anchor.at) < minute(g.at) and g.at <= end]
    return next((g for g in reversed(own) if g.paco2_mmHg is not None), None)


@dataclass(frozen=True, slots=True)
class _Run:
    """One baseline with the ventilation before and after it, run through the closed form piece by piece."""

    start: float
    va_before: float
    after: Ventilation
    tolerance: float

    def courses(self, t: Times) -> tuple[Values, Values, Values]:
        """Expected, lowest and highest at each of `t`, shapes (n,)."""
        i = np.clip(np.searchsorted(self.after.t, t[:-1], side="right") - 1, 0, self.after.t.size - 1)
        steady = self.start * self.va_before / self.after.va[i]
        minutes = np.diff(t) / MINUTE
        cases = [(1.0, FALL_HALF_TIME, RISE_HALF_TIME)]
        cases += [
            (1.0 + d, fall, rise)
            for d, (fall, rise) in product(
                (-self.tolerance, 0.0, self.tolerance), zip(FALL_HALF_TIMES, RISE_HALF_TIMES, strict=True)
            )
        ]
        factor, fall, rise = (np.array(column) for column in zip(*cases, strict=True))
        p = np.full(len(cases), self.start)
        rows = [p]
        for end, dt in zip(steady, minutes, strict=True):
            goal = end * factor
            # co2_course.paco2_after, without its checks: every input here is known and positive
            p = goal + (p - goal) * 2.0 ** (-dt / np.where(goal < p, fall, rise))
            rows.append(p)
        all_courses = np.stack(rows)
        return all_courses[:, 0], all_courses.min(axis=1), all_courses.max(axis=1)


def _against(figure: ExpectedCO2, gas: GasFigure, t: Times, middle: Values, low: Values, high: Values) -> ExpectedCO2:
    """The newest gas against the course, with what commonly explains a gap beyond the band."""
    assert gas.paco2_mmHg is not None
    i = int(np.searchsorted(t, gas.at))
    gap = gas.paco2_mmHg - float(middle[i])
    names: tuple[str, ...] = ("within_band",)
    if gas.paco2_mmHg > high[i]:
        names = EXPLAIN_HIGHER
    elif gas.paco2_mmHg < low[i]:
        names = EXPLAIN_LOWER
    return ExpectedCO2(
        figure.t, figure.expected_mmHg, figure.low_mmHg, figure.high_mmHg, gas.at, gap,
        tuple(Message(f"expected.{name}") for name in names), figure.assumptions, figure.reasons,
    )  # fmt: skip
