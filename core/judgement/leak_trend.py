"""Leak: its level, slope and time over the limit, by what the device means by leak (rules of judgement 6.14).

A definition that is not known gives a trend only. A total leak's limit is the unintentional limit plus the
port's own leak at the time-weighted pressure of that moment.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from math import isnan

import numpy as np

from core.judgement.context import Context
from core.judgement.policy_sections import LeakRules
from core.judgement.probable_breaks import in_any, probable_breaks
from core.judgement.shapes import LeakFigure, RatioFigure
from core.judgement.sustained import Spell, spells
from core.judgement.trend import points_of, rates_at, slope_figure, span_start
from core.record.episode import Series
from core.record.instant import MINUTE, Instant
from core.record.message import Message
from core.record.samples import Flags, Times, Values

ASSUMED_DUTY = 1.0 / 3.0
"""Share of the breath spent on IPAP where inspiratory time or rate is not known (I:E 1:2; common practice)."""
LONGEST_SAMPLE = 2 * MINUTE
"""A sample stands until the next, but not across a silence."""


def leak_definition(ctx: Context) -> str | None:
    """What the device means by leak: "unintentional" or "total"; None where nobody said."""
    return _meanings(ctx)[-1].definition


@dataclass(frozen=True, slots=True)
class _Meaning:
    """What leak means from `start` until the next meaning."""

    start: Instant
    definition: str | None


def _meanings(ctx: Context) -> list[_Meaning]:
    """The meanings of leak over time. The first that was stated holds for what came before it, too."""
    said = ctx.episode.text("leak_definition")
    found: list[_Meaning] = []
    for t, text in zip(said.t.tolist(), said.v, strict=True):
        definition = text if text in ("unintentional", "total") else None
        if not found or found[-1].definition != definition:
            found.append(_Meaning(t if found else 0, definition))
    return found or [_Meaning(0, None)]


def leak_figure(ctx: Context, since: Instant | None = None) -> LeakFigure:
    """The leak of an episode over the trend's span. Nulls carry their reason.

    `since`: median and time over the limit count from there instead, e.g. from a shift's start; the slope stays that
    of the trend. Where the meaning of leak changed (another device), only what came after counts: two meanings make
    no trend.
    """
    series = ctx.episode.number("leak")
    if not len(series):
        return LeakFigure(reasons={"median_L_per_min": Message("leak.no_values")})
    meaning, suspected = _meanings(ctx)[-1], probable_breaks(ctx)
    wanted = span_start(ctx) if since is None else since
    start = max(wanted, meaning.start)
    near = series.between(start, ctx.as_of)
    worn = near.cut(~in_any(near.t, (*ctx.support.off_times, *suspected)) & np.isfinite(near.v))
    if not len(worn) and len(near) and in_any(near.t, ctx.support.off_times).all():
        why = Message("leak.off_mask", {"at": int(near.t[-1])})
        without = ("median_L_per_min", "slope_L_per_min_per_h", "limit_L_per_min", "minutes_over_limit")
        return LeakFigure(definition=meaning.definition, reasons=dict.fromkeys(without, why))
    figure = _level(worn, slope_figure(ctx, points_of(ctx, worn), {}), meaning.definition)
    figure = _with_newest(figure, worn, int(ctx.policy.trend.device_median_min.value * MINUTE))
    counted = (int(worn.t[0]), ctx.as_of) if len(worn) else None
    figure = replace(figure, probable_breaks=tuple((b.start, b.end) for b in suspected), counted=counted)
    figure = _with_adjustment(figure, ctx, series)
    if meaning.start > wanted:
        changed = Message("leak.meaning_changed", {"at": meaning.start})
        figure = replace(figure, reasons={**figure.reasons, "span": changed})
    if meaning.definition is None:
        reason = Message("leak.definition_not_known")
        return replace(figure, reasons={**figure.reasons, "limit_L_per_min": reason, "minutes_over_limit": reason})
    return _over(ctx, figure, worn, meaning.definition)


def _level(worn: Series, trend: RatioFigure, definition: str | None) -> LeakFigure:
    reasons = dict(trend.reasons)
    reasons.pop("latest", None)
    if "slope_per_h" in reasons:
        reasons["slope_L_per_min_per_h"] = reasons.pop("slope_per_h")
    if not len(worn):
        reasons["median_L_per_min"] = Message("leak.no_values")
    return LeakFigure(
        float(np.median(worn.v)) if len(worn) else None, trend.slope_per_h, trend.slope_low, trend.slope_high,
        definition=definition, reasons=reasons,
        median_of=(int(worn.t[0]), int(worn.t[-1])) if len(worn) > 1 else None,
    )  # fmt: skip


def _with_newest(figure: LeakFigure, worn: Series, span: Instant) -> LeakFigure:
    """The leak now: a quarter of an hour that has just begun would be the median of a breath or two."""
    if not len(worn):
        reasons = {**figure.reasons, "latest_L_per_min": Message("trend.no_values")}
        return replace(figure, reasons=reasons)
    at = int(worn.t[-1])
    if worn.spot[-1]:
        return replace(figure, latest_L_per_min=float(worn.v[-1]), latest_at=at)
    near = worn.machine.between(at - span + 1, at)
    of = (int(near.t[0]), at) if len(near) > 1 else None
    return replace(figure, latest_L_per_min=float(np.median(near.v)), latest_at=at, latest_median_of=of)


def _over(ctx: Context, figure: LeakFigure, worn: Series, definition: str) -> LeakFigure:
    limit, assumed = limits_at(ctx, np.append(worn.t, ctx.as_of), definition)
    reasons = dict(figure.reasons)
    if assumed and definition == "total":
        reasons["assumption"] = Message("leak.duty_assumed", {"share": ASSUMED_DUTY})
    if isnan(limit[-1]):
        reasons["limit_L_per_min"] = Message("leak.pressure_not_known")
    over, known = worn.v > limit[:-1], np.isfinite(limit[:-1])
    minutes, sampled = _minutes_over(worn, over, known, ctx.as_of)
    typed = int((worn.spot & known).sum())
    if minutes is None and typed:
        reasons["minutes_over_limit"] = Message("leak.typed_now_and_then")
    elif minutes is None and "limit_L_per_min" in reasons:
        reasons["minutes_over_limit"] = reasons["limit_L_per_min"]
    spell = _last_open(ctx, worn.machine, limit[:-1][~worn.spot])
    return replace(
        figure,
        minutes_over_limit=minutes,
        minutes_sampled=sampled,
        readings_typed=typed,
        readings_typed_over=int((worn.spot & over).sum()),
        limit_L_per_min=None if isnan(limit[-1]) else float(limit[-1]),
        over_since=spell.start if spell is not None else None,
        reasons=reasons,
    )


def _minutes_over(worn: Series, over: Flags, known: Flags, as_of: Instant) -> tuple[float | None, float | None]:
    """The time of the device's samples over their limit, and of all of them; None where there is none.

    What a person typed is of its moment: nobody knows how long it lasted, so it has no minutes.
    """
    counts = ~worn.spot
    if not (counts & known).any():
        return None, None
    t = worn.t[counts]
    stands = np.minimum(np.diff(np.append(t, as_of)), LONGEST_SAMPLE)
    return float(stands[over[counts]].sum() / MINUTE), float(stands[known[counts]].sum() / MINUTE)


def leak_doubts(leak: LeakFigure, rules: LeakRules) -> tuple[Message, ...]:
    """That the leak flag cannot be judged: readings typed now and then over the limit, and no device's samples."""
    if not leak.readings_typed_over or leak.minutes_sampled is not None:
        return ()
    told = {"over": leak.readings_typed_over, "of": leak.readings_typed}
    asked = {"n": int(rules.over_minutes.value), "m": int(rules.of_minutes.value)}
    return (Message("leak.flag_not_judged", {**told, **asked}),)


def _last_open(ctx: Context, worn: Series, limit: Values) -> Spell | None:
    rules = ctx.policy.leak
    found = spells(worn.t, worn.v, limit, int(rules.over_minutes.value), int(rules.of_minutes.value))
    return found[-1] if found and found[-1].end is None else None


def leak_spells(ctx: Context, n: int, m: int, extra_L_per_min: float = 0.0) -> tuple[Spell, ...]:
    """Sustained leak over the limit during support: N of M minutes, each stretch by what leak meant in it.

    None where the meaning is not known. `extra_L_per_min` raises the limit, e.g. to the policy's limit for acting.
    """
    series = ctx.episode.number("leak").machine
    worn = series.cut(~in_any(series.t, (*ctx.support.off_times, *probable_breaks(ctx))))
    meanings = _meanings(ctx)
    found: list[Spell] = []
    for meaning, following in zip(meanings, (*meanings[1:], None), strict=True):
        if meaning.definition is not None:
            part = worn.between(meaning.start, ctx.as_of if following is None else following.start - 1)
            limit, _ = limits_at(ctx, part.t, meaning.definition)
            found += spells(part.t, part.v, limit + extra_L_per_min, n, m)
    return tuple(found)


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
