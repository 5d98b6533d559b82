"""Draws a shift's chart on paper: ribbon, pH, PaCO2, respiratory rate, SpO2 on one clock, in black and white."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass

import numpy as np
from PySide6.QtCore import Qt

from app.look import formats
from app.sheet.chart_data import GAP, Line, ShiftChart, Strip
from app.sheet.press import GREY, LINE, PALE, SMALL, Align, Press, Style
from app.telling.language import in_language as tr
from core.record.instant import HOUR, Instant

LABEL = Style(7.2, True)
VALUE = Style(7.2)
NEWEST = Style(7.2, True)
SCALE = Style(7.0, False, GREY)
RIBBON_SHARE = 1.3
_LEFT, _RIGHT, _AXIS = 56.0, 30.0, 12.0
_TEXT_HIGH = 8.6
_LEAST_SCALED = 15.0
"""A strip less high than this has no room for both ends of its scale; its values stand over it."""


@dataclass(frozen=True, slots=True)
class ChartBlock:
    """The chart as a block of a page; it takes the height it is given."""

    chart: ShiftChart
    high: float = 150.0

    def height(self, press: Press, width: float) -> float:  # noqa: ARG002
        """Its height, which does not depend on the width."""
        return self.high

    def draw(self, press: Press, x: float, y: float, width: float) -> None:
        """Draw ribbon, strips and clock."""
        strips = [s for s in self.chart.strips if not s.is_empty]
        plot = _Plot(press, self.chart, x + _LEFT, width - _LEFT - _RIGHT)
        share = (self.high - _AXIS) / (RIBBON_SHARE + max(1, len(strips)))
        plot.grid(y, self.high - _AXIS)
        plot.ribbon(y, share * RIBBON_SHARE - 3, x)
        top = y + share * RIBBON_SHARE
        for strip in strips:
            plot.strip(strip, top, share - 3, x)
            top += share
        if not strips:
            press.text(x, top, width, tr("No gas, rate or SpO2 recorded for this stretch of time."), SMALL)
        plot.clock(y + self.high - _AXIS)


@dataclass(frozen=True, slots=True)
class _Plot:
    """The clock across the paper: from `left`, `width` points wide."""

    press: Press
    chart: ShiftChart
    left: float
    width: float

    def x(self, at: float) -> float:
        c = self.chart
        return self.left + (at - c.start) / (c.end - c.start) * self.width

    def grid(self, top: float, high: float) -> None:
        """Hours, changes of settings, and where the shift begins."""
        p = self.press
        for at, _ in self._hours():
            p.line(self.x(at), top, self.x(at), top + high, 0.25, "#cccccc")
        for at in self.chart.changes:
            p.line(self.x(at), top, self.x(at), top + high, 0.5, GREY, (3, 2))
        if self.chart.shift_start > self.chart.start:
            start = self.x(self.chart.shift_start)
            p.line(start, top, start, top + high, 0.9, GREY)

    def _hours(self) -> Iterator[tuple[Instant, str]]:
        """Whole hours of the wall clock, as many as have room."""
        c = self.chart
        count = (c.end - c.start) / HOUR
        every = next(n for n in (1, 2, 3, 6, 12, 24, 48, 168) if count / n * 26 <= self.width)
        at = -(-c.start // HOUR) * HOUR
        while at <= c.end:
            label = formats.clock(at, c.zone)
            if int(label[:2]) % every == 0 or every > 24:
                yield at, label[:5]
            at += HOUR

    def clock(self, top: float) -> None:
        p = self.press
        p.line(self.left, top, self.left + self.width, top, 0.6)
        for at, label in self._hours():
            p.text(self.x(at) - 15, top + 1.5, 30, label, VALUE, Align.CENTRE)

    def ribbon(self, top: float, high: float, label_left: float) -> None:
        """The band between EPAP and IPAP; its thickness is the pressure support."""
        p, c = self.press, self.chart
        most = max([20.0, *(v.high or v.low or 0.0 for v in c.ribbon)]) * 1.12
        p.text(label_left, top + high / 2 - 9, _LEFT - 4, "IPAP / EPAP\ncmH2O", LABEL)
        p.line(self.left, top + high, self.left + self.width, top + high, 0.3, LINE)
        if not c.ribbon:
            p.text(self.left + 4, top + high / 2 - 5, self.width, tr("No settings recorded."), SMALL)
            return

        def y(value: float) -> float:
            return top + high - value / most * high

        for piece in c.ribbon:
            x, wide = self.x(piece.start), self.x(piece.end) - self.x(piece.start)
            if piece.low is not None and piece.high is not None:
                p.box(x, y(piece.high), wide, y(piece.low) - y(piece.high), fill=PALE, weight=0.6)
            elif piece.low is not None:
                p.line(x, y(piece.low), x + wide, y(piece.low), 1.8)
        for start, end in c.breaks:
            p.box(self.x(start), top, self.x(end) - self.x(start), high, fill="#ffffff")
            p.box(self.x(start), top, self.x(end) - self.x(start), high, fill=LINE, weight=0.4, ink=LINE,
                  pattern=Qt.BrushStyle.BDiagPattern)  # fmt: skip
            self._break_word(start, end, top)
        self._ribbon_words(y)

    def _break_word(self, start: Instant, end: Instant, top: float) -> None:
        wide = self.press.width("off", LABEL)
        middle = (self.x(start) + self.x(end)) / 2
        if self.x(end) - self.x(start) > wide + 4:
            self.press.box(middle - wide / 2 - 1.5, top + 2, wide + 3, _TEXT_HIGH, fill="#ffffff")
            self.press.text(middle - wide / 2 - 2, top + 2, wide + 4, "off", LABEL, Align.CENTRE)

    def _ribbon_words(self, y: Callable[[float], float]) -> None:
        """Pressures and oxygen at the start of each piece where there is room before the next word."""
        free = self.left
        for n, piece in enumerate(self.chart.ribbon):
            if any(a <= piece.start < b for a, b in self.chart.breaks):
                continue
            start = max(self.x(piece.start) + 2, free)
            until = self.x(piece.end) if n + 1 < len(self.chart.ribbon) else self.left + self.width + _RIGHT
            until = min([until, *(self.x(a) for a, _ in self.chart.breaks if a > piece.start)])
            words = piece.word if self.press.width(piece.word, VALUE) <= until - start else piece.word.split(" ")[0]
            wide = self.press.width(words, VALUE)
            if wide > until - start or start > self.x(piece.end):
                continue
            level = piece.high if piece.high is not None else piece.low if piece.low is not None else 4.0
            under = y(level) + 1.2 if piece.high is not None else y(level) - _TEXT_HIGH - 1
            self.press.text(start, under, wide + 3, words, VALUE)
            free = start + wide + 5

    def strip(self, strip: Strip, top: float, high: float, label_left: float) -> None:
        """One row: band, line, dots with their values."""
        p = self.press
        low, most = _range(strip)

        ground = top + _TEXT_HIGH + 2.0  # values stand in a row of their own over the strip: they touch no line

        def y(value: float) -> float:
            return top + high - (value - low) / (most - low) * (top + high - ground)

        if strip.band is not None:
            b_low, b_high = max(strip.band[0], low), min(strip.band[1], most)
            if b_high > b_low:
                p.box(self.left, y(b_high), self.width, y(b_low) - y(b_high), fill="#efefef")
        name, _, unit = strip.name.partition(" ")
        p.text(label_left, top + high / 2 - (8 if unit else 3.5), _LEFT - 4, f"{name}\n{unit}".strip(), LABEL)
        p.line(self.left, top + high, self.left + self.width, top + high, 0.3, LINE)
        decimals = 2 if strip.name == "pH" else 0
        right = self.left + self.width + 5
        if high - _TEXT_HIGH >= _LEAST_SCALED:
            p.text(right, ground - 4, _RIGHT - 5, formats.fixed(most, decimals), SCALE)
            p.text(right, top + high - 7, _RIGHT - 5, formats.fixed(low, decimals), SCALE)
        for part in joined(strip.line):
            p.path([(self.x(int(t)), y(float(v))) for t, v in zip(part.t, part.v, strict=True)], 0.55, GREY)
        self._dots(strip, y, top)

    def _dots(self, strip: Strip, y: Callable[[float], float], top: float) -> None:
        """Dots joined by a fine line where there is no device line; the values over them where they do not touch."""
        p = self.press
        places = [(self.x(d.at), y(d.value), d) for d in strip.dots]
        if not strip.line.t.size and len(places) > 1:
            p.path([(x, at) for x, at, _ in places], 0.4, GREY)
        for x, at, dot in places:
            p.dot(x, at, 1.5, hollow=dot.hollow)
        labels = [(x, dot.label, VALUE) for x, _, dot in places]
        newest = _newest(strip.line)
        if newest is not None and (not places or newest[0] > strip.dots[-1].at):
            labels.append((self.x(newest[0]), formats.trimmed(newest[1], 0), NEWEST))
        for x, label, style in _apart(labels, p, self.left + self.width):
            wide = p.width(label, style)
            p.box(x - 0.5, top + 0.5, wide + 1, _TEXT_HIGH - 1, fill="#ffffff")
            p.text(x, top - 0.3, wide + 2, label, style)


def _newest(line: Line) -> tuple[int, float] | None:
    """The newest value of a line."""
    kept = np.flatnonzero(np.isfinite(line.v))
    return (int(line.t[kept[-1]]), float(line.v[kept[-1]])) if kept.size else None


def _apart(labels: list[tuple[float, str, Style]], press: Press, most: float) -> list[tuple[float, str, Style]]:
    """Labels by their left edge, the newest first to have room: a value that would touch one stands in the table."""
    kept: list[tuple[float, str, Style]] = []
    free = most + 8.0
    for x, label, style in reversed(labels):
        wide = press.width(label, style)
        left = min(x - wide / 2, free - wide)
        if x - wide / 2 - left <= wide and left >= 0 and left + wide <= free + 1e-6 and (
            not kept or x + wide / 2 <= free + 0.1
        ):  # fmt: skip
            kept.append((left, label, style))
            free = left - 4.0
    return kept


def _range(strip: Strip) -> tuple[float, float]:
    """The values' range with some air, at least as wide as the strip asks, on round ends."""
    values = np.concatenate([np.array([d.value for d in strip.dots]), strip.line.v])
    values = values[np.isfinite(values)]
    low, most = float(values.min()), float(values.max())
    if strip.band is not None and strip.name != "SpO2 %":
        low, most = min(low, strip.band[0]), max(most, strip.band[1])
    missing = max(0.0, strip.least_span - (most - low)) / 2
    low, most = low - missing, most + missing
    step = 0.05 if strip.name == "pH" else 1.0 if most - low < 20 else 5.0
    low, most = np.floor(low / step) * step, np.ceil(most / step) * step
    if strip.name == "SpO2 %":
        most = min(most, 100.0)
        low = min(low, most - strip.least_span)
    return float(low), float(most)


def joined(line: Line) -> Iterator[Line]:
    """The parts of a line that may be joined: split where samples lie too far apart or are missing."""
    keep = np.isfinite(line.v)
    t, v = line.t[keep], line.v[keep]
    if t.size == 0:
        return
    cuts = np.flatnonzero(np.diff(t) > GAP) + 1
    for part_t, part_v in zip(np.split(t, cuts), np.split(v, cuts), strict=True):
        yield Line(part_t, part_v)
