"""An episode's panels as a table: a row for each value, setting, verdict, break and event, in order of time."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from typing import Final

import numpy as np

from app.chart.doubts import Doubts
from app.chart.shapes import Drawn, Look, StackSpec, Trace
from app.look.formats import clock, fixed, wall
from app.telling.phrases import settings_line, translate
from app.telling.support_course import Stretch
from app.telling.table import Table
from core.record.instant import MINUTE, Instant

MOST_ROWS: Final = 5000
"""More rows than this are read by nobody: the lines of machines are told by lowest and highest then."""
SPANS_MIN: Final = (1, 2, 5, 10, 15, 30, 60)

Row = tuple[Instant, tuple[str, ...]]


def table_of_stack(spec: StackSpec, window: tuple[Instant, Instant]) -> Table:
    """What lies in a window of time. Nothing is left out unsaid: where a line has too many values, each row holds
    the lowest and highest of some minutes, and the words say so."""
    maker = _Rows(spec, *window)
    minutes = maker.minutes_together()
    found = sorted((*maker.settings(), *maker.verdicts(), *maker.areas(), *maker.events(), *maker.values(minutes)),
                   key=lambda row: row[0])  # fmt: skip
    zone = str(spec.zone)
    said = [translate("tables", "{start} to {end}.").format(start=wall(window[0], zone), end=wall(window[1], zone))]
    if minutes:
        text = translate("tables", "Lines: lowest and highest of each {minutes} min. Zoom in for each value.")
        said.append(text.format(minutes=minutes))
    return Table(spec.name, _heads(), tuple(row for _, row in found), " ".join((*said, spec.summary)))


def _heads() -> tuple[str, ...]:
    return (
        translate("tables", "When"),
        translate("tables", "What"),
        translate("tables", "Value"),
        translate("tables", "Unit"),
        translate("tables", "Panel"),
        translate("tables", "Marks"),
    )


@dataclass(frozen=True, slots=True)
class _Rows:
    """Makes the rows between two moments."""

    spec: StackSpec
    start: Instant
    end: Instant

    def _row(self, at: Instant, what: str, value: str, unit: str = "", panel: str = "", marks: str = "") -> Row:
        return at, (wall(at, str(self.spec.zone)), what, value, unit, panel, marks)

    def _inside(self, at: Instant) -> bool:
        return self.start <= at <= self.end

    def settings(self) -> Iterator[Row]:
        """What was set, from its first moment; breaks of support."""
        ribbon = self.spec.ribbon
        if ribbon is None:
            return
        doubtful = translate("tables", "doubtful")
        for step in ribbon.steps:
            if step.start <= self.end and step.end >= self.start and isinstance(step.payload, Stretch):
                what, line = translate("tables", "Settings in force"), settings_line(step.payload.settings)
                yield self._row(step.start, what, line, "", ribbon.title, doubtful if step.doubtful else "")
        for gap in ribbon.breaks:
            if gap.start <= self.end and gap.end >= self.start:
                until = translate("tables", "until {time}").format(time=clock(gap.end, str(self.spec.zone)))
                yield self._row(gap.start, translate("tables", "Off support"), until, "", ribbon.title)

    def verdicts(self) -> Iterator[Row]:
        """Each response window with its verdict and the state of its gas."""
        zone = str(self.spec.zone)
        brackets = (b for panel in self.spec.panels for b in panel.brackets)
        told = dict.fromkeys((b.anchor, b.start, b.end, b.word, b.state_word) for b in brackets)
        for anchor, start, end, word, state in told:
            if anchor <= self.end and end >= self.start:
                what = translate("tables", "Response, window {start} to {end}")
                what = what.format(start=clock(start, zone), end=clock(end, zone))
                yield self._row(anchor, what, word, "", "", state)

    def areas(self) -> Iterator[Row]:
        """Ranges that change with time, such as the PaCO2 that is expected."""
        for panel in self.spec.panels:
            for area in panel.areas:
                decimals = next((s.decimals for s in panel.scales if s.unit == area.unit), 0)
                for at, low, high in zip(area.t, area.low, area.high, strict=True):
                    if self._inside(int(at)) and np.isfinite(low) and np.isfinite(high):
                        value = _range(float(low), float(high), decimals)
                        yield self._row(int(at), area.word, value, area.unit, panel.title)

    def events(self) -> Iterator[Row]:
        """What happened, in words."""
        for tick in self.spec.events:
            if self._inside(tick.at):
                yield self._row(tick.at, tick.word, "", "", translate("tables", "Event"))

    def minutes_together(self) -> int:
        """Of how many minutes the lines' values are told together, so that the rows can be read; 0: each alone."""
        lines = [t.t[_seen(t, self.start, self.end)] for _, t in self._traces() if t.drawn is Drawn.LINE]
        if sum(map(len, lines)) <= MOST_ROWS:
            return 0
        for minutes in SPANS_MIN:
            if sum(len(np.unique(t // (minutes * MINUTE))) for t in lines) <= MOST_ROWS:
                return minutes
        return SPANS_MIN[-1]

    def _traces(self) -> Iterator[tuple[str, Trace]]:
        return ((panel.title, trace) for panel in self.spec.panels for trace in panel.traces)

    def values(self, minutes: int) -> Iterator[Row]:
        """Every trace's values; those of lines by lowest and highest where `minutes` are told together."""
        for panel, trace in self._traces():
            seen = _seen(trace, self.start, self.end)
            if minutes and trace.drawn is Drawn.LINE:
                yield from self._together(panel, trace, seen, minutes * MINUTE)
            else:
                yield from self._each(panel, trace, seen)

    def _each(self, panel: str, trace: Trace, seen: np.ndarray) -> Iterator[Row]:
        words, doubts = _look_words(), Doubts(trace.doubts)
        for n in seen:
            at = int(trace.t[n])
            look = words.get(Look(trace.looks[n]), "") if trace.looks is not None else ""
            marks = ", ".join(w for w in (look, doubts.word_at(at)) if w)
            yield self._row(at, trace.name, fixed(float(trace.v[n]), trace.decimals), trace.unit, panel, marks)

    def _together(self, panel: str, trace: Trace, seen: np.ndarray, span: int) -> Iterator[Row]:
        if not len(seen):
            return
        t, v = trace.t[seen], trace.v[seen]
        firsts = np.flatnonzero(np.concatenate(([True], np.diff(t // span) != 0)))
        lows, highs = np.minimum.reduceat(v, firsts), np.maximum.reduceat(v, firsts)
        doubts = Doubts(trace.doubts)
        doubtful = np.maximum.reduceat(doubts.covers(t).astype(np.int64) * np.arange(1, len(t) + 1), firsts)
        for first, low, high, place in zip(firsts, lows, highs, doubtful, strict=True):
            marks = doubts.word_at(int(t[place - 1])) if place else ""
            value = _range(float(low), float(high), trace.decimals)
            yield self._row(int(t[first]), trace.name, value, trace.unit, panel, marks)


def _seen(trace: Trace, start: Instant, end: Instant) -> np.ndarray:
    """Places of the values inside a window that are not missing."""
    a, b = np.searchsorted(trace.t, start, side="left"), np.searchsorted(trace.t, end, side="right")
    return np.flatnonzero(np.isfinite(trace.v[a:b])) + a


def _range(low: float, high: float, decimals: int) -> str:
    if low == high:
        return fixed(low, decimals)
    return translate("tables", "{low} to {high}").format(low=fixed(low, decimals), high=fixed(high, decimals))


def _look_words() -> dict[Look, str]:
    return {
        Look.DOUBTFUL: translate("tables", "doubtful"),
        Look.CORRECTED: translate("tables", "corrected"),
        Look.DISPUTED: translate("tables", "disputed"),
        Look.CARRIED: translate("tables", "carried forward"),
    }
