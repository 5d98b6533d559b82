"""One row of the stack: a pyqtgraph view in a card, and layers drawn in the view's pixels.

Axes, menus and automatic ranges of pyqtgraph are left out: the row draws its own card, labels and marks, so
that text lies on whole pixels and a pan step costs as little as possible.
"""

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
import pyqtgraph as pg
import shiboken6
from PySide6.QtCore import QPointF, QRectF, Qt, Signal
from PySide6.QtGui import QColor, QFontMetricsF, QPainter
from PySide6.QtWidgets import (
    QGraphicsGridLayout,
    QGraphicsItem,
    QGraphicsSceneWheelEvent,
    QStyleOptionGraphicsItem,
    QWidget,
)

from app.chart.marks import draw_card
from app.chart.shapes import MICROSECONDS, Reading, Span
from app.chart.time_ticks import ClockMark
from app.look.theme import Theme

BACK, FRONT, CROSS = -1000.0, 1000.0, 2000.0  # below the curves, above them, above all


@dataclass(frozen=True, slots=True)
class Margins:
    """Pixels around the view, the same in every row, so that one instant stands in one column."""

    left: int
    axis_right: int
    gutter: int

    @property
    def right(self) -> int:
        return self.axis_right + self.gutter


class ClockView(pg.ViewBox):  # type: ignore[misc]  # pyqtgraph has no types
    """A view that moves in x only and asks its stack to move all rows together."""

    dragged = Signal(float)  # seconds to move the window by
    wheeled = Signal(float, float)  # factor on the span, seconds under the cursor
    picked = Signal(object)  # QPointF in the view's pixels

    def __init__(self) -> None:
        super().__init__(enableMenu=False, enableMouse=False)
        self.setMouseEnabled(x=False, y=False)
        self.setDefaultPadding(0.0)

    def wheelEvent(self, event: QGraphicsSceneWheelEvent, axis: int | None = None) -> None:  # noqa: ARG002
        x0, x1 = self.viewRange()[0]
        turn = event.delta() / 120.0
        sideways = event.orientation() == Qt.Orientation.Horizontal
        if sideways or event.modifiers() & Qt.KeyboardModifier.ShiftModifier:
            self.dragged.emit(-turn * (x1 - x0) / 10)
        else:
            share = event.pos().x() / max(self.width(), 1.0)
            self.wheeled.emit(0.8**turn, x0 + share * (x1 - x0))
        event.accept()

    def mouseDragEvent(self, event: Any, axis: int | None = None) -> None:  # noqa: ARG002
        event.accept()
        if event.button() == Qt.MouseButton.LeftButton:
            x0, x1 = self.viewRange()[0]
            moved = event.lastPos().x() - event.pos().x()
            self.dragged.emit(moved * (x1 - x0) / max(self.width(), 1.0))

    def mouseClickEvent(self, event: Any) -> None:
        if event.button() == Qt.MouseButton.LeftButton:
            event.accept()
            self.picked.emit(event.pos())


@dataclass(frozen=True, slots=True)
class Frame:
    """What is in view, in seconds and values, and the pixels it is drawn on."""

    x0: float
    x1: float
    y0: float
    y1: float
    width: float
    height: float

    def x(self, seconds: Any) -> Any:
        return (seconds - self.x0) * (self.width / (self.x1 - self.x0))

    def y(self, value: Any) -> Any:
        return (self.y1 - value) * (self.height / (self.y1 - self.y0))


class Layer(QGraphicsItem):
    """Paints by a bound method over a rectangle that is asked for anew when sizes change."""

    def __init__(
        self,
        parent: QGraphicsItem,
        z: float,
        area: Callable[[], QRectF],
        draw: Callable[[QPainter], None],
        *,
        clipped: bool = False,
    ) -> None:
        super().__init__(parent)
        self._area, self._draw = area, draw
        self._rect = QRectF()
        self.setZValue(z)
        self.setAcceptedMouseButtons(Qt.MouseButton.NoButton)
        self.setFlag(QGraphicsItem.GraphicsItemFlag.ItemClipsToShape, clipped)

    def resized(self) -> None:
        """To be called when the rectangle may have changed."""
        self.prepareGeometryChange()
        self._rect = self._area()

    def boundingRect(self) -> QRectF:
        return self._rect

    def paint(
        self,
        painter: QPainter,
        option: QStyleOptionGraphicsItem,  # noqa: ARG002
        widget: QWidget | None = None,  # noqa: ARG002
    ) -> None:
        self._draw(painter)


class CrossLine(QGraphicsItem):
    """The crosshair in one row: a column one pixel wide, so that moving it repaints almost nothing."""

    def __init__(self, parent: QGraphicsItem, colour: QColor) -> None:
        super().__init__(parent)
        self._height, self._colour = 0.0, colour
        self.setZValue(CROSS)
        self.setAcceptedMouseButtons(Qt.MouseButton.NoButton)
        self.hide()

    def place(self, x: float, height: float) -> None:
        if height != self._height:
            self.prepareGeometryChange()
            self._height = height
        self.setPos(float(round(x)), 0.0)
        self.show()

    def boundingRect(self) -> QRectF:
        return QRectF(0, 0, 1, self._height)

    def paint(
        self,
        painter: QPainter,
        option: QStyleOptionGraphicsItem,  # noqa: ARG002
        widget: QWidget | None = None,  # noqa: ARG002
    ) -> None:
        painter.fillRect(self.boundingRect(), self._colour)


class RowItem(pg.GraphicsWidget):  # type: ignore[misc]  # pyqtgraph has no types
    """A view with margins around it; a stack keeps it and puts one row after the other into it.

    A PlotItem would bring some forty hidden widgets for menus we do not use. The item outlives its rows,
    because views that Python's collector destroys at a time of its own take Qt down with them.
    """

    def __init__(self) -> None:
        super().__init__()
        self.view = ClockView()
        self.grid = QGraphicsGridLayout(self)
        self.grid.setSpacing(0)
        self.grid.addItem(self.view, 0, 0)


class ClockRow:
    """A card with a title and a view on the stack's clock; panels, ribbon and events build on it."""

    def __init__(self, title: str, theme: Theme, origin: int, item: RowItem) -> None:
        self.title, self.theme, self.origin = title, theme, origin
        self.margins = Margins(0, 0, 0)
        self.marks: Sequence[ClockMark] = ()
        self.breaks: tuple[Span, ...] = ()
        self.now: int | None = None
        self.item, self.view = item, item.view
        self.card = Layer(self.item, -1e6, self._whole, self._draw_card)
        self.gutter = Layer(self.item, FRONT, self._right_side, self._draw_gutter)
        self.back = Layer(self.view, BACK, self._view_rect, self._draw_back)
        self.front = Layer(self.view, FRONT, self._view_rect, self._draw_front)
        self.cross = CrossLine(self.view, QColor(theme.colours.ink_quiet))
        self.crossed: float | None = None
        self.view.sigResized.connect(self._view_resized)
        self.item.geometryChanged.connect(self._item_resized)

    def leave(self) -> None:
        """Takes everything of this row out of its item, which the next row will use."""
        self.view.sigResized.disconnect(self._view_resized)
        self.item.geometryChanged.disconnect(self._item_resized)
        for layer in self.layers():
            self.item.scene().removeItem(layer)
            shiboken6.delete(layer)  # else it stays in memory for as long as the view does

    def layers(self) -> list[QGraphicsItem]:
        """What this row has put upon its item and view."""
        return [self.card, self.gutter, self.back, self.front, self.cross]

    # sizes

    def top_height(self) -> int:
        """Pixels above the view: the title's line."""
        return self.theme.px(28)

    def foot_height(self) -> int:
        return self.theme.px(8)

    def set_margins(self, margins: Margins) -> None:
        self.margins = margins
        self.item.grid.setContentsMargins(margins.left, self.top_height(), margins.right, self.foot_height())
        for layer in self.layers():  # an item used before may keep its size, and then nothing else tells them theirs
            if isinstance(layer, Layer):
                layer.resized()

    def gutter_wanted(self) -> int:
        """Pixels the labels at the right end need."""
        return 0

    def left_wanted(self) -> int:
        return self.theme.px(24)

    def axis_right_wanted(self) -> int:
        return 0

    def metrics(self, *, bold: bool = False, size: int | None = None) -> QFontMetricsF:
        return QFontMetricsF(self.theme.font(size or self.theme.type.caption, bold=bold))

    def _whole(self) -> QRectF:
        return QRectF(self.item.rect())

    def _view_rect(self) -> QRectF:
        return QRectF(self.view.rect())

    def _right_side(self) -> QRectF:
        whole, left = self.item.rect(), self.margins.right
        return QRectF(whole.right() - left, 0, left, whole.height())

    def _item_resized(self) -> None:
        self.card.resized()
        self.gutter.resized()

    def _view_resized(self, _view: object = None) -> None:
        for layer in (self.back, self.front, self.card, self.gutter):
            layer.resized()

    # the clock

    def frame(self) -> Frame:
        (x0, x1), (y0, y1) = self.view.viewRange()
        rect = self.view.rect()
        return Frame(x0, x1, y0, y1, max(rect.width(), 1.0), max(rect.height(), 1.0))

    def seconds(self, instant: Any) -> Any:
        """Seconds since the origin, of one instant or of an array of them."""
        return (instant - self.origin) / MICROSECONDS

    def show_window(self, start: int, end: int, marks: Sequence[ClockMark]) -> None:
        """Moves the view; `marks` are drawn as faint upright lines."""
        self.marks = marks
        self.view.setXRange(self.seconds(start), self.seconds(end), padding=0)
        self.back.update()
        self.front.update()

    def point_at(self, instant: int | None) -> None:
        """Puts the crosshair at an instant, or takes it away."""
        self.crossed = None if instant is None else self.seconds(instant)
        if self.crossed is None:
            self.cross.hide()
        else:
            frame = self.frame()
            self.cross.place(float(frame.x(self.crossed)), frame.height)
        self.gutter.update()

    def readings(self, instant: int) -> tuple[Reading, ...]:  # noqa: ARG002
        return ()

    def picked(self, at: QPointF) -> object | None:  # noqa: ARG002
        """What lies under a point of the view's pixels."""
        return None

    @property
    def reduced(self) -> bool:
        return False

    # drawing

    def _draw_card(self, painter: QPainter) -> None:
        draw_card(painter, self.theme, self.item.rect())
        self._draw_title(painter)

    def _draw_title(self, painter: QPainter) -> None:
        painter.setFont(self.theme.font(self.theme.type.body, bold=True))
        painter.setPen(QColor(self.theme.colours.ink))
        height = self.theme.px(28)
        room = QRectF(self.margins.left, 0, self.item.rect().width() - self.margins.left - self.margins.right, height)
        painter.drawText(room, Qt.AlignmentFlag.AlignLeft | Qt.AlignmentFlag.AlignVCenter, self.title)

    def _draw_gutter(self, painter: QPainter) -> None:
        """Nothing at the right end unless a row has labels there."""

    def _draw_back(self, painter: QPainter) -> None:
        self.draw_breaks(painter)
        self.draw_clock_lines(painter)

    def _draw_front(self, painter: QPainter) -> None:
        self.draw_now(painter)

    def draw_breaks(self, painter: QPainter) -> None:
        """A break lies as a quiet column through every row: what was measured in it was off support."""
        frame = self.frame()
        for gap in self.breaks:
            a, b = visible(frame, self.seconds(gap.start), self.seconds(gap.end))
            if b > a:
                painter.fillRect(QRectF(a, 0, b - a, frame.height), self.theme.colour("sunken", 0.75))

    def draw_clock_lines(self, painter: QPainter) -> None:
        frame, c = self.frame(), self.theme.colours
        for mark in self.marks:
            x = round(float(frame.x(self.seconds(mark.at))))
            if mark.label:
                painter.fillRect(QRectF(x, 0, 1, frame.height), QColor(c.edge if mark.midnight else c.line))

    def draw_now(self, painter: QPainter) -> None:
        if self.now is not None:
            frame = self.frame()
            x = float(frame.x(self.seconds(self.now)))
            if -1 <= x <= frame.width:
                painter.fillRect(QRectF(round(x), 0, 2, frame.height), QColor(self.theme.colours.accent))


def visible(frame: Frame, start: float, end: float) -> tuple[float, float]:
    """Pixels of a stretch of seconds, cut to the view; empty where it is out of sight."""
    a, b = float(frame.x(start)), float(frame.x(end))
    return float(np.clip(a, 0, frame.width)), float(np.clip(b, 0, frame.width))
