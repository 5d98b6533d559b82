"""The acid-base map: pH against PaCO2, iso-bicarbonate lines, acute and chronic bands, gases as a path."""

from itertools import pairwise
from math import hypot

import numpy as np
from PySide6.QtCore import QEvent, QPointF, QRectF, QSize, Qt, Signal
from PySide6.QtGui import QColor, QFontMetricsF, QHelpEvent, QKeyEvent, QMouseEvent, QPainter, QPaintEvent, QPolygonF
from PySide6.QtWidgets import QToolTip, QWidget

from app.chart.marks import draw_card, gas_mark, solid_pen
from app.chart.shapes import MapBand, MapGas, MapLine, MapSpec, Values
from app.chart.value_ticks import value_ticks, value_word
from app.look.theme import Theme

_NOTE = Qt.AlignmentFlag.AlignLeft | Qt.AlignmentFlag.AlignTop | Qt.TextFlag.TextWordWrap
_TALL = 1e6


class AcidBaseMap(QWidget):
    """Draws a MapSpec. Left and right choose a gas, Enter opens it."""

    hovered = Signal(str)
    gas_chosen = Signal(object)
    gas_activated = Signal(object)

    def __init__(self, theme: Theme, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.theme = theme
        self.spec: MapSpec | None = None
        self._chosen: int | None = None
        self._words = ""
        self.setMouseTracking(True)
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)

    def set_theme(self, theme: Theme) -> None:
        self.theme = theme
        self.update()

    def set_spec(self, spec: MapSpec) -> None:
        self.spec, self._chosen = spec, None
        self.setAccessibleName(spec.name)
        self.setAccessibleDescription(spec.summary)
        self.update()

    def sizeHint(self) -> QSize:
        return QSize(self.theme.px(560), self.theme.px(480))

    def minimumSizeHint(self) -> QSize:
        return QSize(self.theme.px(320), self.theme.px(280))

    # painting

    def paintEvent(self, event: QPaintEvent) -> None:
        painter = QPainter(self)
        painter.fillRect(event.rect(), QColor(self.theme.colours.ground))
        self._paint(painter, QRectF(self.rect()), chosen=self._chosen)
        if self.hasFocus():
            painter.setPen(solid_pen(self.theme.colours.accent, 2))
            painter.setBrush(Qt.BrushStyle.NoBrush)
            painter.drawRect(self.rect().adjusted(1, 1, -1, -1))
        painter.end()

    def paint_on(self, painter: QPainter, width: int, height: int) -> None:
        """Paints the map at the painter's origin on a surface of this size."""
        self._paint(painter, QRectF(0, 0, width, height), chosen=None)

    def _plot(self, whole: QRectF) -> QRectF:
        px = self.theme.px
        notes = round(self._notes(whole.width()).height())
        return whole.adjusted(px(60), px(40), -px(76), -px(56) - notes)

    def _notes(self, width: float) -> QRectF:
        """The room that the notes take in a width, from 0 down; a note goes on where it is longer than a line."""
        if self.spec is None or not self.spec.notes:
            return QRectF()
        metrics = QFontMetricsF(self.theme.font(self.theme.type.caption))
        room = QRectF(0, 0, max(width - self.theme.px(32), 1.0), _TALL)
        return metrics.boundingRect(room, _NOTE, "\n".join(self.spec.notes))

    def _paint(self, painter: QPainter, whole: QRectF, chosen: int | None) -> None:
        if self.spec is None:
            return
        draw_card(painter, self.theme, whole)
        plot = self._plot(whole)
        painter.save()
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        painter.save()
        painter.setClipRect(plot)
        for place, band in enumerate(self.spec.bands):
            self._draw_band(painter, plot, band, place)
        self._draw_grid(painter, plot)
        self._draw_normal(painter, plot)
        for line in self.spec.lines:
            self._draw_line(painter, plot, line)
        painter.restore()
        self._draw_line_words(painter, plot)
        self._draw_band_words(painter, plot)
        self._draw_path(painter, plot, chosen)
        painter.restore()
        self._draw_axes(painter, whole, plot)

    def _x(self, plot: QRectF, paco2: Values | float) -> Values | float:
        assert self.spec is not None
        scale = self.spec.paco2_scale
        return plot.left() + (paco2 - scale.low) / (scale.high - scale.low) * plot.width()

    def _y(self, plot: QRectF, ph: Values | float) -> Values | float:
        assert self.spec is not None
        scale = self.spec.ph_scale
        return plot.bottom() - (ph - scale.low) / (scale.high - scale.low) * plot.height()

    def _points(self, plot: QRectF, paco2: Values, ph: Values) -> list[QPointF]:
        whole = np.isfinite(paco2) & np.isfinite(ph)
        x, y = self._x(plot, np.asarray(paco2)[whole]), self._y(plot, np.asarray(ph)[whole])
        return [QPointF(float(a), float(b)) for a, b in zip(np.atleast_1d(x), np.atleast_1d(y), strict=True)]

    def _draw_band(self, painter: QPainter, plot: QRectF, band: MapBand, place: int) -> None:
        theme = self.theme
        upper, lower = self._points(plot, band.paco2, band.high), self._points(plot, band.paco2, band.low)
        painter.setPen(Qt.PenStyle.NoPen)
        if place == 0:
            painter.setBrush(theme.colour("support", 0.75))
        else:
            painter.setBrush(theme.colour("ink_quiet", 0.14))
        painter.drawPolygon(QPolygonF(upper + lower[::-1]))
        pen = solid_pen(theme.colours.support_edge if place == 0 else theme.colours.ink_quiet, 1.0)
        if place:
            pen.setDashPattern([4, 3])
        painter.setPen(pen)
        painter.drawPolyline(QPolygonF(upper))
        painter.drawPolyline(QPolygonF(lower))

    def _draw_grid(self, painter: QPainter, plot: QRectF) -> None:
        line = QColor(self.theme.colours.line)
        for x, _ in self._ticks(plot, upright=False):
            painter.fillRect(QRectF(round(x), plot.top(), 1, plot.height()), line)
        for y, _ in self._ticks(plot, upright=True):
            painter.fillRect(QRectF(plot.left(), round(y), plot.width(), 1), line)

    def _draw_normal(self, painter: QPainter, plot: QRectF) -> None:
        if self.spec is None or self.spec.normal is None:
            return
        low, high, ph_low, ph_high = self.spec.normal
        a, b = float(self._x(plot, low)), float(self._x(plot, high))
        top, foot = float(self._y(plot, ph_high)), float(self._y(plot, ph_low))
        painter.setPen(solid_pen(self.theme.colours.edge, 1.0))
        painter.setBrush(Qt.BrushStyle.NoBrush)
        painter.drawRect(QRectF(a, top, b - a, foot - top))
        painter.setFont(self.theme.font(self.theme.type.caption, bold=True))
        painter.setPen(QColor(self.theme.colours.ink))
        metrics = painter.fontMetrics()
        width, height = metrics.horizontalAdvance(self.spec.normal_word) + 2, metrics.height()
        room = QRectF(a, top, b - a, foot - top)
        if width > b - a or height > foot - top:  # over the box where there is no room in it
            room = QRectF(max((a + b - width) / 2, plot.left()), top - height - 2, width, height)
        painter.drawText(room, Qt.AlignmentFlag.AlignCenter, self.spec.normal_word)

    def _draw_line(self, painter: QPainter, plot: QRectF, line: MapLine) -> None:
        pen = solid_pen(self.theme.colours.edge, 1.0)
        pen.setDashPattern([1, 3])
        painter.setPen(pen)
        painter.drawPolyline(QPolygonF(self._points(plot, line.paco2, line.ph)))

    def _draw_line_words(self, painter: QPainter, plot: QRectF) -> None:
        """Each word where its line leaves the plot: at the right edge, else beside its foot."""
        assert self.spec is not None
        painter.setFont(self.theme.font(self.theme.type.caption))
        painter.setPen(QColor(self.theme.colours.ink_quiet))
        height = painter.fontMetrics().height()
        lowest = plot.top() - height
        for line in sorted(self.spec.lines, key=lambda item: -float(np.nanmax(item.ph))):
            points = [p for p in self._points(plot, line.paco2, line.ph) if plot.adjusted(-1, -1, 1, 1).contains(p)]
            if not points:
                continue
            end, width = points[-1], painter.fontMetrics().horizontalAdvance(line.word)
            if end.x() < plot.right() - 4:
                room = QRectF(end.x() + self.theme.px(8), plot.bottom() - height - 2, width + 2, height)
            elif end.y() - height / 2 >= lowest:
                room = QRectF(plot.right() + self.theme.px(6), end.y() - height / 2, width + 2, height)
                lowest = room.bottom()
            else:
                continue
            painter.drawText(room, Qt.AlignmentFlag.AlignVCenter, line.word)

    def _draw_band_words(self, painter: QPainter, plot: QRectF) -> None:
        """In the band, near its right end, following its middle."""
        assert self.spec is not None
        painter.setFont(self.theme.font(self.theme.type.caption, bold=True))
        metrics = painter.fontMetrics()
        painter.setPen(QColor(self.theme.colours.ink))
        for band in self.spec.bands:
            middle = (np.asarray(band.low) + np.asarray(band.high)) / 2
            points = [p for p in self._points(plot, band.paco2, middle) if plot.contains(p)]
            if points:
                width, at = metrics.horizontalAdvance(band.word), points[-1]
                wanted = at.x() - width / 2 - self.theme.px(8)
                near = points[int(np.argmin([abs(p.x() - wanted) for p in points]))]
                room = QRectF(near.x() - width / 2, near.y() - metrics.height() / 2, width + 2, metrics.height())
                painter.drawText(room, Qt.AlignmentFlag.AlignCenter, band.word)

    def _gas_points(self, plot: QRectF) -> list[QPointF]:
        assert self.spec is not None
        return [QPointF(float(self._x(plot, g.paco2)), float(self._y(plot, g.ph))) for g in self.spec.gases]

    def _draw_path(self, painter: QPainter, plot: QRectF, chosen: int | None) -> None:
        assert self.spec is not None
        c, px = self.theme.colours, self.theme.px
        points = self._gas_points(plot)
        painter.setPen(solid_pen(c.ink, 1.4))
        path = [p for p, gas in zip(points, self.spec.gases, strict=True) if gas.joined]
        for one, other in pairwise(path):
            _arrow(painter, one, other, px(10))
        taken = [QRectF(p.x() - px(9), p.y() - px(9), px(18), px(18)) for p in points]
        painter.setFont(self.theme.font(self.theme.type.caption, bold=True))
        for n, (gas, at) in enumerate(zip(self.spec.gases, points, strict=True)):
            if not plot.contains(at):
                continue
            gas_mark(painter, self.theme, gas.state, gas.verdict, at.x(), at.y(), px(14), gas.doubtful)
            if n == chosen:
                painter.setPen(solid_pen(c.accent, 2))
                painter.setBrush(Qt.BrushStyle.NoBrush)
                painter.drawEllipse(at, px(13), px(13))
            self._draw_number(painter, plot, f"{gas.number} {gas.mark}".rstrip(), at, taken)

    def _draw_number(self, painter: QPainter, plot: QRectF, word: str, at: QPointF, taken: list[QRectF]) -> None:
        """The number beside its gas, on the first free side."""
        c, px, metrics = self.theme.colours, self.theme.px, painter.fontMetrics()
        width, height = metrics.horizontalAdvance(word) + px(6), metrics.height()
        reach = px(12)
        for dx, dy in ((1, -0.7), (-1, -0.7), (1, 0.7), (-1, 0.7), (0, -1.3), (0, 1.3)):
            middle = QPointF(at.x() + dx * (reach + width / 2), at.y() + dy * reach)
            room = QRectF(middle.x() - width / 2, middle.y() - height / 2, width, height)
            if plot.contains(room) and not any(room.intersects(other) for other in taken):
                break
        taken.append(room)
        painter.setPen(Qt.PenStyle.NoPen)
        painter.setBrush(self.theme.colour("raised", 0.85))
        painter.drawRoundedRect(room, 3, 3)
        painter.setPen(QColor(c.ink))
        painter.drawText(room, Qt.AlignmentFlag.AlignCenter, word)

    def _ticks(self, plot: QRectF, *, upright: bool) -> list[tuple[float, str]]:
        assert self.spec is not None
        scale = self.spec.ph_scale if upright else self.spec.paco2_scale
        size = plot.height() if upright else plot.width()
        values, decimals = value_ticks(scale.low, scale.high, size, self.theme.px(36 if upright else 64))
        place = self._y if upright else self._x
        return [(float(place(plot, v)), value_word(v, max(decimals, scale.decimals))) for v in values]

    def _draw_axes(self, painter: QPainter, whole: QRectF, plot: QRectF) -> None:
        assert self.spec is not None
        theme, px, c = self.theme, self.theme.px, self.theme.colours
        painter.setFont(theme.font(theme.type.caption))
        painter.setPen(QColor(c.ink_quiet))
        side = Qt.AlignmentFlag.AlignRight | Qt.AlignmentFlag.AlignVCenter
        for y, word in self._ticks(plot, upright=True):
            painter.drawText(QRectF(whole.left(), y - 12, plot.left() - px(8) - whole.left(), 24), side, word)
        for x, word in self._ticks(plot, upright=False):
            painter.drawText(QRectF(x - 40, plot.bottom() + px(4), 80, px(20)), Qt.AlignmentFlag.AlignCenter, word)
        painter.setFont(theme.font(theme.type.caption, bold=True))
        painter.setPen(QColor(c.ink))
        foot = QRectF(plot.left(), plot.bottom() + px(26), plot.width(), px(20))
        painter.drawText(foot, Qt.AlignmentFlag.AlignRight, self.spec.paco2_word)
        head = QRectF(whole.left() + px(16), whole.top() + px(8), plot.left(), px(20))
        painter.drawText(head, Qt.AlignmentFlag.AlignLeft, self.spec.ph_word)
        painter.setFont(theme.font(theme.type.caption))
        painter.setPen(QColor(c.ink_quiet))
        high = self._notes(whole.width()).height()
        room = QRectF(whole.left() + px(16), plot.bottom() + px(50), whole.width() - px(32), high)
        painter.drawText(room, _NOTE, "\n".join(self.spec.notes))

    # picking

    def gas_at(self, at: QPointF) -> MapGas | None:
        """The gas under a point of the widget."""
        if self.spec is None or not self.spec.gases:
            return None
        points = self._gas_points(self._plot(QRectF(self.rect())))
        far = [hypot(p.x() - at.x(), p.y() - at.y()) for p in points]
        n = int(np.argmin(far))
        return self.spec.gases[n] if far[n] <= self.theme.px(14) else None

    def mouseMoveEvent(self, event: QMouseEvent) -> None:
        gas = self.gas_at(event.position())
        words = "" if gas is None else gas.word
        if words != self._words:
            self._words = words
            self.hovered.emit(words)

    def mousePressEvent(self, event: QMouseEvent) -> None:
        gas = self.gas_at(event.position())
        if gas is not None and self.spec is not None:
            self._choose(self.spec.gases.index(gas))

    def mouseDoubleClickEvent(self, event: QMouseEvent) -> None:
        gas = self.gas_at(event.position())
        if gas is not None:
            self.gas_activated.emit(gas)

    def event(self, event: QEvent) -> bool:
        if event.type() == QEvent.Type.ToolTip and isinstance(event, QHelpEvent):
            gas = self.gas_at(QPointF(event.pos()))
            QToolTip.showText(event.globalPos(), "" if gas is None else gas.word, self)
            return True
        return super().event(event)

    def keyPressEvent(self, event: QKeyEvent) -> None:
        gases = () if self.spec is None else self.spec.gases
        step = {int(Qt.Key.Key_Left): -1, int(Qt.Key.Key_Right): 1}.get(event.key())
        if gases and step is not None:
            last = len(gases) - 1
            at = (0 if step > 0 else last) if self._chosen is None else min(max(self._chosen + step, 0), last)
            self._choose(at)
            event.accept()
        elif event.key() in (Qt.Key.Key_Return, Qt.Key.Key_Enter) and self._chosen is not None:
            self.gas_activated.emit(gases[self._chosen])
        else:
            super().keyPressEvent(event)

    def choose(self, number: int) -> None:
        """Choose the gas of that number without telling; one that is not there chooses none."""
        places = [n for n, gas in enumerate(self.spec.gases if self.spec else ()) if gas.number == number]
        self._chosen = places[0] if places else None
        self.update()

    @property
    def chosen(self) -> MapGas | None:
        """The gas that is chosen."""
        return None if self.spec is None or self._chosen is None else self.spec.gases[self._chosen]

    def _choose(self, place: int) -> None:
        assert self.spec is not None
        self._chosen = place
        self.setAccessibleDescription(self.spec.gases[place].word)
        self.hovered.emit(self.spec.gases[place].word)
        self.gas_chosen.emit(self.spec.gases[place])
        self.update()


def _arrow(painter: QPainter, one: QPointF, other: QPointF, clear: float) -> None:
    """A line from one gas to the next with a head, `clear` pixels away from both."""
    dx, dy = other.x() - one.x(), other.y() - one.y()
    length = hypot(dx, dy)
    if length <= 2 * clear:
        return
    ux, uy = dx / length, dy / length
    tip = QPointF(other.x() - ux * clear, other.y() - uy * clear)
    painter.drawLine(QPointF(one.x() + ux * clear, one.y() + uy * clear), tip)
    for turn in (-0.5, 0.5):
        painter.drawLine(tip, QPointF(tip.x() - 7 * (ux + turn * uy), tip.y() - 7 * (uy - turn * ux)))
