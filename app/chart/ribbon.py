"""The pressure ribbon: the band between EPAP and IPAP, its thickness the pressure support.

Settings hold until they are changed, so the band goes in steps. CPAP, one pressure, is a single line. FiO2
stands on the ribbon from each change on; where it is not known the ribbon is hatched and says so. Breaks
are gaps with a word. A settings change is a small tick above, with its words where there is room.
"""

from collections.abc import Callable, Iterator, Sequence
from itertools import groupby, pairwise

import numpy as np
from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QColor, QPainter
from PySide6.QtWidgets import QGraphicsItem

from app.chart.end_labels import EndLabel, draw_end_labels, label_width
from app.chart.marks import hatch, solid_pen, whole_or_none
from app.chart.panel import PanelRow
from app.chart.row import FRONT, Frame, Layer, RowItem, visible
from app.chart.shapes import PanelSpec, RibbonSpec, RibbonStep, Scale, Tick, Trace
from app.chart.value_ticks import value_word
from app.look.theme import Theme

_NONE = np.empty(0)
_LEVELS = {name: Trace(name, name, "cmH\u2082O", _NONE.astype(np.int64), _NONE) for name in ("IPAP", "EPAP", "CPAP")}


class RibbonRow(PanelRow):
    """The ribbon as the top row of a stack."""

    strip: Layer | None = None

    def __init__(self, ribbon: RibbonSpec, theme: Theme, origin: int, item: RowItem) -> None:
        scale = Scale(ribbon.unit, 0.0, ribbon.high, 0)
        super().__init__(PanelSpec("ribbon", ribbon.title, (), (scale,)), theme, origin, item)
        self.ribbon = ribbon
        self.steps = tuple(sorted(ribbon.steps, key=lambda step: step.start))
        self._starts = np.array([step.start for step in self.steps], np.int64)
        self.breaks = ribbon.breaks
        self.strip = Layer(self.item, FRONT, self._strip_area, self._draw_strip, clipped=True)

    def layers(self) -> list[QGraphicsItem]:
        return super().layers() + ([self.strip] if self.strip else [])

    def top_height(self) -> int:
        return self.theme.px(28 + 20)

    def step_at(self, instant: int) -> RibbonStep | None:
        """The settings in force at an instant."""
        i = int(np.searchsorted(self._starts, instant, side="right")) - 1
        return self.steps[i] if i >= 0 and instant < self.steps[i].end else None

    def _strip_area(self) -> QRectF:
        return QRectF(self.view.pos().x(), self.theme.px(28), self.view.rect().width(), self.theme.px(20))

    def _view_resized(self, _view: object = None) -> None:
        super()._view_resized(_view)
        if self.strip:
            self.strip.resized()

    def show_window(self, start: int, end: int, marks: object) -> None:
        super().show_window(start, end, marks)  # type: ignore[arg-type]
        if self.strip:
            self.strip.update()

    def picked(self, at: QPointF) -> object | None:
        frame = self.frame()
        near = [t for t in self.ribbon.ticks if abs(float(frame.x(self.seconds(t.at))) - at.x()) <= self.theme.px(8)]
        return near[-1] if near else None

    # drawing

    def gutter_wanted(self) -> int:
        return max(label_width(self.theme, trace) for trace in _LEVELS.values())

    def _draw_gutter(self, painter: QPainter) -> None:
        """The pressures in force under the crosshair, else at the end of what is in view."""
        last = min(self.window[1], max((step.end for step in self.steps), default=0)) - 1
        step = self.step_at(last if self.crossed is None else self.origin + round(self.crossed * 1e6))
        if step is None or step.epap is None:
            return
        levels = {"CPAP": step.epap} if step.ipap is None else {"IPAP": step.ipap, "EPAP": step.epap}
        frame, ink = self.frame(), QColor(self.theme.colours.support_edge)
        labels = [
            EndLabel(_LEVELS[name], ink, False, float(frame.y(level)), value_word(level, 0 if level % 1 == 0 else 1))
            for name, level in levels.items()
        ]
        left = self.view.pos().x() + frame.width
        area = QRectF(left, self.view.pos().y(), self.item.rect().right() - left, frame.height)
        draw_end_labels(painter, self.theme, area, labels)

    def _draw_front(self, painter: QPainter) -> None:
        frame = self.frame()
        painter.save()
        painter.setFont(self.theme.font(self.theme.type.caption))
        seen = [s for s in self.steps if self.seconds(s.end) > frame.x0 and self.seconds(s.start) < frame.x1]
        for step in seen:
            for a, b in self._outside_breaks(step):
                self._draw_step(painter, frame, step, a, b)
        self._join_levels(painter, frame, seen)
        self._draw_breaks_words(painter, frame)
        self._draw_fio2(painter, frame, seen)
        self._draw_modes(painter, frame, seen)
        painter.restore()
        self.draw_now(painter)

    def _outside_breaks(self, step: RibbonStep) -> Iterator[tuple[int, int]]:
        at = step.start
        for gap in self.breaks:
            if gap.start < step.end and gap.end > at:
                if gap.start > at:
                    yield at, gap.start
                at = max(at, gap.end)
        if at < step.end:
            yield at, step.end

    def _draw_step(self, painter: QPainter, frame: Frame, step: RibbonStep, start: int, end: int) -> None:
        c = self.theme.colours
        a, b = visible(frame, self.seconds(start), self.seconds(end))
        if b <= a or step.epap is None:
            return
        low = round(float(frame.y(step.epap)))
        if step.ipap is None:
            painter.fillRect(QRectF(a, low - 1, b - a, 3), QColor(c.support_edge))
            if not step.fio2_known:
                painter.fillRect(QRectF(a, low - 6, b - a, 12), hatch(self.theme.colour("ink_quiet", 0.7)))
            return
        high = round(float(frame.y(step.ipap)))
        band = QRectF(a, high, b - a, low - high)
        painter.fillRect(band, QColor(c.support))
        if not step.fio2_known:
            painter.fillRect(band, hatch(self.theme.colour("support_edge", 0.55)))
        pen = solid_pen(c.support_edge, 2.0)
        if step.doubtful:
            pen.setDashPattern([2, 2])
        painter.setPen(pen)
        painter.drawLine(QPointF(a, high), QPointF(b, high))
        painter.setPen(solid_pen(c.support_edge, 1.0))
        painter.drawLine(QPointF(a, low), QPointF(b, low))

    def _join_levels(self, painter: QPainter, frame: Frame, seen: list[RibbonStep]) -> None:
        """Upright edges between one step and the next."""
        painter.setPen(solid_pen(self.theme.colours.support_edge, 1.0))
        for one, other in pairwise(seen):
            x = float(frame.x(self.seconds(other.start)))
            if one.end != other.start or not 0 <= x <= frame.width:
                continue
            if any(gap.start <= other.start <= gap.end for gap in self.breaks):
                continue
            for p, q in ((_top(one), _top(other)), (one.epap, other.epap)):
                if p is not None and q is not None and p != q:
                    painter.drawLine(QPointF(round(x), float(frame.y(p))), QPointF(round(x), float(frame.y(q))))

    def _draw_breaks_words(self, painter: QPainter, frame: Frame) -> None:
        c = self.theme.colours
        for gap in self.breaks:
            a, b = visible(frame, self.seconds(gap.start), self.seconds(gap.end))
            word = whole_or_none(painter, gap.word, b - a - 4)
            painter.setPen(QColor(c.ink_quiet))
            if word:
                painter.drawText(QRectF(a, 0, b - a, frame.height), Qt.AlignmentFlag.AlignCenter, word)

    def _draw_fio2(self, painter: QPainter, frame: Frame, seen: list[RibbonStep]) -> None:
        c, px = self.theme.colours, self.theme.px
        height = painter.fontMetrics().height()
        for run in _runs(seen, _fio2_of):
            word, known = run[0].fio2_word, run[0].fio2_known
            a, b = visible(frame, self.seconds(run[0].start), self.seconds(run[-1].end))
            a, b = self._clear_of_breaks(frame, a, b)
            width = painter.fontMetrics().horizontalAdvance(word)
            if not known and b - a < width + px(8):  # unknown is said in any case, if only by its sign
                word, width = "?", painter.fontMetrics().horizontalAdvance("?")
            if not word or b - a < width + px(8):
                continue
            step = run[0]
            low = float(frame.y(step.epap or 0.0))
            top = low if step.ipap is None else float(frame.y(step.ipap))
            middle = (top + low) / 2 if low - top >= height + 2 else low + height / 2 + 3
            room = QRectF(a + px(6), round(middle - height / 2), width, height)
            if not known:
                plate = room.adjusted(-px(4), 0, px(4), 0)
                painter.fillRect(plate, QColor(c.raised))
                painter.setPen(solid_pen(c.ink_quiet, 1.0))
                painter.drawRect(plate.adjusted(0.5, 0.5, -0.5, -0.5))
            painter.setPen(QColor(c.ink))
            painter.drawText(room, Qt.AlignmentFlag.AlignCenter, word)

    def _clear_of_breaks(self, frame: Frame, a: float, b: float) -> tuple[float, float]:
        """The first stretch between two pixels that no break covers; words stand on the ribbon, not in a gap."""
        for gap in self.breaks:
            low, high = visible(frame, self.seconds(gap.start), self.seconds(gap.end))
            if low <= a < high:
                a = high
            elif a < low < b:
                return a, low
        return a, b

    def _draw_modes(self, painter: QPainter, frame: Frame, seen: list[RibbonStep]) -> None:
        painter.setFont(self.theme.font(self.theme.type.caption, bold=True))
        height = painter.fontMetrics().height()
        for run in _runs(seen, _mode_of):
            a, b = visible(frame, self.seconds(run[0].start), self.seconds(run[-1].end))
            word = whole_or_none(painter, _mode_of(run[0]), b - a - self.theme.px(8))
            width = painter.fontMetrics().horizontalAdvance(word)
            under = [s for s in run if float(frame.x(self.seconds(s.start))) < a + width]
            tops = [_top(s) for s in under]
            above = max((t for t in tops if t is not None), default=0.0)
            foot = max(float(frame.y(above)) - 3, height)
            painter.setPen(QColor(self.theme.colours.ink))
            room = QRectF(a + self.theme.px(6), foot - height, width + 2, height)
            painter.drawText(room, Qt.AlignmentFlag.AlignLeft, word)

    def _draw_strip(self, painter: QPainter) -> None:
        area = self._strip_area()
        draw_ticks(painter, self.theme, area, self.ribbon.ticks, self._column)

    def _column(self, instant: int) -> float:
        return float(self.view.pos().x()) + float(self.frame().x(self.seconds(instant)))


def draw_ticks(
    painter: QPainter, theme: Theme, area: QRectF, ticks: tuple[Tick, ...], column: Callable[[int], float]
) -> None:
    """Small ticks in an area with their words at the right, or at the left where only there is room."""
    c, px = theme.colours, theme.px
    painter.setFont(theme.font(theme.type.caption))
    seen = [(tick, x) for tick in ticks if area.left() - px(160) <= (x := column(tick.at)) <= area.right()]
    for _, x in seen:
        painter.fillRect(QRectF(round(x), area.bottom() - px(10), 2, px(8)), QColor(c.ink_quiet))
    widths = [painter.fontMetrics().horizontalAdvance(tick.word) for tick, _ in seen]
    lefts = placed_beside([x for _, x in seen], widths, area.left(), area.right(), gap=px(5))
    for (tick, _), width, left in zip(seen, widths, lefts, strict=True):
        if left is not None:
            painter.setPen(QColor(c.ink_quiet if tick.doubtful else c.ink))
            room = QRectF(left, area.top(), width + 2, area.height())
            painter.drawText(room, Qt.AlignmentFlag.AlignLeft | Qt.AlignmentFlag.AlignVCenter, tick.word)


def placed_beside(
    places: Sequence[float], widths: Sequence[float], left: float, right: float, *, gap: float
) -> list[float | None]:
    """Where each tick's word begins: right of it before the next tick, else left of it behind the last word,
    else nowhere: words one over the other could be read by nobody.

    >>> placed_beside([10.0, 50.0, 60.0], [20.0, 20.0, 20.0], 0.0, 100.0, gap=5.0)
    [15.0, None, 65.0]
    >>> placed_beside([10.0, 70.0, 80.0], [20.0, 20.0, 40.0], 0.0, 100.0, gap=5.0)
    [15.0, 45.0, None]
    """
    found: list[float | None] = []
    free = left
    for n, (x, width) in enumerate(zip(places, widths, strict=True)):
        until = min(places[n + 1] if n + 1 < len(places) else right, right)
        before = places[n - 1] + gap if n else left
        at: float | None = None
        if x > right:
            found.append(None)
            continue
        if x >= left and x + gap + width <= until:
            at = x + gap
        elif x - gap - width >= max(free, before):
            at = x - gap - width
        found.append(at)
        free = max(free, x + gap) if at is None else max(at + width + gap, x + gap)
    return found


def _top(step: RibbonStep) -> float | None:
    return step.epap if step.ipap is None else step.ipap


def _fio2_of(step: RibbonStep) -> tuple[str, bool]:
    return step.fio2_word, step.fio2_known


def _mode_of(step: RibbonStep) -> str:
    return step.mode or step.word


def _runs(steps: list[RibbonStep], key: Callable[[RibbonStep], object]) -> list[list[RibbonStep]]:
    return [list(run) for _, run in groupby(steps, key)]
