"""The ward view: one lane for each episode along the shift's clock. Plain QPainter, no pyqtgraph."""

from PySide6.QtCore import QEvent, QPointF, QRectF, QSize, Qt, Signal
from PySide6.QtGui import (
    QAccessible,
    QAccessibleEvent,
    QColor,
    QFontMetricsF,
    QHelpEvent,
    QKeyEvent,
    QMouseEvent,
    QPainter,
    QPaintEvent,
    QResizeEvent,
)
from PySide6.QtWidgets import QAbstractScrollArea, QFrame, QToolTip, QWidget

from app.chart.lane_layout import LaneGeometry, Placed, geometry_of, hit, place_items
from app.chart.lane_painter import LanePainter
from app.chart.shapes import Lane, LaneItem, LanesSpec
from app.chart.time_ticks import time_ticks
from app.look.theme import GRID, Theme

NO_LANE = -1


class WardLanes(QAbstractScrollArea):
    """Draws a LanesSpec.

    Keys: up and down choose a lane, left and right an item in it, Home and End its first and last item,
    Enter opens what is chosen, Esc goes back from the item to its lane.
    """

    selection_changed = Signal(str, object)
    lane_activated = Signal(str)
    item_activated = Signal(str, object)
    hovered = Signal(str)

    def __init__(self, theme: Theme, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.theme = theme
        self.spec: LanesSpec | None = None
        self._lane = 0
        self._item: LaneItem | None = None
        self._hovered = ""
        self._geometry: LaneGeometry | None = None
        self._painter: LanePainter | None = None
        self._placed: list[list[Placed]] = []
        self.setFrameShape(QFrame.Shape.NoFrame)
        self.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self.viewport().setMouseTracking(True)
        self.verticalScrollBar().setSingleStep(theme.px(6 * GRID))

    # what to draw

    def set_theme(self, theme: Theme) -> None:
        self.theme = theme
        self._lay_out()

    def set_spec(self, spec: LanesSpec) -> None:
        """Takes new lanes; what was chosen stays chosen where it is still there. Where it is not, no lane is: another
        must not look as if it were in hand."""
        key, item = self.selected_key, self._item
        self.spec = spec
        keys = [lane.key for lane in spec.lanes]
        self._lane = keys.index(key) if key in keys else NO_LANE if key else 0
        lane = self.selected_lane
        self._item = next((i for i in lane.items if i == item), None) if lane is not None else None
        self.setAccessibleName(spec.name)
        self._lay_out()

    @property
    def selected_lane(self) -> Lane | None:
        if self.spec is None or not self.spec.lanes:
            return None
        return self.spec.lanes[self._lane] if self._lane != NO_LANE else None

    @property
    def selected_key(self) -> str:
        lane = self.selected_lane
        return "" if lane is None else lane.key

    @property
    def selected_item(self) -> LaneItem | None:
        return self._item

    def select(self, key: str, item: LaneItem | None = None) -> None:
        """Chooses a lane by its key, and an item of it; KeyError where there is no such lane."""
        lanes = () if self.spec is None else self.spec.lanes
        place = next((n for n, lane in enumerate(lanes) if lane.key == key), None)
        if place is None:
            raise KeyError(f"no lane {key!r}")
        self._choose(place, item)

    def select_none(self) -> None:
        """No lane is chosen: the episode in hand is not among those shown."""
        self._lane, self._item = NO_LANE, None
        self.viewport().update()

    def show_chosen(self) -> None:
        """Bring the chosen lane into view: lanes were sorted or filtered anew."""
        if self._lane != NO_LANE:
            self._bring_into_view(self._lane)

    def sentence_of_selection(self) -> str:
        """What is chosen, in words."""
        lane = self.selected_lane
        if lane is None:
            return ""
        return f"{lane.title}: {self._item.sentence}" if self._item is not None else lane.sentence or lane.title

    # sizes

    def sizeHint(self) -> QSize:
        lanes = len(self.spec.lanes) if self.spec is not None else 8
        return QSize(self.theme.px(1100), self.theme.px(36 + 78 * lanes))

    def height_for(self, width: int) -> int:
        """Pixels that all lanes need at their least height, e.g. for a picture of the whole ward."""
        if self.spec is None:
            return self.minimumSizeHint().height()
        g = geometry_of(self.spec, self.theme, width, 0)
        return round(g.head + g.top(len(self.spec.lanes)))

    def minimumSizeHint(self) -> QSize:
        return QSize(self.theme.px(640), self.theme.px(180))

    def resizeEvent(self, event: QResizeEvent) -> None:
        super().resizeEvent(event)
        self._lay_out()

    def _lay_out(self) -> None:
        if self.spec is None:
            return
        size = self.viewport().size()
        self._geometry, self._painter, self._placed = self._lay(size.width(), size.height())
        bar, g = self.verticalScrollBar(), self._geometry
        content = g.top(len(self.spec.lanes))
        bar.setRange(0, max(round(content - (size.height() - g.head)), 0))
        bar.setPageStep(max(round(size.height() - g.head), 1))
        self.viewport().update()

    def _lay(self, width: float, height: float) -> tuple[LaneGeometry, LanePainter, list[list[Placed]]]:
        assert self.spec is not None
        g = geometry_of(self.spec, self.theme, width, height)
        measure = QFontMetricsF(self.theme.font(self.theme.type.caption, bold=True)).horizontalAdvance
        marks = time_ticks(g.start, g.end, g.clock, self.spec.zone, measure)
        placed = [place_items(lane, g, self.theme) for lane in self.spec.lanes]
        return g, LanePainter(self.spec, self.theme, g, marks), placed

    # painting

    def paintEvent(self, event: QPaintEvent) -> None:
        painter = QPainter(self.viewport())
        painter.fillRect(event.rect(), QColor(self.theme.colours.ground))
        if self._geometry is not None and self._painter is not None:
            scroll = self.verticalScrollBar().value()
            self._paint(painter, self._geometry, self._painter, self._placed, scroll, self.viewport().height())
        painter.end()

    def paint_on(self, painter: QPainter, width: int, height: int) -> None:
        """Paints all lanes at the painter's origin on a surface of this size, with nothing chosen."""
        if self.spec is not None:
            painter.fillRect(QRectF(0, 0, width, height), QColor(self.theme.colours.ground))
            g, lane_painter, placed = self._lay(width, height)
            self._paint(painter, g, lane_painter, placed, 0, g.head + g.top(len(self.spec.lanes)), plain=True)

    def _paint(
        self,
        painter: QPainter,
        g: LaneGeometry,
        lane_painter: LanePainter,
        placed: list[list[Placed]],
        scroll: int,
        height: float,
        *,
        plain: bool = False,
    ) -> None:
        assert self.spec is not None
        for n, lane in enumerate(self.spec.lanes):
            top = g.head + g.top(n) - scroll
            if top + g.lane < g.head or top > height:
                continue
            painter.save()
            painter.translate(0, round(top))
            chosen = n == self._lane and not plain
            item = self._item if chosen else None
            lane_painter.draw_lane(painter, lane, placed[n], chosen, item, self.hasFocus())
            painter.restore()
        lane_painter.draw_heading(painter)
        if not self.spec.lanes and self.spec.empty_word:
            painter.setFont(self.theme.font(self.theme.type.emphasis))
            painter.setPen(QColor(self.theme.colours.ink_quiet))
            painter.drawText(QRectF(0, 0, g.width, height), Qt.AlignmentFlag.AlignCenter, self.spec.empty_word)

    # picking

    def hit_at(self, at: QPointF) -> tuple[Lane | None, LaneItem | None]:
        """The lane and the item under a point of the viewport."""
        g = self._geometry
        if self.spec is None or g is None or at.y() < g.head:
            return None, None
        y = at.y() - g.head + self.verticalScrollBar().value()
        n = int(y // (g.lane + g.gap))
        if not 0 <= n < len(self.spec.lanes) or y - g.top(n) > g.lane:
            return None, None
        return self.spec.lanes[n], hit(self._placed[n], at.x(), y - g.top(n))

    def mousePressEvent(self, event: QMouseEvent) -> None:
        lane, item = self.hit_at(event.position())
        if lane is not None and self.spec is not None:
            self._choose(self.spec.lanes.index(lane), item)
        event.accept()

    def mouseReleaseEvent(self, event: QMouseEvent) -> None:
        event.accept()

    def mouseDoubleClickEvent(self, event: QMouseEvent) -> None:
        lane, item = self.hit_at(event.position())
        if lane is not None:
            self._open(lane, item)
        event.accept()

    def mouseMoveEvent(self, event: QMouseEvent) -> None:
        self._hover(event.position())

    def leaveEvent(self, event: QEvent) -> None:
        super().leaveEvent(event)
        self._hover(QPointF(-1, -1))

    def _hover(self, at: QPointF) -> None:
        lane, item = self.hit_at(at)
        words = item.sentence if item is not None else lane.sentence if lane is not None else ""
        if words != self._hovered:
            self._hovered = words
            self.hovered.emit(words)

    def viewportEvent(self, event: QEvent) -> bool:
        if event.type() == QEvent.Type.ToolTip and isinstance(event, QHelpEvent):
            lane, item = self.hit_at(QPointF(event.pos()))
            words = item.sentence if item is not None else lane.sentence if lane is not None else ""
            if words:
                QToolTip.showText(event.globalPos(), words, self.viewport())
            else:
                QToolTip.hideText()
            return True
        return super().viewportEvent(event)

    # keys

    def keyPressEvent(self, event: QKeyEvent) -> None:
        keys, lane = Qt.Key, self.selected_lane
        if self.spec is None or not self.spec.lanes:
            super().keyPressEvent(event)
            return
        last = len(self.spec.lanes) - 1
        if lane is None:  # any of these keys takes one in hand again
            if event.key() in (keys.Key_Up, keys.Key_Down, keys.Key_PageUp, keys.Key_PageDown, keys.Key_Return):
                self._choose(0, None)
            else:
                event.ignore()
            return
        match event.key():
            case keys.Key_Up:
                self._choose(max(self._lane - 1, 0), None)
            case keys.Key_Down:
                self._choose(min(self._lane + 1, last), None)
            case keys.Key_PageUp:
                self._choose(max(self._lane - 5, 0), None)
            case keys.Key_PageDown:
                self._choose(min(self._lane + 5, last), None)
            case keys.Key_Left | keys.Key_Right | keys.Key_Home | keys.Key_End:
                self._step(event.key())
            case keys.Key_Return | keys.Key_Enter:
                self._open(lane, self._item)
            case keys.Key_Escape if self._item is not None:
                self._choose(self._lane, None)
            case _:
                event.ignore()
                return
        event.accept()

    def _step(self, key: int) -> None:
        items = [placed.item for placed in self._placed[self._lane]]
        if not items:
            return
        at = next((n for n, item in enumerate(items) if item is self._item), None)
        if key == Qt.Key.Key_Home:
            at = 0
        elif key == Qt.Key.Key_End or (at is None and key == Qt.Key.Key_Left):
            at = len(items) - 1
        elif at is None:
            at = 0
        else:
            at = min(max(at + (1 if key == Qt.Key.Key_Right else -1), 0), len(items) - 1)
        self._choose(self._lane, items[at])

    def _choose(self, lane: int, item: LaneItem | None) -> None:
        assert self.spec is not None
        if (lane, item) == (self._lane, self._item):
            self.viewport().update()
            return
        self._lane, self._item = lane, item
        self._bring_into_view(lane)
        self.viewport().update()
        self.setAccessibleDescription(self.sentence_of_selection())
        QAccessible.updateAccessibility(QAccessibleEvent(self, QAccessible.Event.DescriptionChanged))
        self.selection_changed.emit(self.spec.lanes[lane].key, item)

    def _bring_into_view(self, lane: int) -> None:
        g, bar = self._geometry, self.verticalScrollBar()
        if g is None:
            return
        top, room = g.top(lane), self.viewport().height() - g.head
        if top < bar.value():
            bar.setValue(round(top))
        elif top + g.lane > bar.value() + room:
            bar.setValue(round(top + g.lane + g.gap - room))

    def _open(self, lane: Lane, item: LaneItem | None) -> None:
        if item is not None:
            self.item_activated.emit(lane.key, item)
        else:
            self.lane_activated.emit(lane.key)
