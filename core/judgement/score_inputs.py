"""Which values a score takes: the nearest to its moment, fresh enough, with no anchor or break between.

A score that needs a gas is taken at that gas's time; NEWS2 at the latest vitals. A missing input is never
taken as normal: it stays missing, and the score is bounded.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from core.judgement.context import Context
from core.judgement.derived import FigureInput
from core.judgement.gas_findings import STANDS_FOR_ARTERIAL
from core.judgement.oxygen_breathed import oxygen_breathed
from core.judgement.scores import Score, hacor, news2
from core.judgement.shapes import GasFigure, ScoreFigure, ScoreInput
from core.record.channels import CHANNELS
from core.record.episode import Episode, Series
from core.record.instant import MINUTE, Instant
from core.record.message import Message, Value
from core.record.support import SupportTime

DEVICE_MEDIAN = 15 * MINUTE
"""A device rate is taken as the median of this span around the moment: single breaths are noise."""
Walls = NDArray[np.int64]
"""Moments that no score may reach across, sorted."""
OBSERVED = ("rr", "spo2", "hr", "sbp", "temp")


@dataclass(frozen=True, slots=True)
class Found:
    """A value found for a score: the number or word, when it was, its text as typed, of which samples a median."""

    value: float | str | None = None
    at: Instant | None = None
    text: str | None = None
    median_of: tuple[Instant, Instant] | None = None
    reason: Message | None = None
    """Why there is none though an older one was logged."""

    @property
    def given(self) -> FigureInput:
        """The same as what a figure is made from."""
        return FigureInput(self.value, self.at, self.median_of)

    @property
    def number(self) -> float | None:
        """The value when it is a number."""
        return self.value if isinstance(self.value, float) else None

    @property
    def word(self) -> str | None:
        """The value when it is a word."""
        return self.value if isinstance(self.value, str) else None


NOTHING = Found()


def barriers(anchors: tuple[Instant, ...], support: SupportTime) -> Walls:
    """The moments that no score may reach across: anchors, and the edges of breaks. Sorted."""
    edges = [b.start for b in support.breaks] + [b.end for b in support.breaks if b.end is not None]
    return np.array(sorted({*anchors, *edges}), np.int64)


def nearest(
    episode: Episode,
    channel: str,
    at: Instant,
    within_min: float,
    walls: Walls,
) -> Found:
    """The value of a numeric channel nearest to a moment: a person's count first, else the machine's.

    A value at the very moment of a wall counts as before it, like a gas at the minute of an anchor.
    """
    series = episode.number(channel)
    span = int(within_min * MINUTE)
    low, high = _between_walls(at, walls)
    near = series.between(max(at - span, low), min(at + span, high))
    counted = near.spots
    if len(counted):
        i = int(np.argmin(np.abs(counted.t - at)))
        return Found(float(counted.v[i]), int(counted.t[i]), _typed(episode, counted, i))
    return _from_machine(near, at)


def _from_machine(near: Series, at: Instant) -> Found:
    """The median of the machine's values around the moment."""
    if not len(near):
        return NOTHING
    around = near.between(at - DEVICE_MEDIAN // 2, at + DEVICE_MEDIAN // 2)
    around = around.cut(~np.isnan(around.v))
    if not len(around):
        return NOTHING
    i = int(np.argmin(np.abs(around.t - at)))
    span = (int(around.t[0]), int(around.t[-1])) if len(around) > 1 else None
    return Found(float(np.median(around.v)), int(around.t[i]), median_of=span)


def _between_walls(at: Instant, walls: Walls) -> tuple[Instant, Instant]:
    """The span around a moment that no wall cuts."""
    i = int(np.searchsorted(walls, at, side="left"))
    low = int(walls[i - 1]) + 1 if i > 0 else -(2**62)
    high = int(walls[i]) if i < walls.size else 2**62
    return low, high


def _typed(episode: Episode, series: Series, i: int) -> str | None:
    entry = episode.standing[int(series.origin[i])].entry
    same_unit = entry.raw_unit == CHANNELS[entry.channel].unit
    return entry.raw.replace(",", ".") if entry.raw and same_unit else None


def nearest_word(episode: Episode, channel: str, at: Instant, within_min: float, walls: Walls) -> Found:
    """The newest word of a channel at or before a moment, if it is fresh and no wall lies between."""
    words = episode.text(channel)
    i = int(np.searchsorted(words.t, at, side="right")) - 1
    if i < 0:
        return NOTHING
    then = int(words.t[i])
    reason = _not_taken(channel, then, at, within_min, walls)
    return Found(words.v[i], then) if reason is None else Found(reason=reason)


def _not_taken(channel: str, then: Instant, at: Instant, within_min: float, walls: Walls) -> Message | None:
    """Why a value of before a moment does not count for it: too old, or a change since; None where it does."""
    if at - then > within_min * MINUTE:
        return Message("score.input_too_old", {"channel": channel, "at": then, "limit_min": within_min})
    low, _ = _between_walls(at, walls)
    return None if then >= low else Message("score.input_before_change", {"channel": channel, "at": then,
                                                                        "changed_at": low - 1})  # fmt: skip


def _nearest_or_why(episode: Episode, channel: str, at: Instant, within_min: float, walls: Walls) -> Found:
    """The nearest value; where there is none, why the newest before it does not count."""
    found = nearest(episode, channel, at, within_min, walls)
    i = episode.number(channel).last_at_or_before(at) if found.value is None else -1
    if i < 0:
        return found
    return Found(reason=_not_taken(channel, int(episode.number(channel).t[i]), at, within_min, walls))


def rate_at(ctx: Context, at: Instant, walls: Walls) -> Found:
    """The respiratory rate: a counted one beats the machine's."""
    within = ctx.policy.freshness.of("rr")
    counted = _nearest_or_why(ctx.episode, "rr", at, within, walls)
    machine = NOTHING if counted.value is not None else nearest(ctx.episode, "rr_total", at, within, walls)
    return machine if machine.value is not None else counted


def gas_inputs(ctx: Context, gas: GasFigure, walls: Walls) -> dict[str, Found]:
    """The five inputs of HACOR at a gas."""
    fresh = ctx.policy.freshness
    return {
        "hr": _nearest_or_why(ctx.episode, "hr", gas.at, fresh.of("hr"), walls),
        "ph": Found(gas.ph, gas.at, gas.ph_text),
        "gcs": _nearest_or_why(ctx.episode, "gcs", gas.at, fresh.of("gcs"), walls),
        "pf": Found(gas.pf_mmHg, gas.at) if gas.pf_mmHg is not None else NOTHING,
        "rr": rate_at(ctx, gas.at, walls),
    }


def hacor_at(ctx: Context, gas: GasFigure, walls: Walls) -> ScoreFigure:
    """HACOR 2017 at a gas, with the vitals nearest to it."""
    found = gas_inputs(ctx, gas, walls)
    score = hacor(
        hr=found["hr"].number, ph=gas.ph, gcs=found["gcs"].number, pf=gas.pf_mmHg, rr=found["rr"].number,
        paco2=gas.paco2_mmHg, texts=texts_of(found), on_mask=on_mask(ctx, gas.at),
    )  # fmt: skip
    return score_figure(score, gas.at, found, pf_reason(gas))


def texts_of(found: Mapping[str, Found]) -> dict[str, str | None]:
    """The inputs as typed: they decide a rounding edge."""
    return {name: f.text for name, f in found.items()}


def pf_reason(gas: GasFigure) -> dict[str, Message]:
    """Why a gas has no P/F, if it has none."""
    return {"pf": gas.reasons["pf_mmHg"]} if gas.pf_mmHg is None and "pf_mmHg" in gas.reasons else {}


def on_mask(ctx: Context, at: Instant) -> bool | None:
    """On mask ventilation at a moment; None where support's start is not known. High flow is no mask."""
    if ctx.support.start is None:
        return False
    return ctx.support.on_support(at) and ctx.settings.at(at).mode != "high-flow nasal"


def hacor_at_gases(ctx: Context, walls: Walls) -> dict[Instant, ScoreFigure]:
    """HACOR at every arterial or capillary gas drawn on support."""
    judged = (g for g in ctx.gases if g.site in STANDS_FOR_ARTERIAL and not g.off_support)
    return {g.at: hacor_at(ctx, g, walls) for g in judged}


def news2_latest(ctx: Context, walls: Walls) -> ScoreFigure:
    """NEWS2 at the latest vitals that a person took (the machine's, where nobody took any)."""
    at = _latest_vitals(ctx.episode)
    if at is None:
        return ScoreFigure(reasons={"points": Message("score.no_vitals", {})})
    return news2_at(ctx, at, walls)


def news2_at(ctx: Context, at: Instant, walls: Walls) -> ScoreFigure:
    """NEWS2 at a moment. Scale 2 only where a clinician recorded it."""
    fresh = ctx.policy.freshness
    found = {c: _nearest_or_why(ctx.episode, c, at, fresh.of(c), walls) for c in ("spo2", "sbp", "hr", "temp")}
    found["rr"] = rate_at(ctx, at, walls)
    found["acvpu"] = nearest_word(ctx.episode, "acvpu", at, fresh.of("acvpu"), walls)
    found["on_oxygen"] = _oxygen(ctx, at)
    oxygen = None if found["on_oxygen"].value is None else found["on_oxygen"].value == "yes"
    scale = 2 if ctx.episode.latest_text("spo2_scale") == "2" else 1
    score = news2(
        rr=found["rr"].number, spo2=found["spo2"].number, on_oxygen=oxygen, sbp=found["sbp"].number,
        hr=found["hr"].number, acvpu=found["acvpu"].word, temp=found["temp"].number,
        scale=scale,
        texts=texts_of(found), age=ctx.episode.latest("age"),
    )  # fmt: skip
    figure = score_figure(score, at, found, {})
    return figure if score.population_reason is not None else replace(figure, caveat=_scale_caveat(ctx, scale))


def _oxygen(ctx: Context, at: Instant) -> Found:
    """On oxygen or not, with when that was logged; off the mask what was set on the device does not count."""
    breathed = oxygen_breathed(ctx.settings, ctx.support, at)
    if breathed.given is not None:
        return Found("yes" if breathed.given else "no", breathed.at)
    off = breathed.off_since
    return NOTHING if off is None else Found(reason=Message("score.oxygen_off_mask", {"at": off}))


def _scale_caveat(ctx: Context, scale: int) -> Message:
    """The scale used. Under a range for hypercapnic risk, scale 1 scores the SpO2 that is wanted as bad: it is said,
    and the scale stays a clinician's word."""
    values: dict[str, Value] = {"scale": scale}
    if scale == 1 and ctx.target.high <= ctx.policy.oxygen.risk_target_high.value:
        values |= {"low": ctx.target.low, "high": ctx.target.high}
    return Message("news2.scale", values)


def _latest_vitals(episode: Episode) -> Instant | None:
    taken = [int(s.t[-1]) for c in OBSERVED if len(s := episode.number(c).spots)]
    machine = [int(s.t[-1]) for c in OBSERVED if len(s := episode.number(c))]
    return max(taken, default=max(machine, default=None))


def score_figure(
    score: Score, at: Instant, found: Mapping[str, Found], reasons: Mapping[str, Message]
) -> ScoreFigure:
    """A pure score with the times of its inputs."""
    inputs = {
        name: ScoreInput(_shown(part.value), (f := found.get(name, NOTHING)).at, part.points, f.median_of, f.reason)
        for name, part in score.parts.items()
    }
    why = dict(reasons)
    if score.points is None:
        why["points"] = Message("score.inputs_missing", {"missing": ", ".join(score.missing)})
    if score.population_reason is not None and score.population_reason.key == "population.input_unknown":
        why["population"] = score.population_reason
    caveat = score.population_reason or (score.notes[0] if score.notes else None)
    return ScoreFigure(
        points=score.points, lowest=score.lowest, highest=score.highest, at=at, missing=score.missing,
        inputs=inputs, population=score.population, caveat=caveat, reasons=why,
    )  # fmt: skip


def _shown(value: float | str | bool | None) -> float | str | None:
    return ("yes" if value else "no") if isinstance(value, bool) else value
