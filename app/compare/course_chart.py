"""Paints a Comparison: one row for each quantity over hours since start. Lines by ink, dash and number."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from PySide6.QtCore import QPointF, QRectF, QSize, Qt
from PySide6.QtGui import QColor, QPainter, QPaintEvent, QPen, QPolygonF
from PySide6.QtWidgets import QWidget

from app.chart.end_labels import spread
from app.chart.marks import draw_card
from app.chart.value_ticks import value_ticks
from app.compare.courses import Comparison, Line, Row, words_of
from app.look.formats import fixed
from app.look.theme import Theme

_DASHES = ((), (7.0, 3.0), (2.0, 2.0), (8.0, 2.0, 2.0, 2.0))
_HOURS = (0.5, 1, 2, 3, 4, 6, 12, 24, 48)
_RIGHT = Qt.AlignmentFlag.AlignRight | Qt.AlignmentFlag.AlignVCenter


def pen_of(theme: Theme, number: int) -> QPen:
    """Ink and dash of an episode: five inks, and another dash each time round."""
    pen = QPen(theme.channel(number - 1), 2.0)
    dash = _DASHES[((number - 1) // len(theme.colours.channels) + (number - 1)) % len(_DASHES)]
    if dash:
        pen.setDashPattern(list(dash))
    return pen


class CourseChart(QWidget):
    """The rows, all on one axis of hours."""

    def __init__(self, theme: Theme) -> None:
        super().__init__()
        self._theme = theme
        self.comparison: Comparison | None = None
        self.setFocusPolicy(Qt.FocusPolicy.NoFocus)

    def set_theme(self, theme: Theme) -> None:
        """Take another look or text size."""
        self._theme = theme
        self.update()

    def show_comparison(self, comparison: Comparison) -> None:
        """Draw another comparison."""
        self.comparison = comparison
        self.setAccessibleName(self.tr("Episodes by hours since the start of support"))
        self.setAccessibleDescription("\n".join(words_of(comparison)))
        self.setMinimumHeight(self.minimumSizeHint().height())
        self.update()

    def minimumSizeHint(self) -> QSize:
        return QSize(self._theme.px(480), self._theme.px(6 * 78 + 40))

    def paintEvent(self, event: QPaintEvent) -> None:  # noqa: ARG002
        painter = QPainter(self)
        self.paint_on(painter, self.width(), self.height())
        painter.end()

    def paint_on(self, painter: QPainter, width: int, height: int) -> None:
        """Paint the rows at the painter's origin on a surface of this size."""
        if self.comparison is None or not self.comparison.names:
            return
        px, gap = self._theme.px, self._theme.px(6)
        foot = px(34)
        each = (height - foot - gap * len(self.comparison.rows)) / len(self.comparison.rows)
        for n, row in enumerate(self.comparison.rows):
            self._draw_row(painter, row, QRectF(0, n * (each + gap), width - 1, each))
        self._draw_hours(painter, QRectF(0, height - foot, width, foot))

    def _view(self, box: QRectF) -> QRectF:
        px = self._theme.px
        return box.adjusted(px(64), px(26), -px(40), -px(8))

    def _x(self, hours: float, view: QRectF) -> float:
        assert self.comparison is not None
        first = self._first_hour()
        return view.left() + (hours - first) / (self.comparison.last_hour - first) * view.width()

    def _first_hour(self) -> float:
        assert self.comparison is not None
        firsts = [float(line.hours[0]) for row in self.comparison.rows for line in row.lines]
        return min(max(min(firsts, default=0.0), -3.0), 0.0)

    def _draw_row(self, painter: QPainter, row: Row, box: QRectF) -> None:
        theme, c, px = self._theme, self._theme.colours, self._theme.px
        draw_card(painter, theme, box)
        view = self._view(box)
        painter.setFont(theme.font(theme.type.body, bold=True))
        painter.setPen(QColor(c.ink))
        painter.drawText(
            QRectF(view.left(), box.top() + px(4), view.width(), px(20)),
            Qt.AlignmentFlag.AlignLeft,
            row.title,
        )
        width = painter.fontMetrics().horizontalAdvance(row.title)
        painter.setFont(theme.font(theme.type.caption))
        painter.setPen(QColor(c.ink_quiet))
        unit = "" if row.unit == "pH" else row.unit
        painter.drawText(
            QRectF(view.left() + width + px(8), box.top() + px(6), px(120), px(20)),
            Qt.AlignmentFlag.AlignLeft,
            unit,
        )
        ticks, decimals = value_ticks(row.low, row.high, view.height(), px(18))
        if len(ticks) < 2:  # one value alone gives no scale
            ticks, decimals = value_ticks(row.low, row.high, view.height(), px(12))
        for value in ticks:
            y = round(self._y(value, row, view))
            painter.fillRect(QRectF(view.left(), y, view.width(), 1), QColor(c.line))
            word = fixed(value, max(decimals, row.least_decimals))
            painter.drawText(QRectF(box.left(), y - px(8), px(58), px(16)), _RIGHT, word)
        painter.fillRect(QRectF(round(self._x(0, view)), view.top(), 1, view.height()), QColor(c.edge))
        painter.save()
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        for line in row.lines:
            self._draw_line(painter, line, row, view)
        self._draw_numbers(painter, row, view)
        painter.restore()

    def _points(self, line: Line, row: Row, view: QRectF) -> list[QPointF]:
        known = ((h, v) for h, v in zip(line.hours, line.values, strict=True) if v == v)
        return [QPointF(self._x(h, view), self._y(v, row, view)) for h, v in known]

    def _draw_numbers(self, painter: QPainter, row: Row, view: QRectF) -> None:
        """Each line's number at its end; only those that end side by side make room for each other."""
        px = self._theme.px
        painter.setFont(self._theme.font(self._theme.type.caption, bold=True))
        for number, at in numbers_at(
            row.lines, [self._points(x, row, view) for x in row.lines], view, px(13), px(26)
        ):
            painter.setPen(pen_of(self._theme, number).color())
            room = QRectF(min(at.x() + px(6), view.right() + px(6)), at.y() - px(8), px(24), px(16))
            painter.drawText(room, Qt.AlignmentFlag.AlignLeft | Qt.AlignmentFlag.AlignVCenter, str(number))

    def _y(self, value: float, row: Row, view: QRectF) -> float:
        return view.bottom() - (value - row.low) / (row.high - row.low) * view.height()

    def _draw_line(self, painter: QPainter, line: Line, row: Row, view: QRectF) -> None:
        px = self._theme.px
        pen = pen_of(self._theme, line.number)
        points = self._points(line, row, view)
        if not points:
            return
        painter.save()
        painter.setClipRect(view.adjusted(-px(5), -px(5), px(5), px(5)))
        painter.setPen(pen)
        painter.drawPolyline(QPolygonF(_stepped(points) if line.steps else points))
        if not line.steps and len(points) < 80:
            painter.setBrush(pen.color())
            painter.setPen(Qt.PenStyle.NoPen)
            for p in points:
                painter.drawEllipse(p, px(3), px(3))
        painter.restore()

    def _draw_hours(self, painter: QPainter, box: QRectF) -> None:
        assert self.comparison is not None
        theme, px = self._theme, self._theme.px
        view = self._view(box)
        first, last = self._first_hour(), self.comparison.last_hour
        step = next((s for s in _HOURS if view.width() * s / (last - first) >= px(70)), _HOURS[-1])
        painter.setFont(theme.font(theme.type.caption))
        painter.setPen(QColor(theme.colours.ink_quiet))
        for n in range(int(np.ceil(first / step)), int(last / step) + 1):
            hour = n * step
            word = self.tr("start") if hour == 0 else f"{hour:g} h"
            painter.drawText(
                QRectF(self._x(hour, view) - px(30), box.top(), px(60), px(18)),
                Qt.AlignmentFlag.AlignCenter,
                word,
            )


def numbers_at(
    lines: Sequence[Line], points: Sequence[Sequence[QPointF]], view: QRectF, step: float, beside: float
) -> list[tuple[int, QPointF]]:
    """Where each line's number stands: at its last point, `step` from any other that ends less than `beside` away."""
    ends = sorted(((p[-1].x(), p[-1].y(), line.number) for line, p in zip(lines, points, strict=True) if p))
    groups: list[list[tuple[float, float, int]]] = []
    for end in ends:
        if groups and end[0] - groups[-1][-1][0] < beside:
            groups[-1].append(end)
        else:
            groups.append([end])
    placed = []
    for group in groups:
        ys = spread([y - view.top() for _, y, _ in group], step, view.height())
        placed += [(n, QPointF(x, view.top() + y)) for (x, _, n), y in zip(group, ys, strict=True)]
    return placed


def _stepped(points: list[QPointF]) -> list[QPointF]:
    made = points[:1]
    for p in points[1:]:
        made += [QPointF(p.x(), made[-1].y()), p]
    return made
