"""The panels of one episode on one clock: ribbon on top, events and the time axis at the foot."""

from collections.abc import Sequence

import pyqtgraph as pg
from PySide6.QtCore import QEvent, QPointF, QRectF, QSize, Qt, Signal
from PySide6.QtGui import QColor, QFocusEvent, QKeyEvent, QMouseEvent, QPainter, QPen, QResizeEvent, QTransform
from PySide6.QtWidgets import QGraphicsGridLayout, QWidget

from app.chart.clock_window import kept_inside, zoomed
from app.chart.panel import PanelRow
from app.chart.ribbon import RibbonRow
from app.chart.row import ClockRow, Margins, RowItem
from app.chart.shapes import MICROSECONDS, Bracket, Reading, RibbonStep, StackSpec, Tick
from app.chart.stack_keys import key_pressed, moves_crosshair
from app.chart.time_axis import EventRow, TimeAxisRow
from app.chart.time_ticks import date_word, time_ticks
from app.look.theme import GRID, Theme

_PANEL_LEAST = 86  # pixels at 100 %: ribbon, three panels, events and clock stand whole at 1280 x 800
_RIBBON_WEIGHT = 1.1


class PanelStack(pg.GraphicsView):  # type: ignore[misc]  # pyqtgraph has no types
    """Draws a StackSpec; `app.chart.stack_keys` says what the keys do."""

    instant_changed = Signal(object)
    range_changed = Signal(object, object)
    reduced_changed = Signal(bool)
    bracket_activated = Signal(object)
    tick_activated = Signal(object)

    def __init__(self, theme: Theme, parent: QWidget | None = None) -> None:
        super().__init__(parent, background=None, useOpenGL=False)
        self.theme = theme
        self.spec: StackSpec | None = None
        self.rows: list[ClockRow] = []
        self.ribbon: RibbonRow | None = None
        self.axis: TimeAxisRow | None = None
        self.instant: int | None = None
        self._window = (0, 1)
        self._reduced = False
        self._margins = Margins(0, 0, 0)
        self._items: list[RowItem] = []
        self._foot: int | None = None
        ground = pg.GraphicsWidget()
        self.grid = QGraphicsGridLayout(ground)
        self.setCentralWidget(ground)
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self.setMouseTracking(True)
        self.scene().sigMouseMoved.connect(self._moved)
        self.set_theme(theme)

    # what to draw

    def set_theme(self, theme: Theme) -> None:
        """Draws everything anew in another look."""
        self.theme = theme
        self.setBackground(QColor(theme.colours.ground))
        if self.spec is not None:
            window = self._window
            self.set_spec(self.spec)
            self.set_window(*window)

    def set_spec(self, spec: StackSpec) -> None:
        """Takes a new episode, or the same with new values; shows the spec's window."""
        self.spec = spec
        self.instant = None
        self._clear()
        self._build(spec)
        self._arrange()
        self.grid.activate()  # the clock's marks depend on how wide the rows now are
        self.setAccessibleName(spec.name)
        self.setAccessibleDescription(spec.summary)
        start, end = spec.window or (spec.start, spec.end)
        self.set_window(start, end)

    def _clear(self) -> None:
        for row in self.rows:
            row.leave()
        self.rows, self.ribbon, self.axis = [], None, None

    def _item(self) -> RowItem:
        """The item of the next row: one that an earlier episode used, else a new one."""
        place = len(self.rows)
        if place == len(self._items):
            item = RowItem()
            item.view.dragged.connect(self.pan_seconds)
            item.view.wheeled.connect(self._wheeled)
            item.view.picked.connect(self._picked)
            self._items.append(item)
            self.scene().addItem(item)
        return self._items[place]

    def _build(self, spec: StackSpec) -> None:
        origin = spec.start
        if spec.ribbon is not None:
            self.ribbon = RibbonRow(spec.ribbon, self.theme, origin, self._item())
            self.rows.append(self.ribbon)
        for panel in spec.panels:
            self.rows.append(PanelRow(panel, self.theme, origin, self._item()))
        if spec.events:
            self.rows.append(EventRow(spec.events, self.theme, origin, self._item()))
        self.axis = TimeAxisRow(self.theme, origin, self._item())
        self.axis.now_word = spec.now_word
        self.axis.zone = spec.zone
        self.rows.append(self.axis)
        for row in self.rows:
            row.now = spec.now
            if spec.ribbon is not None:
                row.breaks = spec.ribbon.breaks

    def _arrange(self) -> None:
        gap = self.theme.px(2 * GRID)
        layout = self.grid
        while layout.count():
            layout.removeAt(0)
        for n in range(len(self.rows), layout.rowCount()):
            layout.setRowFixedHeight(n, 0)
        for item in self._items[len(self.rows) :]:
            item.hide()
        layout.setContentsMargins(gap, gap, gap, 0)
        layout.setVerticalSpacing(gap)
        self._margins = Margins(
            max(row.left_wanted() for row in self.rows),
            max(row.axis_right_wanted() for row in self.rows),
            max(max(row.gutter_wanted() for row in self.rows), self.theme.px(24)),
        )
        for n, row in enumerate(self.rows):
            layout.addItem(row.item, n, 0)
            row.item.show()
            row.set_margins(self._margins)
            fixed = row.height() if isinstance(row, EventRow | TimeAxisRow) else None
            if fixed is not None:
                layout.setRowFixedHeight(n, fixed)
                layout.setRowStretchFactor(n, 0)
            else:
                layout.setRowMaximumHeight(n, 16_777_215)  # Qt's own «no limit»
                layout.setRowMinimumHeight(n, self._least_height(row))
                layout.setRowStretchFactor(n, round(100 * self._weight(row)))
        self.setMinimumHeight(self.minimumSizeHint().height())
        self._hold_axis()

    def hold_axis_above(self, foot: int | None) -> None:
        """Where the stack is longer than what is seen of it, the clock stands at the foot of what is seen: `foot`
        in pixels from the stack's top; None leaves it at its own place."""
        if foot != self._foot:
            self._foot = foot
            self._hold_axis()

    def _hold_axis(self) -> None:
        for item in self._items:
            item.setTransform(QTransform())
            item.setZValue(0.0)
        if self.axis is not None:
            beyond = 0 if self._foot is None else max(self.height() - self._foot, 0)
            self.axis.item.setTransform(QTransform.fromTranslate(0, -beyond))
            self.axis.item.setZValue(1.0)
            self.axis.float_above(beyond > 0)

    def _weight(self, row: ClockRow) -> float:
        if isinstance(row, RibbonRow):
            return _RIBBON_WEIGHT
        return row.spec.weight if isinstance(row, PanelRow) else 0.0

    def _least_height(self, row: ClockRow) -> int:
        return self.theme.px(_PANEL_LEAST) + row.top_height() - self.theme.px(28)

    def minimumSizeHint(self) -> QSize:
        gap = self.theme.px(2 * GRID)
        height = gap
        for row in self.rows:
            fixed = row.height() if isinstance(row, EventRow | TimeAxisRow) else self._least_height(row)
            height += fixed + gap
        return QSize(self.theme.px(480), height)

    def sizeHint(self) -> QSize:
        return QSize(self.theme.px(960), round(self.minimumSizeHint().height() * 1.3))

    # the window of time

    @property
    def in_view(self) -> tuple[int, int]:
        """Start and end of the time in view (`window` would hide Qt's own method)."""
        return self._window

    def set_window(self, start: int, end: int) -> None:
        """Shows a stretch of time, kept inside the episode with a little air at both ends."""
        if self.spec is None:
            return
        last = max(self.spec.end, self.spec.now or self.spec.end)
        self._window = start, end = kept_inside(int(start), int(end), self.spec.start, last)
        self._show()
        self.range_changed.emit(start, end)

    def _show(self) -> None:
        assert self.spec is not None
        assert self.axis is not None
        start, end = self._window
        width = max(self.axis.view.rect().width(), 1.0)
        marks = time_ticks(start, end, width, self.spec.zone, self.axis.measure)
        for row in self.rows:
            if row is self.axis:
                self.axis.show_dated(start, end, marks, date_word(start, self.spec.zone))
            else:
                row.show_window(start, end, marks)
        if self.instant is not None:
            self._point(self.instant)
        reduced = any(row.reduced for row in self.rows)
        self.axis.show_note(self.spec.reduced_word if reduced else "")
        if reduced != self._reduced:
            self._reduced = reduced
            self.reduced_changed.emit(reduced)

    @property
    def reduced(self) -> bool:
        """Some data in view are reduced to their extremes per pixel."""
        return self._reduced

    def pan_seconds(self, seconds: float) -> None:
        """Moves the window by seconds; positive goes later."""
        start, end = self._window
        by = round(seconds * MICROSECONDS)
        self.set_window(start + by, end + by)

    def zoom(self, factor: float, about: int | None = None) -> None:
        """Multiplies the span, keeping an instant in its place (the crosshair or the middle)."""
        start, end = self._window
        if about is None:
            inside = self.instant is not None and start <= self.instant <= end
            about = self.instant if inside and self.instant is not None else (start + end) // 2
        self.set_window(*zoomed(start, end, factor, about))

    def go_to(self, instant: int) -> None:
        """Moves the window so that an instant stands in its middle, e.g. an anchor."""
        span = self._window[1] - self._window[0]
        self.set_window(instant - span // 2, instant - span // 2 + span)

    def go_home(self) -> None:
        """The start of the episode at the left, at the present span."""
        if self.spec is not None:
            span = self._window[1] - self._window[0]
            self.set_window(self.spec.start - span // 50, self.spec.start - span // 50 + span)

    def go_now(self) -> None:
        """Now (or the episode's end) at the right, at the present span."""
        if self.spec is not None:
            last = self.spec.end if self.spec.now is None else self.spec.now
            span = self._window[1] - self._window[0]
            self.set_window(last - span + span // 50, last + span // 50)

    def show_all(self) -> None:
        if self.spec is not None:
            self.set_window(self.spec.start, max(self.spec.end, self.spec.now or self.spec.end))

    # the crosshair

    def point_at(self, instant: int | None) -> None:
        """Puts the crosshair at an instant, or takes it away; says so by instant_changed."""
        if instant != self.instant:
            self.instant = instant
            self._point(instant)
            self.instant_changed.emit(instant)

    def _point(self, instant: int | None) -> None:
        inside = instant is not None and self._window[0] <= instant <= self._window[1]
        for row in self.rows:
            row.point_at(instant if inside else None)

    def readings_at(self, instant: int) -> tuple[Reading, ...]:
        """Every trace's last value at or before an instant; its own instant tells its age."""
        return tuple(reading for row in self.rows for reading in row.readings(instant))

    def events_at(self, instant: int) -> tuple[Tick, ...]:
        """The events that a crosshair at an instant points at."""
        return tuple(t for row in self.rows if isinstance(row, EventRow) for t in row.near(instant))

    def bracket_at(self, instant: int) -> Bracket | None:
        """The response window that holds an instant; of several the latest."""
        for row in self.rows:
            found = row.picked(QPointF(float(row.frame().x(row.seconds(instant))), 0.0))
            if isinstance(found, Bracket):
                return found
        return None

    def settings_at(self, instant: int) -> RibbonStep | None:
        """The settings in force at an instant."""
        return self.ribbon.step_at(instant) if self.ribbon is not None else None

    # the reader's hands

    def _moved(self, at: QPointF) -> None:
        if self.spec is None or self.axis is None:
            return
        view = self.axis.view
        x = view.mapFromScene(at).x()
        if not 0 <= x <= view.rect().width():
            self.point_at(None)
            return
        start, end = self._window
        self.point_at(start + round(x / view.rect().width() * (end - start)))

    def _wheeled(self, factor: float, seconds: float) -> None:
        if self.spec is not None:
            self.zoom(factor, self.spec.start + round(seconds * MICROSECONDS))

    def _picked(self, at: QPointF) -> None:
        sender = self.sender()
        row = next((row for row in self.rows if row.view is sender), None)
        self._open(row.picked(at) if row is not None else None)

    def mousePressEvent(self, event: QMouseEvent) -> None:
        super().mousePressEvent(event)
        event.accept()  # a press on a chart is the chart's, whatever lies under it

    def mouseReleaseEvent(self, event: QMouseEvent) -> None:
        super().mouseReleaseEvent(event)
        event.accept()

    def leaveEvent(self, event: QEvent) -> None:
        self.point_at(None)
        super().leaveEvent(event)

    def open_at_crosshair(self) -> None:
        """Open the bracket or the tick under the crosshair."""
        for row in self.rows:
            if self.instant is not None:
                x = float(row.frame().x(row.seconds(self.instant)))
                if self._open(row.picked(QPointF(x, 0.0))):
                    return

    def _open(self, found: object | None) -> bool:
        if isinstance(found, Bracket):
            self.bracket_activated.emit(found)
        elif isinstance(found, Tick):
            self.tick_activated.emit(found)
        return found is not None

    def event(self, event: QEvent) -> bool:
        """Ctrl with an arrow is the crosshair's here, whatever shortcut the window may have for it."""
        if event.type() is QEvent.Type.ShortcutOverride and isinstance(event, QKeyEvent) and moves_crosshair(event):
            event.accept()
            return True
        return bool(super().event(event))

    def keyPressEvent(self, event: QKeyEvent) -> None:
        # the window may know another key; pyqtgraph's own handler would swallow it
        event.setAccepted(key_pressed(self, event))

    def focusInEvent(self, event: QFocusEvent) -> None:
        super().focusInEvent(event)
        self.viewport().update()

    def focusOutEvent(self, event: QFocusEvent) -> None:
        super().focusOutEvent(event)
        self.viewport().update()

    def drawForeground(self, painter: QPainter, rect: object) -> None:
        """The ring that shows where the keys go."""
        super().drawForeground(painter, rect)
        if self.hasFocus():
            painter.save()
            painter.resetTransform()
            pen = QPen(QColor(self.theme.colours.accent), 2)
            painter.setPen(pen)
            painter.drawRect(self.viewport().rect().adjusted(1, 1, -1, -1))
            painter.restore()

    def resizeEvent(self, event: QResizeEvent | None) -> None:
        super().resizeEvent(event)
        if getattr(self, "spec", None) is not None:
            self.grid.activate()
            self._hold_axis()
            self._show()

    def close(self) -> bool:
        """Closes as any widget does: pyqtgraph would also destroy items that are still referred to."""
        return bool(QWidget.close(self))

    # pictures

    def use_pen_scale(self, scale: float) -> None:
        """For pictures with `scale` dots per pixel."""
        for row in self.panels():
            row.use_pen_scale(scale)
        if self.spec is not None:
            self._show()

    def panels(self) -> Sequence[PanelRow]:
        """The rows that hold traces."""
        return [row for row in self.rows if isinstance(row, PanelRow)]

    def paint_on(self, painter: QPainter, width: int, height: int) -> None:
        """Paints the whole stack at the painter's origin; the widget was laid out at this size."""
        area = QRectF(0, 0, width, height)
        self.scene().render(painter, area, area, Qt.AspectRatioMode.IgnoreAspectRatio)
