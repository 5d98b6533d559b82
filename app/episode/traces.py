"""The values of a channel as traces to draw: what people logged, what a machine wrote, what was computed."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, field
from typing import Final

import numpy as np

from app.chart.shapes import Drawn, Look, Span, Trace
from app.telling.phrases import computed_name, translate
from app.telling.support_course import Course
from app.words import Reader, sentence
from core.judgement.shapes import EpisodeFigures, GasFigure
from core.record.channels import CHANNELS, Group
from core.record.episode import Episode, Series
from core.record.instant import MINUTE, Instant
from core.record.units import MMHG_PER_KPA

GAS_PRESSURES: Final = ("paco2", "pao2", "pf")
_DECIMALS: Final = {"pf": 0, "pressure_support": 1, "hco3_calculated": 1, "sbe": 1}
_UNITS: Final = {"pf": "mmHg", "pressure_support": "cmH2O", "hco3_calculated": "mmol/L", "sbe": "mmol/L"}
_NAMES: Final = {
    "ph": "pH",
    "paco2": "PaCO2",
    "pao2": "PaO2",
    "rr": "RR counted",
    "rr_total": "RR device",
    "vte": "Tidal vol.",
    "mv": "Minute vent.",
}
_OF_BICARBONATE: Final = {"ph", "paco2", "hco3"}
_FROM_GAS: Final = {"pf": "pf_mmHg", "hco3_calculated": "hco3_calculated_mmol_L", "sbe": "sbe_mmol_L"}
LEAST_GAP: Final = 5 * MINUTE


@dataclass(frozen=True, slots=True)
class Shown:
    """How a channel is shown: unit, decimals, and the factor from its canonical unit."""

    unit: str
    decimals: int
    factor: float


def shown_as(channel: str, gas_unit: str) -> Shown:
    """The unit a reader wants: kPa or mmHg for gas pressures, per cent for a fraction."""
    if channel in GAS_PRESSURES:
        return Shown("kPa", 1, 1 / MMHG_PER_KPA) if gas_unit == "kPa" else Shown("mmHg", 0, 1.0)
    if channel in _UNITS:
        return Shown(_UNITS[channel], _DECIMALS[channel], 1.0)
    c = CHANNELS[channel]
    if c.unit == "fraction":
        return Shown("%", 0, 100.0)
    unit = {"pH": "pH", "degC": "°C", "points": translate("traces", "points")}.get(c.unit, c.unit)
    return Shown(unit, c.decimals, 1.0)


@dataclass(frozen=True, slots=True)
class TraceMaker:
    """Makes the traces of one episode."""

    record: Episode
    figures: EpisodeFigures
    course: Course
    gas_unit: str
    doubt_leak_above: float
    reader: Reader = field(default_factory=Reader)

    def traces(self, channel: str, ink: int) -> tuple[Trace, ...]:
        """Every trace of a channel, in one ink; none where there is nothing to draw."""
        if channel in _FROM_GAS:
            return tuple(self._from_gases(channel, ink))
        if channel == "pressure_support":
            return tuple(self._support(ink))
        group = CHANNELS[channel].group
        if group is Group.SETTING:
            return tuple(self._setting(channel, ink))
        if group is Group.GAS:
            return tuple(self._gas_values(channel, ink))
        return tuple(self._measured(channel, ink))

    def _trace(
        self,
        channel: str,
        key: str,
        name: str,
        t: np.ndarray,
        v: np.ndarray,
        drawn: Drawn,
        ink: int,
        looks: np.ndarray | None = None,
        gap: int | None = None,
        doubts: tuple[Span, ...] = (),
    ) -> Trace:
        as_shown = shown_as(channel, self.gas_unit)
        return Trace(
            key,
            name,
            as_shown.unit,
            t.astype(np.int64),
            v * as_shown.factor,
            drawn,
            as_shown.decimals,
            gap,
            looks,
            doubts,
            ink,
        )

    def _measured(self, channel: str, ink: int) -> Iterator[Trace]:
        series = self.record.number(channel).until(self.course.until)
        name = trace_name(channel)
        machine, spots = series.machine, series.spots
        if len(machine):
            gap = max(LEAST_GAP, 3 * int(np.median(np.diff(machine.t)))) if len(machine) > 1 else LEAST_GAP
            yield self._trace(
                channel,
                channel,
                name,
                machine.t,
                machine.v,
                Drawn.LINE,
                ink,
                None,
                gap,
                self._doubts(channel),
            )
        if len(spots):
            told = translate("traces", "{name}, spot").format(name=name) if len(machine) else name
            doubts = self._typed_doubts(channel)
            looks = self._looks(spots)
            in_doubt = np.isin(spots.t, np.array([d.start for d in doubts], np.int64)) & (looks == Look.FRESH)
            looks[in_doubt] = Look.DOUBTFUL
            yield self._trace(
                channel, f"{channel}.spots", told, spots.t, spots.v, Drawn.SPOTS, ink, looks, doubts=doubts
            )

    def _typed_doubts(self, channel: str) -> tuple[Span, ...]:
        """Readings that people typed and that the figures leave out or doubt: each is its moment alone."""
        told = (d for d in self.figures.ventilation.typed_doubts if d.channel == channel)
        return tuple(Span(d.at, d.at + 1, sentence(d.why, self.reader)) for d in told)

    def _gas_values(self, channel: str, ink: int) -> Iterator[Trace]:
        series = self.record.number(channel).until(self.course.until)
        venous = {g.at for g in self.figures.gases if g.site == "venous"}
        is_venous = np.isin(series.t, np.array(sorted(venous), np.int64)) if venous else np.zeros(len(series), bool)
        usual, other = series.cut(~is_venous), series.cut(is_venous)
        if len(usual):
            yield self._trace(
                channel,
                channel,
                trace_name(channel),
                usual.t,
                usual.v,
                Drawn.SPOTS_JOINED,
                ink,
                self._looks(usual, channel),
            )
        if len(other):
            name = translate("traces", "{name}, venous").format(name=trace_name(channel))
            yield self._trace(
                channel, f"{channel}.venous", name, other.t, other.v, Drawn.SPOTS, ink, self._looks(other, channel)
            )

    def _from_gases(self, channel: str, ink: int) -> Iterator[Trace]:
        gases = [g for g in self.figures.gases if getattr(g, _FROM_GAS[channel]) is not None]
        if gases:
            t = np.array([g.at for g in gases], np.int64)
            v = np.array([getattr(g, _FROM_GAS[channel]) for g in gases], np.float64)
            looks = np.array([_gas_look(g) for g in gases], np.uint8)
            yield self._trace(channel, channel, trace_name(channel), t, v, Drawn.SPOTS_JOINED, ink, looks)

    def _setting(self, channel: str, ink: int) -> Iterator[Trace]:
        steps = self.course.in_force.steps(channel) if channel != "rise" else None
        if steps is not None and steps.t.size:
            yield self._trace(channel, channel, trace_name(channel), *self._held(steps.t, steps.v), Drawn.STEPS, ink)

    def _support(self, ink: int) -> Iterator[Trace]:
        stretches = self.course.stretches
        if stretches:
            t = np.array([s.start for s in stretches], np.int64)
            v = np.array([s.settings.pressure_support for s in stretches], np.float64)
            yield self._trace(
                "pressure_support",
                "pressure_support",
                trace_name("pressure_support"),
                *self._held(t, v),
                Drawn.STEPS,
                ink,
            )

    def _held(self, t: np.ndarray, v: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
        """A step holds until the end of support, so it is written there once more."""
        end = self.course.stretches[-1].end if self.course.stretches else self.course.until
        if end <= t[-1]:
            return t, v
        return np.append(t, end), np.append(v, v[-1])

    def _looks(self, series: Series, channel: str = "") -> np.ndarray:
        looks = np.full(len(series), Look.FRESH, np.uint8)
        looks[series.doubt] = Look.DOUBTFUL
        if channel in _OF_BICARBONATE:  # either may be the wrong one
            odd = [g.at for g in self.figures.gases if g.implausible is not None]
            looks[np.isin(series.t, np.array(odd, np.int64))] = Look.DOUBTFUL
        for i, origin in enumerate(series.origin):
            if origin >= 0:
                standing = self.record.standing[int(origin)]
                if standing.corrected:
                    looks[i] = Look.CORRECTED
                if standing.disputed:
                    looks[i] = Look.DISPUTED
        return looks

    def _doubts(self, channel: str) -> tuple[Span, ...]:
        """A tidal volume is uncertain in the minutes of high leak, and void while the mask is off."""
        if channel not in ("vte", "mv"):
            return ()
        word = translate("traces", "leak above {limit:g} L/min").format(limit=self.doubt_leak_above)
        leak = self.record.number("leak").until(self.course.until).machine
        spans = [Span(a, b, word) for a, b in runs_above(leak.t, leak.v, self.doubt_leak_above)]
        off = translate("traces", "mask off")
        spans += [Span(b.start, b.end or self.course.until, off) for b in self.course.breaks]
        if self.figures.leak.definition is None:  # the figures call every volume doubtful then
            measured = self.record.number(channel).until(self.course.until).machine.t
            unknown = translate("traces", "leak not known")
            spans += [Span(int(measured[0]), int(measured[-1]) + 1, unknown)] if len(measured) else []
        return tuple(sorted(spans, key=lambda s: s.start))


def runs_above(t: np.ndarray, v: np.ndarray, limit: float) -> list[tuple[Instant, Instant]]:
    """Stretches of samples above a limit; each reaches to the next sample, at most 5 minutes on.

    Stretches less than a minute apart are one: a leak noted every second trembles about its limit.
    """
    over = np.concatenate(([False], v > limit, [False]))
    edges = np.flatnonzero(over[1:] != over[:-1])
    if edges.size == 0:
        return []
    starts, last = t[edges[::2]], edges[1::2] - 1
    ends = np.minimum(np.append(t[1:], t[-1] + MINUTE)[last], t[last] + LEAST_GAP)
    apart = starts[1:] - ends[:-1] >= MINUTE
    firsts, lasts = np.concatenate(([True], apart)), np.concatenate((apart, [True]))
    return [(int(a), int(b)) for a, b in zip(starts[firsts], ends[lasts], strict=True)]


def trace_name(channel: str) -> str:
    """The name at the end of a trace: short where the trade has a short one."""
    name = _NAMES.get(channel)
    return translate("traces", name) if name is not None else computed_name(channel)


def _gas_look(gas: GasFigure) -> Look:
    if gas.disputed:
        return Look.DISPUTED
    if gas.doubt:
        return Look.DOUBTFUL
    return Look.CORRECTED if gas.corrected else Look.FRESH
