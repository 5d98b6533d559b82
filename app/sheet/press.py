"""Putting text and lines on paper in points (1/72 inch). Text is drawn plain: markup in a note stays text."""

from __future__ import annotations

import re
from dataclasses import dataclass, field
from enum import Enum
from functools import lru_cache

from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QBrush, QColor, QFont, QFontDatabase, QFontMetricsF, QPainter, QPen, QPolygonF

from app.look.formats import unbroken

POINTS_PER_INCH = 72
INK, GREY, PALE, LINE = "#000000", "#444444", "#e9e9e9", "#8a8a8a"
_TALL = 1e6
_STROKE = re.compile(r"(?<=\w)/(?=\w)")


class Align(Enum):
    """Where a text stands in its width."""

    LEFT = Qt.AlignmentFlag.AlignLeft
    RIGHT = Qt.AlignmentFlag.AlignRight
    CENTRE = Qt.AlignmentFlag.AlignHCenter


@dataclass(frozen=True, slots=True)
class Style:
    """A text's size in points, weight and ink."""

    size: float = 8.5
    bold: bool = False
    ink: str = INK


LEAST_PRINT = 7.0
"""No letter is printed smaller, in points, whatever the page's scale."""
BODY = Style(7.8)
STRONG = Style(7.8, True)
SMALL = Style(7.2, False, GREY)
HEADING = Style(7.8, True)
TITLE = Style(17, True)
SUBTITLE = Style(9.5)


@dataclass(slots=True)
class Press:
    """A painter in points, with every size multiplied by `scale` so that a page can be made to fit."""

    painter: QPainter
    dots_per_inch: int
    scale: float = 1.0
    _metrics: dict[Style, QFontMetricsF] = field(default_factory=dict)
    _heights: dict[tuple[str, Style, float, Align], float] = field(default_factory=dict)
    _widths: dict[tuple[str, Style], float] = field(default_factory=dict)
    _scaled: dict[float, Press] = field(default_factory=dict)

    @property
    def unit(self) -> float:
        """Dots per point."""
        return self.dots_per_inch / POINTS_PER_INCH

    def gap(self, points: float) -> float:
        """A distance that shrinks with the page's scale."""
        return points * self.scale

    def at_scale(self, scale: float) -> Press:
        """The same paper at another scale. What was measured there before is remembered."""
        if scale == self.scale:
            return self
        if scale not in self._scaled:
            self._scaled[scale] = Press(self.painter, self.dots_per_inch, scale, _scaled=self._scaled)
        return self._scaled[scale]

    def height(self, text: str, style: Style, width: float, align: Align = Align.LEFT) -> float:
        """How high a text is when set in a width."""
        key = (text, style, width, align)
        if key not in self._heights:
            self._heights[key] = self._measured(_kept_together(text), style, width, align)
        return self._heights[key]

    def _measured(self, text: str, style: Style, width: float, align: Align) -> float:
        rect = QRectF(0, 0, width * self.unit, _TALL)
        found = self._metric(style).boundingRect(rect, self._flags(text, style, width, align), text or " ")
        return found.height() / self.unit

    def width(self, text: str, style: Style) -> float:
        """How wide a text is on one line."""
        found = self._widths.get((text, style))
        if found is None:
            found = self._widths[text, style] = self._metric(style).horizontalAdvance(text) / self.unit
        return found

    def text(
        self, x: float, y: float, width: float, text: str, style: Style = BODY, align: Align = Align.LEFT
    ) -> float:
        """Set a text in a width, wrapped between values and never inside one; its height."""
        high = self.height(text, style, width, align)
        text = _kept_together(text)
        self.painter.setFont(_font(self._pixels(style), style.bold))
        self.painter.setPen(QColor(style.ink))
        rect = QRectF(x * self.unit, y * self.unit, width * self.unit, (high + 2) * self.unit)
        self.painter.drawText(rect, self._flags(text, style, width, align), text)
        return high

    def line(self, x1: float, y1: float, x2: float, y2: float, weight: float = 0.5, ink: str = INK,
             dashes: tuple[float, ...] = ()) -> None:  # fmt: skip
        """A line of a weight in points; `dashes` in multiples of it."""
        self.painter.setPen(self._pen(weight, ink, dashes))
        u = self.unit
        self.painter.drawLine(QPointF(x1 * u, y1 * u), QPointF(x2 * u, y2 * u))

    def path(self, points: list[tuple[float, float]], weight: float = 0.6, ink: str = INK) -> None:
        """A line through points."""
        self.painter.setPen(self._pen(weight, ink, ()))
        self.painter.setBrush(Qt.BrushStyle.NoBrush)
        self.painter.drawPolyline(QPolygonF([QPointF(x * self.unit, y * self.unit) for x, y in points]))

    def box(
        self, x: float, y: float, width: float, height: float, *, fill: str = "", weight: float = 0.0,
        ink: str = INK, pattern: Qt.BrushStyle = Qt.BrushStyle.SolidPattern, round_by: float = 0.0,
    ) -> None:  # fmt: skip
        """A rectangle, filled, framed, or both."""
        brush = QBrush(QColor(fill), pattern) if fill else QBrush(Qt.BrushStyle.NoBrush)
        if fill and pattern is not Qt.BrushStyle.SolidPattern:
            brush.setTransform(brush.transform().scale(self.unit / 2, self.unit / 2))
        self.painter.setBrush(brush)
        self.painter.setPen(self._pen(weight, ink, ()) if weight else QPen(Qt.PenStyle.NoPen))
        u = self.unit
        rect = QRectF(x * u, y * u, width * u, height * u)
        if round_by:
            self.painter.drawRoundedRect(rect, round_by * u, round_by * u)
        else:
            self.painter.drawRect(rect)

    def dot(self, x: float, y: float, radius: float, *, hollow: bool = False) -> None:
        """A round mark; hollow where the value is doubtful."""
        self.painter.setPen(self._pen(0.8, INK, ()))
        self.painter.setBrush(QColor("#ffffff" if hollow else INK))
        u = self.unit
        self.painter.drawEllipse(QPointF(x * u, y * u), radius * u, radius * u)

    def _pen(self, weight: float, ink: str, dashes: tuple[float, ...]) -> QPen:
        pen = QPen(QColor(ink), weight * self.unit)
        if dashes:
            pen.setDashPattern(list(dashes))
        return pen

    def _pixels(self, style: Style) -> int:
        return round(max(style.size * self.scale, LEAST_PRINT) * self.unit)

    def _metric(self, style: Style) -> QFontMetricsF:
        found = self._metrics.get(style)
        if found is None:
            font = _font(self._pixels(style), style.bold)
            found = self._metrics[style] = QFontMetricsF(font, self.painter.device())
        return found

    def _flags(self, text: str, style: Style, width: float, align: Align) -> int:
        """Words are wrapped; a word too long for the line is broken, so that nothing is clipped."""
        longest = max((self.width(w, style) for w in text.split()), default=0.0)
        wrap = Qt.TextFlag.TextWrapAnywhere if longest > width else Qt.TextFlag.TextWordWrap
        return int(align.value) | int(Qt.AlignmentFlag.AlignTop) | int(wrap)


@lru_cache(maxsize=4096)
def _kept_together(text: str) -> str:
    """A text whose lines end neither inside a value nor at a stroke, as in P/F or 24/min."""
    return _STROKE.sub("/\N{WORD JOINER}", unbroken(text))


@lru_cache(maxsize=64)
def _font(pixels: int, bold: bool) -> QFont:
    """The platform's sans with tabular figures; DejaVu Sans after it."""
    font = QFontDatabase.systemFont(QFontDatabase.SystemFont.GeneralFont)
    font.setFamilies([font.family(), "DejaVu Sans"])
    font.setPixelSize(max(1, pixels))
    font.setBold(bold)
    font.setFeature(QFont.Tag("tnum"), 1)
    font.setFeature(QFont.Tag("liga"), 0)  # so that a search in the PDF finds "confirmed"
    font.setHintingPreference(QFont.HintingPreference.PreferNoHinting)
    return font
