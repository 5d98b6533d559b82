"""The tidal volume of a device, with its trust: minute by minute, and as a median of the last quarter of an hour."""

from __future__ import annotations

from dataclasses import dataclass
from statistics import median
from typing import Final

import numpy as np
from numpy.typing import NDArray

from core.judgement.context import Context
from core.judgement.derived import FigureInput
from core.judgement.leak_trend import limits_at
from core.judgement.probable_breaks import in_any, probable_breaks
from core.judgement.score_inputs import Walls
from core.physiology.tidal_volume_trust import Trust, trust, unintentional_leak, why_doubtful
from core.record.episode import Series
from core.record.instant import MINUTE, Instant
from core.record.message import Message
from core.record.samples import Flags, Times, Values
from core.record.support import Break

LEAK_OF_THE_MINUTE: Final = 2 * MINUTE
"""A leak further off than this is not the leak of a device sample."""
_RECENT: Final = 64


@dataclass(frozen=True, slots=True)
class Measured:
    """A volume (mL) or minute volume (L/min) of the device: a median or one logged value, and its trust."""

    value: FigureInput
    code: Trust
    doubt: Message | None


def tidal_volume_trust_series(ctx: Context) -> tuple[Times, NDArray[np.int8]]:
    """For each sample of the episode's `vte`, shapes (n,): when, and its code of `Trust`.

    By the unintentional leak of that minute, as the device's definition of leak allows; NOT_KNOWN without it.
    """
    series = ctx.episode.number("vte")
    return series.t, codes_of(ctx, series.t, series.v, series.spot)


def codes_of(ctx: Context, t: Times, vte: Values, spot: Flags) -> NDArray[np.int8]:
    """Codes of `Trust` of volumes in mL at times, all of shape (n,). `spot`: logged by a person."""
    reach = np.where(spot, _median_span(ctx), LEAK_OF_THE_MINUTE)
    leak, unintentional = _leak_at(ctx, t, reach)
    rules = ctx.policy.leak
    void = in_any(t, off_mask(ctx)) | (leak >= rules.device_ceiling_L_per_min.value)
    limit = rules.doubt_tidal_volume_above_L_per_min.value
    return trust(vte, unintentional, ctx.settings.steps("ti").on(t), void, limit)


def off_mask(ctx: Context) -> tuple[Break, ...]:
    """Breaks, logged or probable, and what comes after the end. Where leak is logged its figure has the probable
    ones already."""
    if len(ctx.episode.number("leak")):
        suspected = tuple(Break(start, end) for start, end in ctx.leak.probable_breaks)
    else:
        suspected = probable_breaks(ctx)
    return (*ctx.support.off_times, *suspected)


def newest(ctx: Context, channel: str) -> Instant | None:
    """When a device channel last had a value on the mask; None where it never had."""
    series = ctx.episode.number(channel)
    recent = _worn(ctx, series.cut(slice(-_RECENT, None)))  # most often it is among the last few
    worn = recent if len(recent) else _worn(ctx, series)
    return int(worn.t[-1]) if len(worn) else None


def measured_at(
    ctx: Context,
    channel: str,
    at: Instant,
    walls: Walls,
    *,
    rate: float | None = None,
    code: Trust | None = None,
) -> Measured | None:
    """A volume of the quarter of an hour up to a moment, not reaching back across an anchor or a break.

    The median of the device's samples; else the newest value that a person logged in it. A value at the very
    moment of a wall counts as before it. `channel` is `vte`, or `mv` with the `rate` that makes a volume of it;
    `code`: the trust of the tidal volumes of the same minutes, where it is known.
    """
    i = int(np.searchsorted(walls, at, side="left"))
    low = max(at - _median_span(ctx) + 1, int(walls[i - 1]) + 1 if i > 0 else -(2**62))
    near = _worn(ctx, ctx.episode.number(channel).between(low, at))
    part = near.machine
    if not len(part) or (len(near) and bool(near.spot[-1])):
        part = near.spots.cut(slice(-1, None))
    if not len(part):
        return None
    if code is None:
        volume = part.v if channel == "vte" else part.v * 1000.0 / (rate or np.nan)
        code = _commonest(codes_of(ctx, part.t, volume, part.spot))
    limit = ctx.policy.leak.doubt_tidal_volume_above_L_per_min.value
    middle = float(median(part.v.tolist()))
    span = (int(part.t[0]), int(part.t[-1])) if len(part) > 1 else None
    return Measured(FigureInput(middle, int(part.t[-1]), span), code, why_doubtful(code, limit))


def _commonest(codes: NDArray[np.int8]) -> Trust:
    """Trusted where more than half of the minutes are; else the commonest doubt, the worse of two as common."""
    counts = np.bincount(codes, minlength=len(Trust))
    if 2 * counts[Trust.TRUSTED] > codes.size:
        return Trust.TRUSTED
    doubts = (Trust.VOID, Trust.DOUBTFUL, Trust.NOT_KNOWN)
    return max(doubts, key=lambda code: int(counts[code]))


def _worn(ctx: Context, series: Series) -> Series:
    """What a device measured on the mask: no breaks, no minutes without a breath."""
    if not len(series):
        return series
    return series.cut(np.isfinite(series.v) & (series.v > 0) & ~in_any(series.t, off_mask(ctx)))


def _median_span(ctx: Context) -> int:
    return int(ctx.policy.trend.device_median_min.value * MINUTE)


def _leak_at(ctx: Context, t: Times, reach: NDArray[np.int64]) -> tuple[Values, Values]:
    """The leak nearest to each time and the unintentional part of it; NaN where none is within reach."""
    series = ctx.episode.number("leak")
    series = series.cut(np.isfinite(series.v)) if len(series) else series
    if not len(series) or not t.size:
        unknown: Values = np.full(t.shape, np.nan)
        return unknown, unknown
    right = np.clip(np.searchsorted(series.t, t), 0, len(series) - 1)
    left = np.maximum(right - 1, 0)
    nearest = np.where(np.abs(series.t[left] - t) <= np.abs(series.t[right] - t), left, right)
    times = series.t[nearest]
    leak = np.where(np.abs(times - t) <= reach, series.v[nearest], np.nan)
    return leak, _unintentional(ctx, times, leak)


def _unintentional(ctx: Context, t: Times, leak: Values) -> Values:
    """The unintentional part of leaks by what leak meant when each was measured; NaN where nobody said.

    The first meaning that was stated holds for what came before it, too; another device may mean another thing.
    """
    said = ctx.episode.text("leak_definition")
    out: Values = np.full(t.shape, np.nan)
    if not len(said):
        return out
    meant = np.asarray(said.v)[np.maximum(np.searchsorted(said.t, t, side="right") - 1, 0)]
    for definition in ("unintentional", "total"):
        mine = meant == definition
        if mine.any():
            port = _port(ctx, t[mine]) if definition == "total" else np.nan
            out[mine] = unintentional_leak(leak[mine], definition, port)
    return out


def _port(ctx: Context, t: Times) -> Values:
    """The exhalation port's own leak at the time-weighted pressure of each moment."""
    limits, _ = limits_at(ctx, t, "total")
    return limits - ctx.policy.leak.unintentional_limit_L_per_min.value
