"""The one visible time axis of a stack, and the row of events above it."""

from collections.abc import Sequence
from zoneinfo import ZoneInfo

from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QColor, QPainter
from PySide6.QtWidgets import QGraphicsItem

from app.chart.event_rail import draw_on_rail
from app.chart.marks import fitted
from app.chart.row import FRONT, ClockRow, Layer, RowItem
from app.chart.shapes import MICROSECONDS, Tick
from app.chart.time_ticks import ClockMark, time_word
from app.look.theme import Theme


class TimeAxisRow(ClockRow):
    """Labels of the clock in local wall time; the date of the left edge stands in the left margin."""

    def __init__(self, theme: Theme, origin: int, item: RowItem) -> None:
        super().__init__("", theme, origin, item)
        self.now_word = ""
        self.zone: ZoneInfo | None = None
        self.note = ""
        self.left_word = ""
        self._floats = False
        self.labels = Layer(self.item, FRONT, self._whole, self._draw_labels)

    def layers(self) -> list[QGraphicsItem]:
        return [*super().layers(), self.labels]

    def top_height(self) -> int:
        return 0

    def foot_height(self) -> int:
        return 0

    def left_wanted(self) -> int:
        return round(self.metrics().horizontalAdvance("00-Mmm")) + self.theme.px(12)

    def height(self) -> int:
        return self.theme.px(28)

    def measure(self, word: str) -> float:
        """Width of a label in pixels."""
        return self.metrics().horizontalAdvance(word)

    def show_dated(self, start: int, end: int, marks: Sequence[ClockMark], left_word: str) -> None:
        """Moves the axis; `left_word` is the date at its left edge."""
        self.left_word = left_word
        self.show_window(start, end, marks)
        self.labels.update()

    def show_note(self, note: str) -> None:
        """Words at the right end, under the labels of the rows."""
        if note != self.note:
            self.note = note
            self.labels.update()

    def _view_resized(self, _view: object = None) -> None:
        super()._view_resized(_view)
        self.labels.resized()

    def _item_resized(self) -> None:
        super()._item_resized()
        self.labels.resized()

    def float_above(self, floats: bool) -> None:
        """Whether it lies over rows that are rolled under it."""
        self._floats = floats
        self.card.update()

    def _draw_card(self, painter: QPainter) -> None:
        """No card: the axis lies on the ground, or on a strip of it over the rows."""
        if self._floats:
            strip, c = self.item.rect().adjusted(-2, 0, 2, 0), self.theme.colours
            painter.fillRect(strip, QColor(c.ground))
            painter.fillRect(QRectF(strip.left(), strip.top(), strip.width(), 1), QColor(c.edge))

    def _draw_back(self, painter: QPainter) -> None:
        """No lines: the rows above have them."""

    def _draw_front(self, painter: QPainter) -> None:
        """The now mark is drawn with the labels."""

    def _draw_labels(self, painter: QPainter) -> None:
        frame, theme = self.frame(), self.theme
        c, left, height = theme.colours, self.view.pos().x(), self.height()
        plates = self._plates(painter, height)
        right = left + frame.width + theme.px(28)
        room = QRectF(right, 0, self.item.rect().width() - right, height)
        painter.setFont(theme.font(theme.type.caption))
        painter.setPen(QColor(c.ink_quiet))
        side = Qt.AlignmentFlag.AlignRight | Qt.AlignmentFlag.AlignVCenter
        painter.drawText(room, side, fitted(painter, self.note, room.width()))
        nearest = left
        for mark in self.marks:
            if not mark.label:
                continue
            x = left + float(frame.x(self.seconds(mark.at)))
            painter.setFont(theme.font(theme.type.caption, bold=mark.midnight))
            width = painter.fontMetrics().horizontalAdvance(mark.label) + 2
            room = QRectF(x - width / 2, 0, width, height)
            if any(room.adjusted(-4, 0, 4, 0).intersects(plate) for plate in plates):
                continue
            painter.setPen(QColor(c.ink if mark.midnight else c.ink_quiet))
            painter.drawText(room, Qt.AlignmentFlag.AlignCenter, mark.label)
            nearest = min(nearest, room.left())
        painter.setFont(theme.font(theme.type.caption, bold=True))
        painter.setPen(QColor(c.ink))
        room = QRectF(0, 0, left - theme.px(8), height)
        if painter.fontMetrics().horizontalAdvance(self.left_word) <= nearest - 4:
            side = Qt.AlignmentFlag.AlignLeft if nearest < left else Qt.AlignmentFlag.AlignRight
            painter.drawText(room, side | Qt.AlignmentFlag.AlignVCenter, self.left_word)

    def point_at(self, instant: int | None) -> None:
        super().point_at(instant)
        self.labels.update()

    def _plates(self, painter: QPainter, height: float) -> list[QRectF]:
        """The words at the now line and at the crosshair, each on a plate; returns the room they take."""
        c, plates = self.theme.colours, []
        if self.now is not None and self.now_word:
            plates.append(self._plate(painter, self.seconds(self.now), self.now_word, c.accent, c.on_accent, height))
        if self.crossed is not None and self.zone is not None:
            word = time_word(self.origin + round(self.crossed * MICROSECONDS), self.zone)
            plates.append(self._plate(painter, self.crossed, word, c.ink, c.raised, height))
        return [plate for plate in plates if not plate.isEmpty()]

    def _plate(self, painter: QPainter, seconds: float, word: str, fill: str, ink: str, height: float) -> QRectF:
        frame, theme, left = self.frame(), self.theme, self.view.pos().x()
        x = float(frame.x(seconds))
        if not -1 <= x <= frame.width + 1:
            return QRectF()
        painter.setFont(theme.font(theme.type.caption, bold=True))
        width = painter.fontMetrics().horizontalAdvance(word) + theme.px(12)
        at = min(left + x - width / 2, self.item.rect().width() - width)
        plate = QRectF(round(at), theme.px(4), width, height - theme.px(8))
        painter.save()
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        painter.setPen(Qt.PenStyle.NoPen)
        painter.setBrush(QColor(fill))
        painter.drawRoundedRect(plate, theme.px(4), theme.px(4))
        painter.restore()
        painter.setPen(QColor(ink))
        painter.drawText(plate, Qt.AlignmentFlag.AlignCenter, word)
        return plate


class EventRow(ClockRow):
    """Events as ticks with words, in a card of its own."""

    def __init__(self, ticks: tuple[Tick, ...], theme: Theme, origin: int, item: RowItem) -> None:
        super().__init__("", theme, origin, item)
        self.ticks = tuple(sorted(ticks, key=lambda tick: tick.at))

    def top_height(self) -> int:
        return self.theme.px(4)

    def foot_height(self) -> int:
        return self.theme.px(4)

    def height(self) -> int:
        return self.theme.px(48)

    def picked(self, at: QPointF) -> object | None:
        frame = self.frame()
        near = [t for t in self.ticks if -4 <= at.x() - float(frame.x(self.seconds(t.at))) <= self.theme.px(40)]
        return near[-1] if near else None

    def _column(self, instant: int) -> float:
        return float(self.frame().x(self.seconds(instant)))

    def _draw_front(self, painter: QPainter) -> None:
        draw_on_rail(painter, self.theme, self.view.rect(), self.ticks, self._column, lines=2)
        self.draw_now(painter)
        self._draw_pointed(painter)

    def point_at(self, instant: int | None) -> None:
        super().point_at(instant)
        self.front.update()

    def near(self, instant: int) -> tuple[Tick, ...]:
        """The events that a crosshair at an instant points at."""
        frame = self.frame()
        reach = self.theme.px(4) * (frame.x1 - frame.x0) / frame.width
        return tuple(t for t in self.ticks if abs(self.seconds(t.at) - self.seconds(instant)) <= reach)

    def _draw_pointed(self, painter: QPainter) -> None:
        """What the crosshair points at, in all its words, on a plate over the others."""
        if self.crossed is None:
            return
        found = self.near(self.origin + round(self.crossed * MICROSECONDS))
        if not found:
            return
        theme, area, px = self.theme, self.view.rect(), self.theme.px
        painter.setFont(theme.font(theme.type.caption, bold=True))
        words, metrics = "; ".join(t.word for t in found), painter.fontMetrics()
        flags = Qt.AlignmentFlag.AlignLeft | Qt.AlignmentFlag.AlignVCenter | Qt.TextFlag.TextWordWrap
        width = min(float(metrics.horizontalAdvance(words)) + px(14), area.width())
        left = min(max(self._column(found[0].at), 0.0), area.width() - width)
        plate = QRectF(round(left), px(8), width, area.height() - px(8))
        painter.fillRect(plate, QColor(theme.colours.raised))
        painter.setPen(QColor(theme.colours.edge))
        painter.drawRect(plate.adjusted(0.5, 0.5, -0.5, -0.5))
        painter.setPen(QColor(theme.colours.ink))
        painter.drawText(plate.adjusted(px(6), 0, -px(6), 0), flags, words)
