"""pH and PaCO2 between gases, with a band: shown, never judged by.

Between two gases the value is interpolated and the band is a Brownian bridge: at a share f of the way, over T hours,
variance = (1-f)^2 r1 + f^2 r2 + q T f (1-f), with r the noise of one gas (the policy's noise / 2.77) and q the
process variance per hour. Beyond the last gas there is no value, only a band that widens by
another q per hour (nothing holds it). Nothing is
said before the first gas after a change, nor across a change, a break or a change of oxygen.

q is fitted on the training seeds of the simulation by `python -m tests.support.fit_course`; held-out seeds test it.
"""

from __future__ import annotations

from bisect import bisect_left, bisect_right
from collections.abc import Callable, Mapping
from dataclasses import dataclass, replace
from math import sqrt
from typing import Final

import numpy as np

from core.judgement.anchors import Anchor
from core.judgement.context import Context
from core.judgement.policy import Policy
from core.judgement.response_baseline import minute
from core.judgement.response_noise import paco2_noise, ph_noise
from core.judgement.response_shapes import CourseValue, ResponseFigure
from core.judgement.shapes import GasFigure
from core.record.instant import HOUR, MINUTE, Instant
from core.record.message import Message
from core.record.samples import Times, Values

PH_PROCESS_VARIANCE_PER_H: Final = 8.0e-5
PACO2_PROCESS_VARIANCE_PER_H: Final = 2.0
"""Between two gases; per hour, PaCO2 in mmHg^2."""
PH_DRIFT_VARIANCE_PER_H: Final = 6.0e-4
PACO2_DRIFT_VARIANCE_PER_H: Final = 52.0
"""Beyond a gas nothing holds the course to a value: the worst kind of episode sets it, lest the band reassure.
All four are fitted on simulated episodes; see above."""
BAND_Z: Final = 1.6449
"""90 % of a normal distribution."""
TWO_GASES: Final = 2.772
"""1.96 x sqrt 2: the noise of a difference is this many standard deviations of one gas."""
MINUTES: Final = (30, 60, 90, 120)
_CUTTING: Final = ("ipap", "epap", "cpap", "fio2", "o2_flow", "rate_set", "ti")


def course_cuts(ctx: Context) -> tuple[Instant, ...]:
    """The moments that no course may cross: every change of a setting, edges of breaks, start and end of support.

    A value written down for the first time cuts too, and so does a change that was undone: something was not as
    before. A setting logged again with the value it had does not.
    """
    support = ctx.support
    cuts = {t for t in _setting_cuts(ctx) if support.start is None or t > support.start}
    for b in support.breaks:
        cuts |= {b.start} | ({b.end} if b.end is not None else set())
    cuts |= {t for t in (support.start, support.end) if t is not None}
    return tuple(sorted(cuts))


def _setting_cuts(ctx: Context) -> list[Instant]:
    found: list[Instant] = []
    for channel in _CUTTING:
        steps = ctx.settings.steps(channel)
        v = steps.v
        if v.size:
            same = (v[1:] == v[:-1]) | (np.isnan(v[1:]) & np.isnan(v[:-1]))
            found += [int(steps.t[0]), *steps.t[1:][~same].tolist()]
    for channel in ("mode", "interface"):
        words = ctx.episode.text(channel)
        found += [t for t, now, was in zip(words.t.tolist(), words.v, (None, *words.v), strict=False) if now != was]
    return found


def course_gases(ctx: Context) -> tuple[GasFigure, ...]:
    """The gases a course runs through: arterial or capillary, on support."""
    return tuple(g for g in ctx.gases if g.site != "venous" and not g.off_support)


def with_courses(
    ctx: Context, anchors: tuple[Anchor, ...], responses: tuple[ResponseFigure, ...]
) -> tuple[ResponseFigure, ...]:
    """The responses with their values at 30, 60, 90 and 120 minutes."""
    cuts, gases = course_cuts(ctx), course_gases(ctx)
    return tuple(
        replace(r, at_minutes=at_minutes(ctx, a, cuts, gases)) for a, r in zip(anchors, responses, strict=True)
    )


def at_minutes(
    ctx: Context, anchor: Anchor, cuts: tuple[Instant, ...], gases: tuple[GasFigure, ...]
) -> Mapping[str, CourseValue]:
    """pH and PaCO2 at 30, 60, 90 and 120 minutes after an anchor, by the minute as text. Each has its basis.

    `cuts` are `course_cuts`, `gases` are `course_gases`, both in order of time.
    """
    i = bisect_right(cuts, anchor.at)
    until = cuts[i] if i < len(cuts) else None
    low = bisect_right(gases, minute(anchor.at), key=lambda g: minute(g.at))
    high = len(gases) if until is None else bisect_right(gases, minute(until), key=lambda g: minute(g.at))
    own = gases[low:high]
    known = (
        [(g.at, g.ph) for g in own if g.ph is not None],
        [(g.at, g.paco2_mmHg) for g in own if g.paco2_mmHg is not None],
    )
    return {key: _value(ctx, anchor.at + m * MINUTE, own, known, until) for m, key in _KEYS}


_Known = list[tuple[Instant, float]]


def _value(
    ctx: Context, at: Instant, own: tuple[GasFigure, ...], known: tuple[_Known, _Known], until: Instant | None
) -> CourseValue:
    if at > ctx.as_of:
        return CourseValue(basis=Message("course.not_yet", {"at": at}))
    if until is not None and minute(at) > minute(until):
        return CourseValue(basis=Message("course.changed", {"changed_at": until}))
    if not own:
        return _NO_GAS
    phs, paco2s = known
    ph, co2 = _one(at, phs, _PH, ctx.policy), _one(at, paco2s, _PACO2, ctx.policy)
    return CourseValue(*ph, *co2, basis=_basis(at, own))


_NO_GAS = CourseValue(basis=Message("course.no_gas"))
_KEYS = tuple((m, str(m)) for m in MINUTES)


def _basis(at: Instant, own: tuple[GasFigure, ...]) -> Message:
    i = bisect_right(own, at, key=lambda g: g.at)
    if i == 0:
        return Message("course.before_first_gas", {"gas_at": own[0].at})
    before = own[i - 1]
    if before.at == at:
        return Message("course.at_gas", {"gas_at": at})
    if i == len(own):
        return Message("course.beyond_last_gas", {"gas_at": before.at})
    return Message("course.between_gases", {"from_at": before.at, "to_at": own[i].at})


_Triple = tuple[float | None, float | None, float | None]


@dataclass(frozen=True, slots=True)
class _Quantity:
    """How one quantity varies: the variance of one gas, and the process variances between gases and beyond."""

    noise: Callable[[Policy, float], float]
    between: float
    beyond: float


def _ph_variance(policy: Policy, _value: float) -> float:
    return float((ph_noise(policy.noise) / TWO_GASES) ** 2)


def _co2_variance(policy: Policy, value: float) -> float:
    return float((paco2_noise(policy.noise, value) / TWO_GASES) ** 2)


_PH = _Quantity(_ph_variance, PH_PROCESS_VARIANCE_PER_H, PH_DRIFT_VARIANCE_PER_H)
_PACO2 = _Quantity(_co2_variance, PACO2_PROCESS_VARIANCE_PER_H, PACO2_DRIFT_VARIANCE_PER_H)


def _one(at: Instant, known: _Known, how: _Quantity, policy: Policy) -> _Triple:
    """Value, low and high of one quantity; no value beyond the last gas, nothing before the first."""
    i = bisect_right(known, at, key=lambda row: row[0])
    if i == 0:
        return None, None, None
    t0, v0 = known[i - 1]
    if i == len(known) or t0 == at:
        half = BAND_Z * sqrt(how.noise(policy, v0) + how.beyond * (at - t0) / HOUR)
        return v0 if t0 == at else None, v0 - half, v0 + half
    t1, v1 = known[i]
    f = (at - t0) / (t1 - t0)
    bridge = how.between * (t1 - t0) / HOUR * f * (1 - f)
    half = BAND_Z * sqrt((1 - f) ** 2 * how.noise(policy, v0) + f**2 * how.noise(policy, v1) + bridge)
    value = v0 + f * (v1 - v0)
    return value, value - half, value + half


@dataclass(frozen=True, slots=True)
class Band:
    """A course ready to draw, shapes (n,): value and band, NaN where there is none. `segment` numbers the stretches
    without a change; a line is broken where it steps."""

    t: Times
    value: Values
    low: Values
    high: Values
    segment: Times


def course_band(ctx: Context, quantity: str, every_min: int = 5) -> Band:
    """The course of `ph` or `paco2` on a grid, from the first gas of each stretch to its end or `as_of`.

    Raises:
        ValueError: another quantity.
    """
    if quantity not in ("ph", "paco2"):
        raise ValueError(f"no course of {quantity}: accepted are ph and paco2")
    how = _PH if quantity == "ph" else _PACO2
    rows: list[tuple[int, float, float, float, int]] = []
    for number, (known, end) in enumerate(_stretches(ctx, quantity)):
        moments = sorted({*range(known[0][0], end + 1, every_min * MINUTE), *(t for t, _ in known), end})
        for at in moments:
            value, low, high = _one(at, known, how, ctx.policy)
            if low is not None and high is not None:
                rows.append((at, np.nan if value is None else value, low, high, number))
    t, value_column, low_column, high_column, segment = (
        np.array(column) for column in (zip(*rows, strict=True) if rows else [[]] * 5)
    )
    return Band(t.astype(np.int64), value_column.astype(np.float64), low_column.astype(np.float64),
                high_column.astype(np.float64), segment.astype(np.int64))  # fmt: skip


def _stretches(ctx: Context, quantity: str) -> list[tuple[list[tuple[Instant, float]], Instant]]:
    """For each stretch between cuts that holds gases: its gases, and where its band ends."""
    cuts = course_cuts(ctx)
    by_cut: dict[int, list[tuple[Instant, float]]] = {}
    for g in course_gases(ctx):
        v = g.ph if quantity == "ph" else g.paco2_mmHg
        if v is not None:
            by_cut.setdefault(bisect_left(cuts, minute(g.at), key=minute), []).append((g.at, v))
    last = ctx.as_of if ctx.support.end is None else min(ctx.as_of, ctx.support.end)
    return [
        (known, max(known[-1][0], min(last, cuts[i]) if i < len(cuts) else last))
        for i, known in sorted(by_cut.items())
        if i > 0
    ]
