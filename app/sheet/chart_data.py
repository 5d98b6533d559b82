"""The data of a sheet's small chart: pressures as a ribbon, gases, respiratory rate and SpO2 over the shift."""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

from app.look import formats
from app.words import Reader
from core.judgement.shapes import EpisodeFigures
from core.record.episode import Episode, Series
from core.record.instant import HOUR, MINUTE, Instant
from core.record.settings import Settings, SettingsInForce
from core.record.support import support_time
from core.record.units import MMHG_PER_KPA

BEFORE = HOUR
"""How much before the shift is drawn, so that its first change has its baseline in sight."""
LEAD_IN = 15 * MINUTE
GAP = 10 * MINUTE
"""Device samples further apart than this are not joined."""


@dataclass(frozen=True, slots=True)
class RibbonPiece:
    """Pressures in force from `start` to `end`, cmH2O; `low` None where there is no pressure. `word` says more."""

    start: Instant
    end: Instant
    low: float | None
    high: float | None
    word: str


@dataclass(frozen=True, slots=True)
class Dot:
    """One value taken now and then: where, its label, and whether it is doubtful."""

    at: Instant
    value: float
    label: str
    hollow: bool = False


@dataclass(frozen=True, slots=True, eq=False)
class Line:
    """Dense device values: `t` and `v` of shape (n,); joined where not further apart than `GAP`."""

    t: NDArray[np.int64]
    v: NDArray[np.float64]


NO_LINE = Line(np.empty(0, np.int64), np.empty(0))


@dataclass(frozen=True, slots=True, eq=False)
class Strip:
    """One row of the chart: its name with unit, dots, a line, a band of values to keep."""

    name: str
    dots: tuple[Dot, ...] = ()
    line: Line = NO_LINE
    band: tuple[float, float] | None = None
    least_span: float = 1.0

    @property
    def is_empty(self) -> bool:
        """Whether there is nothing to draw."""
        return not self.dots and not self.line.t.size


@dataclass(frozen=True, slots=True, eq=False)
class ShiftChart:
    """A shift on one clock, `start` to `end`; `shift_start` is where the shift begins in it."""

    start: Instant
    end: Instant
    shift_start: Instant
    zone: str
    ribbon: tuple[RibbonPiece, ...]
    breaks: tuple[tuple[Instant, Instant], ...]
    strips: tuple[Strip, ...]
    changes: tuple[Instant, ...] = field(default=())


def shift_chart(
    record: Episode,
    figures: EpisodeFigures,
    span: tuple[Instant, Instant],
    target: tuple[float, float],
    reader: Reader,
) -> ShiftChart:
    """The chart of a shift from one hour before `span` to its end. `target`: the SpO2 range in force."""
    start, end = span
    cut = record.until(end)
    settings = SettingsInForce(cut)
    support = support_time(cut, settings)
    begin = _begin(cut, start)
    breaks = tuple((max(b.start, begin), b.end if b.end is not None else end) for b in support.breaks
                   if b.end is None or b.end > begin)  # fmt: skip
    return ShiftChart(
        begin, end, start, reader.zone, tuple(_ribbon(settings, support.start, support.end, begin, end)), breaks,
        (_ph(figures, begin), _paco2(figures, begin, reader), _rate(cut, begin, end), _spo2(cut, begin, end, target)),
        tuple(r.anchor_at for r in figures.responses if begin <= r.anchor_at <= end),
    )  # fmt: skip


def _begin(record: Episode, start: Instant) -> Instant:
    """An hour before the shift, or just before the episode's first entry where that is later."""
    first = record.first_at
    return start - BEFORE if first is None else max(start - BEFORE, first - LEAD_IN)


def _ribbon(
    settings: SettingsInForce, began: Instant | None, ended: Instant | None, begin: Instant, end: Instant
) -> list[RibbonPiece]:
    if began is None:
        return []
    start, stop = max(began, begin), min(ended or end, end)
    moments = [start, *(t for t in settings.moments if start < t < stop)]
    pieces: list[RibbonPiece] = []
    for at, until in zip(moments, [*moments[1:], stop], strict=True):
        if until <= at:
            continue
        now = settings.at(at)
        low, high = _pressures(now)
        piece = RibbonPiece(at, until, low, high, _word(now))
        last = pieces[-1] if pieces else None
        if last is not None and (last.low, last.high, last.word) == (low, high, piece.word):
            pieces[-1] = RibbonPiece(last.start, until, low, high, piece.word)
        else:
            pieces.append(piece)
    return pieces


def _pressures(s: Settings) -> tuple[float | None, float | None]:
    if s.is_off or np.isnan(s.low_pressure):
        return None, None
    return s.low_pressure, None if np.isnan(s.ipap) or not s.is_bilevel else s.ipap


def _word(s: Settings) -> str:
    """Pressures and oxygen as short as they can be: 16/6 35 %."""
    low, high = _pressures(s)
    if low is None:
        pressure = s.mode or ""
    else:
        pressure = f"{formats.trimmed(high)}/{formats.trimmed(low)}" if high is not None else formats.trimmed(low)
    oxygen = formats.fraction(s.fio2) if not np.isnan(s.fio2) else "FiO2 ?"
    return f"{pressure} {oxygen}".strip()


def _ph(figures: EpisodeFigures, begin: Instant) -> Strip:
    dots = tuple(Dot(g.at, g.ph, g.ph_text or formats.fixed(g.ph, 2), g.doubt or g.site == "venous")
                 for g in figures.gases if g.ph is not None and g.at >= begin)  # fmt: skip
    return Strip("pH", dots, band=(7.35, 7.45), least_span=0.15)


def _paco2(figures: EpisodeFigures, begin: Instant, reader: Reader) -> Strip:
    factor = 1 / MMHG_PER_KPA if reader.gas_unit == "kPa" else 1.0
    dots = tuple(
        Dot(g.at, g.paco2_mmHg * factor, formats.gas_pressure(g.paco2_mmHg, reader.gas_unit).split(" ")[0],
            g.doubt or g.site == "venous")
        for g in figures.gases if g.paco2_mmHg is not None and g.at >= begin
    )  # fmt: skip
    return Strip(f"PaCO2 {reader.gas_unit}", dots, least_span=20 * factor)


def _rate(record: Episode, begin: Instant, end: Instant) -> Strip:
    counted = _dots(record.number("rr").spots.between(begin, end))
    machine = record.number("rr_total").between(begin, end)
    own = record.number("rr").machine.between(begin, end)
    return Strip("Rate /min", counted, _line(machine if len(machine) else own), least_span=15)


def _spo2(record: Episode, begin: Instant, end: Instant, target: tuple[float, float]) -> Strip:
    series = record.number("spo2").between(begin, end)
    return Strip("SpO2 %", _dots(series.spots), _line(series.machine), target, least_span=10)


def _dots(series: Series) -> tuple[Dot, ...]:
    return tuple(Dot(int(t), float(v), formats.trimmed(float(v)), bool(d))
                 for t, v, d in zip(series.t, series.v, series.doubt, strict=True))  # fmt: skip


def _line(series: Series) -> Line:
    return Line(series.t, series.v)
