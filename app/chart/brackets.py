"""Response windows over a gas panel: a bracket from 30 to 120 minutes after the anchor, with the verdict's
sign, its word and the state of the gas. Windows that overlap stand in rows of their own."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QColor, QFontMetricsF, QPainter

from app.chart.marks import fitted, gas_mark, solid_pen, verdict_sign
from app.chart.row import FRONT, Layer, visible
from app.chart.shapes import Bracket

if TYPE_CHECKING:
    from app.chart.row import ClockRow

_ROWS_AT_MOST = 3


def rows_of(brackets: tuple[Bracket, ...]) -> list[int]:
    """The row of each bracket, counted from 0 at the top, so that none lies on another (as far as three rows go).

    An anchor's stem counts as part of its bracket.
    """
    ends: list[int] = []
    rows = []
    for bracket in brackets:
        free = next((row for row, end in enumerate(ends) if end <= bracket.anchor), len(ends))
        if free == len(ends):
            ends.append(bracket.end)
        else:
            ends[free] = bracket.end
        rows.append(min(free, _ROWS_AT_MOST - 1))
    return rows


@dataclass(frozen=True, slots=True)
class _Places:
    """Columns of a bracket that are in view: its anchor, and its window from start to end."""

    anchor: float
    start: float
    end: float

    def left_of(self, width: float, most: float) -> float:
        """Where words of a width begin: over the middle of the window, else as far left as the anchor."""
        over_the_window = max((self.start + self.end) / 2 - width / 2, self.start)
        return max(min(over_the_window, most - width), self.anchor)


class BracketStrip:
    """Brackets above a row's view, and their windows as a faint column through it."""

    def __init__(self, row: ClockRow, brackets: tuple[Bracket, ...]) -> None:
        self.row = row
        self.brackets = tuple(sorted(brackets, key=lambda b: (b.anchor, b.end)))
        self.rows = rows_of(self.brackets)
        self.layer = Layer(row.item, FRONT, self._area, self._draw, clipped=True)

    def height(self) -> int:
        return (max(self.rows, default=0) + 1) * self._line() + self.row.theme.px(4)

    def _line(self) -> int:
        return self.row.theme.px(22)

    def _area(self) -> QRectF:
        view = self.row.view
        top = self.row.theme.px(28)
        return QRectF(view.pos().x(), top, view.rect().width(), self.height())

    def at(self, x: float) -> Bracket | None:
        """The bracket whose window holds a column of the view; of several the latest."""
        frame, seconds = self.row.frame(), self.row.seconds
        inside = [b for b in self.brackets if frame.x(seconds(b.start)) <= x <= frame.x(seconds(b.end))]
        return inside[-1] if inside else None

    def draw_windows(self, painter: QPainter) -> None:
        """The windows in the row's view: a faint wash, still open ones with a dashed end."""
        frame, theme = self.row.frame(), self.row.theme
        for bracket in self.brackets:
            a, b = visible(frame, self.row.seconds(bracket.start), self.row.seconds(bracket.end))
            if b <= a:
                continue
            painter.fillRect(QRectF(a, 0, b - a, frame.height), theme.colour("accent", 0.07))

    def _draw(self, painter: QPainter) -> None:
        frame, left = self.row.frame(), self.row.view.pos().x()
        for bracket, line in zip(self.brackets, self.rows, strict=True):
            x0, xa, xb = (float(frame.x(self.row.seconds(t))) for t in (bracket.anchor, bracket.start, bracket.end))
            if xb >= 0 and x0 <= frame.width:
                top = self.layer.boundingRect().top() + line * self._line()
                self._draw_one(painter, bracket, left + x0, left + xa, left + xb, top)

    def _draw_one(self, painter: QPainter, bracket: Bracket, x0: float, xa: float, xb: float, top: float) -> None:
        theme = self.row.theme
        c, px = theme.colours, theme.px
        rail = round(top + self._line() - px(5)) + 0.5
        pen = solid_pen(c.ink_quiet, 1.0)
        if bracket.still_open:
            pen.setDashPattern([4, 3])
        painter.setPen(pen)
        painter.drawLine(QPointF(xa, rail), QPointF(xb, rail))
        painter.setPen(solid_pen(c.ink_quiet, 1.0))
        for x in (xa, xb):
            painter.drawLine(QPointF(round(x) + 0.5, rail), QPointF(round(x) + 0.5, rail + px(5)))
        dots = solid_pen(c.edge, 1.0)
        dots.setDashPattern([1, 3])
        painter.setPen(dots)
        painter.drawLine(QPointF(x0, rail), QPointF(xa, rail))
        painter.setPen(Qt.PenStyle.NoPen)
        painter.setBrush(QColor(c.accent))
        painter.drawRect(QRectF(round(x0) - px(2), rail - px(2), px(4), px(4)))
        area = self.layer.boundingRect()
        places = _Places(max(x0, area.left()), max(xa, area.left()), min(xb, area.right()))
        end = min(max(self._free_until(bracket, area), places.end), area.right()) - px(4)
        self._draw_words(painter, bracket, places, end, (top + rail) / 2)

    def _free_until(self, bracket: Bracket, area: QRectF) -> float:
        """Column up to which words may run beyond a short bracket: where the next one of its row begins."""
        place = self.brackets.index(bracket)
        after = [b for b, r in zip(self.brackets, self.rows, strict=True) if r == self.rows[place]]
        later = [b.anchor for b in after if b.anchor > bracket.anchor]
        return area.left() + float(self.row.frame().x(self.row.seconds(later[0]))) if later else area.right()

    def _draw_words(self, painter: QPainter, bracket: Bracket, places: _Places, end: float, middle: float) -> None:
        """The verdict's sign and word, the state's mark and word. Where they are too long for the window they
        begin at the anchor; then the state's word gives way to its mark, last the end of the verdict's word."""
        theme = self.row.theme
        c, px, sign = theme.colours, theme.px, float(theme.px(10))
        bold, plain = theme.font(theme.type.caption, bold=True), theme.font(theme.type.caption)
        lead = sign + px(6)
        room = end - places.anchor
        if room < sign:
            return
        width = QFontMetricsF(bold).horizontalAdvance(bracket.word)
        state_width = px(24) + QFontMetricsF(plain).horizontalAdvance(bracket.state_word)
        state = bracket.state_word if bracket.state is not None else ""
        mark = px(24) if bracket.state is not None else 0
        if state and lead + width + state_width > room:
            state = ""
        painter.setFont(bold)
        word = fitted(painter, bracket.word, room - lead - (state_width if state else mark))
        width = QFontMetricsF(bold).horizontalAdvance(word)
        total = lead + width + (state_width if state else mark)
        x = places.left_of(total, end)
        verdict_sign(painter, theme, bracket.verdict, QRectF(x, middle - sign / 2, sign, sign))
        height = painter.fontMetrics().height()
        x += lead
        painter.setPen(QColor(c.ink))
        painter.drawText(QRectF(x, middle - height / 2, width + 2, height), Qt.AlignmentFlag.AlignVCenter, word)
        x += width + px(12)
        if bracket.state is None or x + px(6) > end:
            return
        gas_mark(painter, theme, bracket.state, None, x, middle, px(9))
        painter.setFont(plain)
        painter.setPen(QColor(c.ink))
        room_of_state = QRectF(x + px(11), middle - height / 2, state_width, height)
        painter.drawText(room_of_state, Qt.AlignmentFlag.AlignVCenter, state)
