"""Leak: its level, slope and time over the limit, by what the device means by leak (rules of judgement 6.14).

A definition that is not known gives a trend only. A total leak's limit is the unintentional limit plus the
port's own leak at the time-weighted pressure of that moment.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from math import isnan

import numpy as np

from core.judgement.context import Context
from core.judgement.probable_breaks import in_any, probable_breaks
from core.judgement.shapes import LeakFigure, RatioFigure
from core.judgement.sustained import Spell, spells
from core.judgement.trend import channel_trend, rates_at, span_start
from core.record.episode import Series
from core.record.instant import MINUTE
from core.record.message import Message
from core.record.samples import Times, Values

ASSUMED_DUTY = 1.0 / 3.0
"""Share of the breath spent on IPAP where inspiratory time or rate is not known (I:E 1:2; common practice)."""
LONGEST_SAMPLE = 2 * MINUTE
"""A sample stands until the next, but not across a silence."""


def leak_definition(ctx: Context) -> str | None:
    """What the device means by leak: "unintentional" or "total"; None where nobody said."""
    said = ctx.episode.latest_text("leak_definition")
    return said if said in ("unintentional", "total") else None


def leak_figure(ctx: Context) -> LeakFigure:
    """The leak of an episode over the trend's span. Nulls carry their reason."""
    series = ctx.episode.number("leak")
    trend = channel_trend(ctx, "leak")
    if not len(series):
        return LeakFigure(reasons={"median_L_per_min": Message("leak.no_values")})
    definition = leak_definition(ctx)
    suspected = probable_breaks(ctx)
    off = (*ctx.support.breaks, *suspected)
    near = series.between(span_start(ctx), ctx.as_of)
    worn = near.cut(~in_any(near.t, off) & np.isfinite(near.v))
    figure = _level(worn, trend, definition)
    figure = replace(figure, probable_breaks=tuple((b.start, b.end) for b in suspected))
    figure = _with_adjustment(figure, ctx, series)
    if definition is None:
        reason = Message("leak.definition_not_known")
        return replace(figure, reasons={**figure.reasons, "limit_L_per_min": reason, "minutes_over_limit": reason})
    return _over(ctx, figure, worn, definition)


def _level(worn: Series, trend: RatioFigure, definition: str | None) -> LeakFigure:
    reasons = dict(trend.reasons)
    for ours, theirs in (("slope_L_per_min_per_h", "slope_per_h"), ("latest_L_per_min", "latest")):
        if theirs in reasons:
            reasons[ours] = reasons.pop(theirs)
    if not len(worn):
        reasons["median_L_per_min"] = Message("leak.no_values")
    return LeakFigure(
        float(np.median(worn.v)) if len(worn) else None, trend.slope_per_h, trend.slope_low, trend.slope_high,
        definition=definition, reasons=reasons, latest_L_per_min=trend.latest, latest_at=trend.at,
    )  # fmt: skip


def _over(ctx: Context, figure: LeakFigure, worn: Series, definition: str) -> LeakFigure:
    limit, assumed = limits_at(ctx, np.append(worn.t, ctx.as_of), definition)
    reasons = dict(figure.reasons)
    if assumed and definition == "total":
        reasons["assumption"] = Message("leak.duty_assumed", {"share": ASSUMED_DUTY})
    if isnan(limit[-1]):
        reasons["limit_L_per_min"] = Message("leak.pressure_not_known")
    minutes = None
    if len(worn) and not np.isnan(limit[:-1]).all():
        stands = np.minimum(np.diff(np.append(worn.t, ctx.as_of)), LONGEST_SAMPLE)
        minutes = float(stands[worn.v > limit[:-1]].sum() / MINUTE)
    elif "limit_L_per_min" in reasons:
        reasons["minutes_over_limit"] = reasons["limit_L_per_min"]
    spell = _last_open(ctx, worn, limit[:-1])
    return replace(
        figure,
        minutes_over_limit=minutes,
        limit_L_per_min=None if isnan(limit[-1]) else float(limit[-1]),
        over_since=spell.start if spell is not None else None,
        reasons=reasons,
    )


def _last_open(ctx: Context, worn: Series, limit: Values) -> Spell | None:
    rules = ctx.policy.leak
    found = spells(worn.t, worn.v, limit, int(rules.over_minutes.value), int(rules.of_minutes.value))
    return found[-1] if found and found[-1].end is None else None


def leak_spells(ctx: Context, n: int, m: int, extra_L_per_min: float = 0.0) -> tuple[Spell, ...]:
    """Sustained leak over the limit during support: N of M minutes. Empty where the definition is not known.

    `extra_L_per_min` raises the limit, e.g. to the policy's limit for acting.
    """
    definition = leak_definition(ctx)
    if definition is None:
        return ()
    series = ctx.episode.number("leak").machine
    worn = series.cut(~in_any(series.t, (*ctx.support.breaks, *probable_breaks(ctx))))
    limit, _ = limits_at(ctx, worn.t, definition)
    return spells(worn.t, worn.v, limit + extra_L_per_min, n, m)


def limits_at(ctx: Context, times: Times, definition: str) -> tuple[Values, bool]:
    """The leak limit at each time, L/min, shape (n,), and whether the share of IPAP in a breath was assumed."""
    base = ctx.policy.leak.unintentional_limit_L_per_min.value
    if definition == "unintentional":
        return np.full(times.shape, base), False
    pressure, assumed = mean_pressures(ctx, times)
    k = ctx.policy.leak.port_L_per_min_per_sqrt_cmH2O.value
    return base + k * np.sqrt(pressure), assumed


@dataclass(frozen=True, slots=True)
class _Pressures:
    ipap: Values
    epap: Values
    cpap: Values


def mean_pressures(ctx: Context, times: Times) -> tuple[Values, bool]:
    """The time-weighted pressure at each time, cmH2O: EPAP + (IPAP - EPAP) x Ti / Ttot; CPAP as it is."""
    on = ctx.settings.steps
    p = _Pressures(on("ipap").on(times), on("epap").on(times), on("cpap").on(times))
    share = on("ti").on(times) * rates_at(ctx, times) / 60.0
    unknown = np.isnan(share)
    duty = np.where(unknown, ASSUMED_DUTY, np.clip(share, 0.1, 0.7))
    bilevel: Values = p.epap + (p.ipap - p.epap) * duty
    single = _single_pressure(ctx, times) | np.isnan(p.ipap)
    return np.where(single, np.where(np.isnan(p.cpap), p.epap, p.cpap), bilevel), bool((unknown & ~single).any())


def _single_pressure(ctx: Context, times: Times) -> np.ndarray[tuple[int], np.dtype[np.bool_]]:
    mode = ctx.episode.text("mode")
    cpap = np.array([False, *(v == "CPAP" for v in mode.v)])
    return cpap[np.searchsorted(mode.t, times, side="right")]


def _with_adjustment(figure: LeakFigure, ctx: Context, series: Series) -> LeakFigure:
    """The newest mask adjustment, and the medians of the 15 minutes before and after it."""
    moments = [int(w.t[-1]) for w in (ctx.episode.text("mask_adjusted"), ctx.episode.text("mask_changed")) if len(w)]
    if not moments:
        return figure
    at, span = max(moments), int(ctx.policy.trend.device_median_min.value * MINUTE)
    return replace(
        figure,
        adjusted_at=at,
        before_adjustment_L_per_min=_median(series.between(at - span, at - 1)),
        after_adjustment_L_per_min=_median(series.between(at + 1, at + span)),
    )


def _median(part: Series) -> float | None:
    known = part.v[np.isfinite(part.v)]
    return float(np.median(known)) if known.size else None
