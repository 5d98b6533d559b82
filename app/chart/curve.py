"""A trace of a panel: what of it is drawn as a line, what as spots, and its value at an instant."""

import numpy as np
import pyqtgraph as pg
from numpy.typing import NDArray
from PySide6.QtCore import QRectF
from PySide6.QtGui import QColor

from app.chart.doubts import Doubts
from app.chart.shapes import MICROSECONDS, Drawn, Instants, Look, Reading, Trace, Values
from core.figures.envelope import Envelope, EnvelopeSeries

_NOTHING = Envelope(np.empty(0, np.int64), np.empty(0), np.empty(0, np.bool_), np.empty(0, np.bool_), False)


class EnvelopeCurve(pg.PlotCurveItem):  # type: ignore[misc]  # pyqtgraph has no types
    """A line through the envelope of one series, in seconds since the origin.

    The pen is opaque and one pixel wide and antialiasing is off: anything else costs several times as much
    per step. The bounds are the view's own, so that no step has to look through the values for them.
    """

    def __init__(self, series: EnvelopeSeries, origin: int, pen_colour: QColor, gain: float, offset: float) -> None:
        self._series, self._origin, self._gain, self._offset = series, origin, gain, offset
        super().__init__(antialias=False, skipFiniteCheck=True, connect="all")
        self.setPen(pg.mkPen(pen_colour, width=1))
        self.shown = _NOTHING

    def show_window(self, start: int, end: int, width: int) -> None:
        """Takes what lies between two instants, for `width` pixels."""
        self.shown = seen = self._series.envelope(start, end, width)
        x = (seen.t - self._origin) / MICROSECONDS
        y = seen.v if self._gain == 1.0 and self._offset == 0.0 else seen.v * self._gain + self._offset
        joined = "all" if bool(seen.connects[:-1].all()) else seen.connects
        self.setData(x, y, connect=joined)

    def boundingRect(self) -> QRectF:
        view = self.getViewBox()
        return QRectF() if view is None else view.viewRect()

    def dataBounds(
        self,
        ax: int,  # noqa: ARG002
        frac: float = 1.0,  # noqa: ARG002
        orthoRange: object = None,  # noqa: ARG002
    ) -> tuple[None, None]:
        return None, None  # ranges are ours; nothing asks the data for them

    def use_width(self, width: float) -> None:
        """A wider pen, for pictures at more than one dot per pixel."""
        pen = pg.mkPen(self.opts["pen"])
        pen.setWidthF(width)
        self.setPen(pen)

    def lone_points(self) -> tuple[Instants, Values]:
        """Points no line shows, in the trace's own unit."""
        return self.shown.t[self.shown.lone], self.shown.v[self.shown.lone]


class DrawnTrace:
    """A trace made ready: finite values for look-up and spots, and up to two curves (sure and doubtful)."""

    def __init__(self, trace: Trace, origin: int, ink: QColor, faint: QColor, gain: float, offset: float) -> None:
        self.trace, self.ink, self.faint = trace, ink, faint
        self.gain, self.offset = gain, offset
        self.doubts = Doubts(trace.doubts)
        t, v = np.asarray(trace.t, np.int64), np.asarray(trace.v, np.float64)
        finite = np.isfinite(v)
        self.t, self.v = t[finite], v[finite]
        looks = np.zeros(len(v), np.uint8) if trace.looks is None else np.asarray(trace.looks, np.uint8)
        self.looks: NDArray[np.uint8] = looks[finite]
        self.curves = [EnvelopeCurve(series, origin, colour, gain, offset) for series, colour in self._series(t, v)]

    @property
    def spotted(self) -> bool:
        return self.trace.drawn in (Drawn.SPOTS, Drawn.SPOTS_JOINED)

    def _series(self, t: Instants, v: Values) -> list[tuple[EnvelopeSeries, QColor]]:
        trace = self.trace
        if trace.drawn is Drawn.SPOTS:
            return []
        doubtful = self.doubts.covers(t)
        if trace.drawn is Drawn.STEPS:
            t, v, doubtful = np.repeat(t, 2)[1:], np.repeat(v, 2)[:-1], np.repeat(doubtful, 2)[:-1]
        if not doubtful.any():
            return [(EnvelopeSeries(t, v, trace.gap), self.ink)]
        reach = doubtful.copy()  # one sample beyond each side: the faint line joins the sure one
        reach[:-1] |= doubtful[1:]
        reach[1:] |= doubtful[:-1]
        sure, unsure = np.where(doubtful, np.nan, v), np.where(reach, v, np.nan)
        return [(EnvelopeSeries(t, unsure, trace.gap), self.faint), (EnvelopeSeries(t, sure, trace.gap), self.ink)]

    def on_scale(self, values: Values) -> Values:
        """Values of the trace in the unit of the panel's first scale."""
        return values * self.gain + self.offset

    def spots_between(self, start: int, end: int) -> tuple[Instants, Values, NDArray[np.uint8]]:
        a, b = np.searchsorted(self.t, [start, end])
        b = int(np.searchsorted(self.t, end, side="right"))
        return self.t[a:b], self.v[a:b], self.looks[a:b]

    def last_before(self, instant: int) -> int | None:
        """Index of the last finite value at or before an instant."""
        i = int(np.searchsorted(self.t, instant, side="right")) - 1
        return None if i < 0 else i

    def reading(self, panel: str, instant: int) -> Reading | None:
        i = self.last_before(instant)
        if i is None:
            return None
        at, trace = int(self.t[i]), self.trace
        why, look = self.doubts.word_at(at), Look(int(self.looks[i]))
        return Reading(panel, trace.key, trace.name, trace.unit, trace.decimals, at, float(self.v[i]), look, why)
