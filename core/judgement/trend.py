"""Trends: the value now and its robust slope per hour with interval, over the policy's span before `as_of`.

P/F, S/F and ROX need a known FiO2. Device channels are reduced to 15-min medians. With four points or fewer there
is a slope and a band, and nothing is called significant.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from math import isnan

import numpy as np
from numpy.typing import NDArray

from core.judgement.context import Context
from core.judgement.derived import FigureInput
from core.judgement.device_medians import Medians, medians, with_newest
from core.judgement.probable_breaks import in_any, probable_breaks
from core.judgement.score_inputs import Walls, barriers, nearest
from core.judgement.shapes import RatioFigure
from core.judgement.theil_sen import theil_sen
from core.physiology.ventilation import base_weight, predicted_body_weight
from core.record.episode import Series
from core.record.instant import HOUR, MINUTE, Instant
from core.record.message import Message
from core.record.samples import Flags, Times, Values
from core.record.settings import Steps

NO_WALLS: Walls = np.empty(0, np.int64)
ROX_CAVEAT = Message("trend.rox_validated_in_high_flow")
"""ROX was validated in high-flow nasal oxygen, not on a mask (Roca, AJRCCM 2019;199:1368)."""


@dataclass(frozen=True, slots=True)
class Points:
    """Values over time, in order, shapes (n,). `newest_of`: the samples whose median the last one is, if any."""

    t: Times
    v: Values
    newest_of: tuple[Instant, Instant] | None = None

    def within(self, start: Instant, end: Instant) -> Points:
        """The points from `start` to `end`, both included."""
        i, j = np.searchsorted(self.t, [start, end + 1])
        return Points(self.t[i:j], self.v[i:j], self.newest_of if j == self.t.size else None)


NO_POINTS = Points(np.empty(0, np.int64), np.empty(0))


def span_start(ctx: Context) -> Instant:
    """The first instant of the trend's span."""
    return ctx.as_of - int(ctx.policy.trend.span_h.value * HOUR)


def slope_figure(
    ctx: Context, points: Points, reasons: dict[str, Message], caveat: Message | None = None
) -> RatioFigure:
    """The figure of points: newest value (None where `reasons` has `latest`), slope per hour, interval, count."""
    start = span_start(ctx)
    near = points.within(start, ctx.as_of)
    n = int(near.t.size)
    line = theil_sen((near.t - ctx.as_of) / HOUR, near.v, ctx.policy.trend.confidence.value)
    if isnan(line.slope):
        reasons["slope_per_h"] = Message("trend.too_few_points", {"points": n, "needed": 2})
    elif isnan(line.low):
        reasons["slope_low"] = Message("trend.too_few_for_interval", {"points": n, "needed": 3})
    elif n <= ctx.policy.trend.few_points.value:
        reasons["slope_low"] = Message("trend.few_points", {"points": n})
    empty = not points.t.size
    if empty:
        reasons.setdefault("latest", Message("trend.no_values"))
    hidden = "latest" in reasons
    return RatioFigure(
        None if hidden else float(points.v[-1]), None if empty else int(points.t[-1]), _known(line.slope),
        _known(line.low), _known(line.high), n, start, caveat, reasons,
        median_of=None if hidden else points.newest_of,
    )  # fmt: skip


def _known(value: float) -> float | None:
    return None if isnan(value) else value


def ratio_trends(ctx: Context) -> dict[str, RatioFigure]:
    """P/F (from arterial gases), S/F and ROX (from SpO2) as `pf`, `sf` and `rox`; nulls carry their reason."""
    spo2 = saturation_points(ctx)
    return {"pf": _pf(ctx), "sf": _sf(ctx, spo2), "rox": _rox(ctx, spo2)}


def _pf(ctx: Context) -> RatioFigure:
    gases = [g for g in ctx.gases if g.site == "arterial" and not g.off_support]
    known = [(g.at, g.pf_mmHg) for g in gases if g.pf_mmHg is not None]
    points = Points(np.array([t for t, _ in known], np.int64), np.array([v for _, v in known], np.float64))
    reasons: dict[str, Message] = {}
    if gases and gases[-1].pf_mmHg is None:
        unknown = Message("trend.fio2_not_known", {"at": gases[-1].at})
        reasons["latest"] = unknown if gases[-1].fio2 is None else gases[-1].reasons.get("pf_mmHg", unknown)
    figure = slope_figure(ctx, points, reasons)
    if figure.latest is None:
        return figure
    last = gases[-1]
    inputs = {"pao2": FigureInput(last.pao2_mmHg, last.at), "fio2": FigureInput(last.fio2, last.at)}
    return replace(figure, inputs=inputs)


@dataclass(frozen=True, slots=True)
class Saturations:
    """SpO2 on support with the FiO2 of that moment, NaN where not known; device values as 15-min medians.

    `first`: the oldest sample of each median, the moment itself of a single value.
    """

    t: Times
    spo2: Values
    fio2: Values
    first: Times

    @property
    def newest_of(self) -> tuple[Instant, Instant] | None:
        """The first and the last sample of the newest median; None for a single value."""
        single = not self.t.size or self.first[-1] == self.t[-1]
        return None if single else (int(self.first[-1]), int(self.t[-1]))


def saturation_points(ctx: Context) -> Saturations:
    """The SpO2 points of an episode. A quarter of an hour in which FiO2 changed has no FiO2."""
    series = _finite(ctx.episode.number("spo2"))
    machine = series.machine
    recent = machine.between(span_start(ctx), ctx.as_of)
    samples, fio2 = recent if len(recent) else machine, ctx.settings.fio2
    spot, bins = series.spots, _bins(ctx, samples, same_since(samples.t, fio2))
    from_bins: Values = fio2.on(bins.first)
    same: Flags = from_bins == fio2.on(bins.last)
    t = np.concatenate((spot.t, bins.last))
    order = np.argsort(t, kind="stable")
    values = np.concatenate((spot.v, bins.v))[order]
    fractions = np.concatenate((fio2.on(spot.t), np.where(same, from_bins, np.nan)))[order]
    first = np.concatenate((spot.t, bins.first))[order]
    keep = ~in_any(t[order], ctx.support.off_times)
    return Saturations(t[order][keep], values[keep], fractions[keep], first[keep])


def _finite(series: Series) -> Series:
    return series.cut(np.isfinite(series.v)) if len(series) else series


def same_since(t: Times, fio2: Steps) -> Instant:
    """From which of the samples at `t` on FiO2 was what it is at the newest; 0 where it never was another."""
    if not t.size:
        return 0
    given = fio2.on(t)
    other = np.flatnonzero(~((given == given[-1]) | (np.isnan(given) & np.isnan(given[-1]))))
    return int(t[other[-1] + 1]) if other.size else 0


def _bins(ctx: Context, series: Series, not_before: Instant = 0) -> Medians:
    """15-min medians; the newest is of the last 15 min, never of a quarter of an hour that has just begun."""
    span = int(ctx.policy.trend.device_median_min.value * MINUTE)
    return with_newest(medians(series.t, series.v, span), series.t, series.v, span, not_before)


def _sf(ctx: Context, points: Saturations) -> RatioFigure:
    ceiling = ctx.policy.oxygen.no_sf_above_spo2.value
    usable = (points.spo2 <= ceiling) & np.isfinite(points.fio2)
    reasons = _oxygen_reasons(points)
    if points.t.size and points.spo2[-1] > ceiling:
        values = {"at": int(points.t[-1]), "spo2": float(points.spo2[-1]), "limit": ceiling}
        reasons["latest"] = Message("trend.spo2_above_ceiling", values)
    figure = slope_figure(ctx, Points(points.t[usable], points.spo2[usable] / points.fio2[usable]), reasons)
    if figure.latest is None:
        return figure
    return replace(figure, inputs=_oxygen_inputs(points), median_of=points.newest_of)


def _oxygen_inputs(points: Saturations) -> dict[str, FigureInput]:
    at = int(points.t[-1])
    spo2 = FigureInput(float(points.spo2[-1]), at, points.newest_of)
    return {"spo2": spo2, "fio2": FigureInput(float(points.fio2[-1]), at)}


def _oxygen_reasons(points: Saturations) -> dict[str, Message]:
    if points.t.size and isnan(points.fio2[-1]):
        return {"latest": Message("trend.fio2_not_known", {"at": int(points.t[-1])})}
    return {}


def _rox(ctx: Context, points: Saturations) -> RatioFigure:
    walls = _walls(ctx)
    rates = rates_at(ctx, points.t, walls)
    reasons = _oxygen_reasons(points)
    if points.t.size and isnan(rates[-1]):
        reasons.setdefault("latest", Message("trend.rate_not_known", {"at": int(points.t[-1])}))
    usable = np.isfinite(points.fio2) & (rates > 0)
    ratio = points.spo2[usable] / points.fio2[usable] / rates[usable]
    figure = slope_figure(ctx, Points(points.t[usable], ratio), reasons, ROX_CAVEAT)
    if figure.latest is None:
        return figure
    rate = _rate_given(ctx, float(rates[-1]), int(points.t[-1]), walls)
    return replace(figure, inputs={**_oxygen_inputs(points), "rr": rate}, median_of=points.newest_of)


def _walls(ctx: Context) -> Walls:
    """What no rate may be taken across: changes, and the edges of breaks."""
    return barriers(tuple(step.at for a in ctx.anchors for step in a.steps), ctx.support)


def _rate_given(ctx: Context, rate: float, at: Instant, walls: Walls) -> FigureInput:
    """The rate that `rates_at` gives for a moment, with when it was counted, or of which samples it is a median."""
    near = nearest(ctx.episode, "rr", at, ctx.policy.freshness.vitals_min.value, walls)
    if near.at is not None and near.median_of is None and near.value == rate:
        return FigureInput(rate, near.at)
    span = int(ctx.policy.trend.device_median_min.value * MINUTE)
    bins = _rate_bins(ctx, np.array([at], np.int64), walls)
    k = int(np.searchsorted(bins.bin, at // span))
    several = bins.first[k] != bins.last[k]
    return FigureInput(rate, at, (int(bins.first[k]), int(bins.last[k])) if several else None)


def rates_at(ctx: Context, times: Times, walls: Walls = NO_WALLS) -> Values:
    """The respiratory rate at each of `times` (in order), shape (n,), NaN where there is none.

    Counted within 30 min with none of `walls` between, else the device's median.
    """
    counted = _finite(ctx.episode.number("rr").spots)
    out = np.full(times.shape, np.nan)
    if len(counted) and times.size:
        out = _nearest_within(counted, times, int(ctx.policy.freshness.vitals_min.value * MINUTE), walls)
    machine = _machine_rate(ctx)
    if len(machine) and times.size:
        span = int(ctx.policy.trend.device_median_min.value * MINUTE)
        bins = _rate_bins(ctx, times, walls)
        if bins.bin.size:
            i = np.minimum(np.searchsorted(bins.bin, times // span), bins.bin.size - 1)
            out = np.where(np.isnan(out) & (bins.bin[i] == times // span), bins.v[i], out)
    return out


def _rate_bins(ctx: Context, times: Times, walls: Walls) -> Medians:
    """The machine's rate in the quarters of an hour of `times` (in order), none of the newest from across a wall."""
    span = int(ctx.policy.trend.device_median_min.value * MINUTE)
    machine = _machine_rate(ctx).between(int(times[0]) // span * span - span, int(times[-1]) + span)
    before = walls[: int(np.searchsorted(walls, machine.t[-1]))] if len(machine) else walls[:0]
    return _bins(ctx, machine, int(before[-1]) + 1 if before.size else 0)


def _machine_rate(ctx: Context) -> Series:
    rr = ctx.episode.number("rr").machine
    return _finite(rr if len(rr) else ctx.episode.number("rr_total"))


def _nearest_within(series: Series, times: Times, reach: Instant, walls: Walls) -> Values:
    """The nearer of the neighbours on both sides that lie within reach in the same stretch between walls."""
    right = np.clip(np.searchsorted(series.t, times), 0, len(series) - 1)
    left = np.maximum(right - 1, 0)
    stretch, own = np.searchsorted(walls, series.t), np.searchsorted(walls, times)

    def away(i: NDArray[np.int64]) -> Values:
        apart = np.abs(series.t[i] - times).astype(np.float64)
        return np.where((stretch[i] == own) & (apart <= reach), apart, np.inf)

    nearer = np.where(away(left) <= away(right), left, right)
    return np.where(np.isfinite(away(nearer)), series.v[nearer], np.nan)


def channel_trend(ctx: Context, channel: str) -> RatioFigure:
    """The trend of a channel, or of `vte_per_kg` (mL per kg of predicted weight).

    A counted respiratory rate beats the device's where it was counted at least twice in the span. Tidal
    volumes of probable breaks are void.
    """
    if channel == "vte_per_kg":
        return _vte_per_kg(ctx)
    series = _finite(ctx.episode.number(channel))
    start = span_start(ctx)
    spots = Points(series.spots.t, series.spots.v)
    if channel == "rr":
        machine = _machine_rate(ctx)
        if spots.within(start, ctx.as_of).t.size >= 2 or not len(machine):
            return slope_figure(ctx, spots, {})
        return slope_figure(ctx, _device_points(ctx, machine), {})
    return slope_figure(ctx, points_of(ctx, series), {})


def points_of(ctx: Context, series: Series) -> Points:
    """The points of a series: what people logged, and the 15-min medians of what a machine wrote in the span."""
    return _together(Points(series.spots.t, series.spots.v), _device_points(ctx, series.machine))


def _device_points(ctx: Context, series: Series) -> Points:
    bins = _bins(ctx, series.between(span_start(ctx), ctx.as_of))
    if not bins.t.size or bins.first[-1] == bins.last[-1]:
        return Points(bins.t, bins.v)
    return Points(bins.t, bins.v, (int(bins.first[-1]), int(bins.last[-1])))


def _together(a: Points, b: Points) -> Points:
    t, v = np.concatenate((a.t, b.t)), np.concatenate((a.v, b.v))
    order = np.argsort(t, kind="stable")
    newest = next((p for p in (b, a) if p.t.size and p.t[-1] == t.max()), NO_POINTS)
    return Points(t[order], v[order], newest.newest_of)


def _vte_per_kg(ctx: Context) -> RatioFigure:
    height, sex = ctx.episode.latest("height"), ctx.episode.latest_text("sex")
    pbw = float(predicted_body_weight(height if height is not None else np.nan, base_weight(sex)))
    if isnan(pbw):
        reason = Message("trend.predicted_weight_not_known", {"height": height, "sex": sex})
        return slope_figure(ctx, NO_POINTS, {"latest": reason})
    series = _finite(ctx.episode.number("vte")).between(span_start(ctx), ctx.as_of)
    series = series.cut(~in_any(series.t, (*ctx.support.off_times, *probable_breaks(ctx))))
    points = points_of(ctx, series)
    caveat = Message("caveat.tidal_volume_modelled_on_mask")
    return slope_figure(ctx, Points(points.t, points.v / pbw, points.newest_of), {}, caveat)
