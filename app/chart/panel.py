"""A panel: a few traces over one or two scales, with bands, doubt and response brackets."""

from collections.abc import Sequence

import numpy as np
from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QColor, QPainter, QPolygonF
from PySide6.QtWidgets import QGraphicsItem

from app.chart.brackets import BracketStrip
from app.chart.curve import DrawnTrace
from app.chart.end_labels import EndLabel, draw_end_labels, label_width
from app.chart.marks import hatch, solid_pen, spot
from app.chart.panel_header import PanelHeader
from app.chart.row import ClockRow, Margins, RowItem, visible
from app.chart.shapes import Area, Look, PanelSpec, Reading, Scale
from app.chart.time_ticks import ClockMark
from app.chart.value_ticks import value_ticks, value_word
from app.look.theme import Theme, blend

_AIR = 0.04  # share of the range left free above and below, so that marks at its ends are whole


class PanelRow(ClockRow):
    """One PanelSpec on the stack's clock.

    Traces in the first scale's unit are read at the left; those in the second's are normalised to the same
    height and read at the right, where the unit stands over its own figures.
    """

    # pyqtgraph asks for sizes before these are made
    brackets: BracketStrip | None = None
    header: PanelHeader | None = None
    window: tuple[int, int] = (0, 1)

    def __init__(self, spec: PanelSpec, theme: Theme, origin: int, item: RowItem) -> None:
        super().__init__(spec.title, theme, origin, item)
        self.spec, self.pen_scale = spec, 1.0
        first = spec.scales[0]
        air = (first.high - first.low) * _AIR
        self.view.setYRange(first.low - air, first.high + air, padding=0)
        self.traces = [self._drawn(i) for i in range(len(spec.traces))]
        for drawn in self.traces:
            for curve in drawn.curves:
                self.view.addItem(curve, ignoreBounds=True)
        self.brackets = BracketStrip(self, spec.brackets) if spec.brackets else None
        self.header = PanelHeader(self, spec)

    def _drawn(self, place: int) -> DrawnTrace:
        trace, c = self.spec.traces[place], self.theme.colours
        ink = self.theme.channel(place if trace.ink is None else trace.ink)
        gain, offset = self._to_first(self._scale(trace.unit))
        return DrawnTrace(trace, self.origin, ink, blend(ink.name(), c.raised, 0.5), gain, offset)

    def _scale(self, unit: str) -> Scale:
        return next(scale for scale in self.spec.scales if scale.unit == unit)

    def _to_first(self, scale: Scale) -> tuple[float, float]:
        first = self.spec.scales[0]
        if scale is first:
            return 1.0, 0.0
        gain = (first.high - first.low) / (scale.high - scale.low)
        return gain, first.low - scale.low * gain

    def leave(self) -> None:
        for drawn in self.traces:
            for curve in drawn.curves:
                self.view.removeItem(curve)
        super().leave()

    def layers(self) -> list[QGraphicsItem]:
        strips = [strip.layer for strip in (self.brackets, self.header) if strip is not None]
        return [*super().layers(), *strips]

    # sizes

    def top_height(self) -> int:
        strip = self.brackets.height() if self.brackets else 0
        return super().top_height() + strip

    def left_wanted(self) -> int:
        return self._axis_width(self.spec.scales[0])

    def axis_right_wanted(self) -> int:
        return self._axis_width(self.spec.scales[1]) if len(self.spec.scales) > 1 else 0

    def _axis_width(self, scale: Scale) -> int:
        widest = max((value_word(v, scale.decimals) for v in (scale.low, scale.high)), key=len)
        metrics = self.metrics()
        width = max(metrics.horizontalAdvance(word) for word in (widest + "0", scale.unit))
        return round(width) + self.theme.px(16)

    def _own_axis(self) -> int:
        """Pixels the second scale takes; a row without one has its labels at the view's very edge."""
        return self.margins.axis_right if len(self.spec.scales) > 1 else 0

    def gutter_wanted(self) -> int:
        return max((label_width(self.theme, d.trace) for d in self.traces), default=0)

    def set_margins(self, margins: Margins) -> None:
        super().set_margins(margins)
        self._strips_resized()

    def _strips_resized(self) -> None:
        for strip in (self.brackets, self.header):
            if strip is not None:
                strip.layer.resized()

    def _view_resized(self, _view: object = None) -> None:
        super()._view_resized(_view)
        self._strips_resized()

    # the clock

    def show_window(self, start: int, end: int, marks: Sequence[ClockMark]) -> None:
        super().show_window(start, end, marks)
        self.window = (start, end)
        width = max(round(self.view.rect().width() * self.pen_scale), 1)
        for drawn in self.traces:
            for curve in drawn.curves:
                curve.show_window(start, end, width)
        self.gutter.update()
        for strip in (self.brackets, self.header):
            if strip is not None:
                strip.layer.update()

    def use_pen_scale(self, scale: float) -> None:
        """Draws at `scale` dots per pixel: finer envelope, pens as wide as they look on the screen."""
        self.pen_scale = scale
        for drawn in self.traces:
            for curve in drawn.curves:
                curve.use_width(scale)

    @property
    def reduced(self) -> bool:
        return any(curve.shown.reduced for drawn in self.traces for curve in drawn.curves)

    def readings(self, instant: int) -> tuple[Reading, ...]:
        found = (drawn.reading(self.spec.key, instant) for drawn in self.traces)
        return tuple(r for r in found if r is not None)

    # drawing

    def _draw_card(self, painter: QPainter) -> None:
        super()._draw_card(painter)
        self._draw_axis(painter, self.spec.scales[0], right=False)
        if len(self.spec.scales) > 1:
            self._draw_axis(painter, self.spec.scales[1], right=True)

    def _ticks(self, scale: Scale) -> list[tuple[float, str]]:
        """Heights in the view's pixels, and figures."""
        frame = self.frame()
        values, decimals = value_ticks(scale.low, scale.high, frame.height, self.theme.px(26))
        gain, offset = self._to_first(scale)
        return [(float(frame.y(v * gain + offset)), value_word(v, max(decimals, scale.decimals))) for v in values]

    def _draw_axis(self, painter: QPainter, scale: Scale, *, right: bool) -> None:
        c, theme = self.theme.colours, self.theme
        top, whole, pad = self.view.pos().y(), self.item.rect(), theme.px(8)
        edge = whole.width() - self.margins.right
        x, width = (edge + pad, self.margins.axis_right) if right else (0.0, self.margins.left - pad)
        side = Qt.AlignmentFlag.AlignLeft if right else Qt.AlignmentFlag.AlignRight
        painter.setFont(theme.font(theme.type.caption))
        painter.setPen(QColor(c.ink_quiet))
        for y, word in self._ticks(scale):
            painter.drawText(QRectF(x, round(top + y) - 12, width, 24), side | Qt.AlignmentFlag.AlignVCenter, word)
            if right:
                painter.fillRect(QRectF(round(edge), round(top + y), theme.px(4), 1), QColor(c.edge))
        if len(self.spec.scales) > 1 or scale.unit not in {trace.name for trace in self.spec.traces}:
            heading = QRectF(x, 0, width, theme.px(28))
            painter.drawText(heading, side | Qt.AlignmentFlag.AlignVCenter, scale.unit)

    def _draw_back(self, painter: QPainter) -> None:
        self._draw_bands(painter)
        self.draw_breaks(painter)
        if self.brackets:
            self.brackets.draw_windows(painter)
        self._draw_value_lines(painter)
        self.draw_clock_lines(painter)
        for area in self.spec.areas:
            self._draw_area(painter, area)
        for drawn in self.traces:
            self._draw_doubt(painter, drawn)

    def _draw_value_lines(self, painter: QPainter) -> None:
        frame = self.frame()
        for y, _ in self._ticks(self.spec.scales[0]):
            painter.fillRect(QRectF(0, round(y), frame.width, 1), QColor(self.theme.colours.line))

    def _draw_bands(self, painter: QPainter) -> None:
        frame, c = self.frame(), self.theme.colours
        for band in self.spec.bands:
            gain, offset = self._to_first(self._scale(band.unit))
            top, foot = (float(np.clip(frame.y(v * gain + offset), 0, frame.height)) for v in (band.high, band.low))
            painter.fillRect(QRectF(0, top, frame.width, foot - top), QColor(c.target))

    def _draw_area(self, painter: QPainter, area: Area) -> None:
        frame, c = self.frame(), self.theme.colours
        gain, offset = self._to_first(self._scale(area.unit))
        x = frame.x(self.seconds(np.asarray(area.t)))
        low, high = (frame.y(np.asarray(v) * gain + offset) for v in (area.low, area.high))
        whole = np.isfinite(low) & np.isfinite(high)
        painter.save()
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        for run in np.split(np.arange(len(x)), np.flatnonzero(~whole)):
            run = run[whole[run]]
            if len(run) < 2 or x[run[-1]] < 0 or x[run[0]] > frame.width:
                continue
            edges = [QPointF(a, b) for a, b in zip(x[run], high[run], strict=True)]
            feet = [QPointF(a, b) for a, b in zip(x[run], low[run], strict=True)]
            painter.setPen(Qt.PenStyle.NoPen)
            painter.setBrush(self.theme.colour("ink_quiet", 0.12))
            painter.drawPolygon(QPolygonF(edges + feet[::-1]))
            pen = solid_pen(c.ink_quiet, 1.0)
            pen.setDashPattern([3, 3])
            painter.setPen(pen)
            painter.drawPolyline(QPolygonF(edges))
            painter.drawPolyline(QPolygonF(feet))
        painter.restore()

    def _draw_doubt(self, painter: QPainter, drawn: DrawnTrace) -> None:
        frame, ink = self.frame(), hatch(self.theme.colour("edge", 0.45))
        start, end = self.window
        for first, last in drawn.doubts.between(start, end, joined=round((end - start) / frame.width)):
            a, b = visible(frame, self.seconds(first), self.seconds(last))
            painter.fillRect(QRectF(a, 0, max(b - a, 1), frame.height), ink)

    def _draw_front(self, painter: QPainter) -> None:
        painter.save()
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        for drawn in self.traces:
            if drawn.spotted:
                t, v, looks = drawn.spots_between(*self.window)
                self._draw_spots(painter, drawn, t, drawn.on_scale(v), looks, self.theme.px(8))
            else:
                for curve in drawn.curves:
                    t, v = curve.lone_points()
                    fresh = np.zeros(len(t), np.uint8)
                    self._draw_spots(painter, drawn, t, drawn.on_scale(v), fresh, self.theme.px(5))
            self._draw_off_scale(painter, drawn)
        painter.restore()
        self.draw_now(painter)

    def _draw_spots(
        self, painter: QPainter, drawn: DrawnTrace, t: np.ndarray, v: np.ndarray, looks: np.ndarray, size: float
    ) -> None:
        frame, ground = self.frame(), QColor(self.theme.colours.raised)
        for x, y, look in zip(frame.x(self.seconds(t)), frame.y(v), looks, strict=True):
            if 0 <= y <= frame.height:
                spot(painter, drawn.ink, ground, Look(int(look)), float(x), float(y), size)

    def _draw_off_scale(self, painter: QPainter, drawn: DrawnTrace) -> None:
        """Carets at the edge where values lie beyond the range: what is not in sight is not left out."""
        frame, half = self.frame(), self.theme.px(5)
        if drawn.spotted:
            t, v, _ = drawn.spots_between(*self.window)
        else:
            t = np.concatenate([curve.shown.t for curve in drawn.curves])
            v = np.concatenate([curve.shown.v for curve in drawn.curves])
        y = frame.y(drawn.on_scale(v))
        painter.setPen(Qt.PenStyle.NoPen)
        painter.setBrush(drawn.ink)
        for beyond, edge, way in ((y < 0, 1.0, 1), (y > frame.height, frame.height - 1.0, -1)):
            last = -np.inf
            for x in np.sort(frame.x(self.seconds(t[beyond]))):
                if x - last >= 3 * half:  # one caret for a run of them
                    last = float(x)
                    feet = [QPointF(last - half, edge + way * half), QPointF(last + half, edge + way * half)]
                    painter.drawPolygon(QPolygonF([QPointF(last, edge), *feet]))

    def _draw_gutter(self, painter: QPainter) -> None:
        frame = self.frame()
        labels = []
        for drawn in self.traces:
            end = self.window[1] if self.crossed is None else self.origin + round(self.crossed * 1e6)
            i = drawn.last_before(end)
            y = None if i is None else float(frame.y(drawn.on_scale(drawn.v[i : i + 1]))[0])
            word = ""
            if self.crossed is not None:
                word = "\u2013" if i is None else value_word(float(drawn.v[i]), drawn.trace.decimals)
            labels.append(EndLabel(drawn.trace, drawn.ink, drawn.spotted, y, word))
        left = self.view.pos().x() + frame.width + self._own_axis()
        area = QRectF(left, self.view.pos().y(), self.item.rect().right() - left, frame.height)
        draw_end_labels(painter, self.theme, area, labels)

    def picked(self, at: QPointF) -> object | None:
        return self.brackets.at(at.x()) if self.brackets else None
