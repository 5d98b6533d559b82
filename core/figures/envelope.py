"""Min/max envelope of a time series per pixel, for drawing only.

A chart 1,200 pixels wide cannot show 259,200 samples; drawing the smallest and the largest sample of
each pixel column shows everything the eye could have seen of them. Every vertex returned here is a real
sample at its own instant: nothing is averaged, shifted or invented.

Rules of the picture
- A sample that is not finite is missing. It leaves a gap between its neighbours.
- A gap is also a spacing beyond `gap_limit`. Samples on both sides of a gap are kept, so that its edges
  stand where the data end, and they are not joined.
- The first and the last sample of the series are always kept: the newest value never vanishes.
- Bins lie on a grid fixed to the epoch and not to the window, so that panning does not make a curve shimmer.
- A vertex that is joined with neither neighbour is `lone`: a line would not show it, so it needs a symbol.

Cost: a window is answered from bins folded beforehand (`m * 2**a` microseconds wide, m in 4..7), found by
bisection; a step inside the last tile costs O(pixels), whatever the length of the series.
"""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Instants = NDArray[np.int64]
Values = NDArray[np.float64]
Flags = NDArray[np.bool_]
Indices = NDArray[np.intp]

_TILES_KEPT = 4  # the last few zoom levels: going back and forth costs nothing


@dataclass(frozen=True, slots=True)
class Envelope:
    """Vertices to draw, in order of time; all arrays have the shape (vertices,).

    t         instants, int64 microseconds UTC
    v         values in the unit of the series, all finite
    connects  vertex i is joined with vertex i + 1
    lone      the vertex is joined with neither neighbour
    reduced   fewer vertices than samples in the window: the chart says so
    """

    t: Instants
    v: Values
    connects: Flags
    lone: Flags
    reduced: bool


@dataclass(frozen=True, slots=True)
class _Cells:
    """Samples grouped into bins: bin number, and indices of first, last, smallest and largest sample."""

    bin: Instants
    first: Indices
    last: Indices
    low: Indices
    high: Indices

    def part(self, start: int, stop: int) -> "_Cells":
        cut = slice(start, stop)
        return _Cells(self.bin[cut], self.first[cut], self.last[cut], self.low[cut], self.high[cut])


@dataclass(frozen=True, slots=True)
class _Tile:
    """Finished vertices of one bin width over a stretch of time."""

    start: int
    end: int
    t: Instants
    v: Values
    connects: Flags
    lone: Flags


def bin_width(start: int, end: int, width: int) -> int:
    """Bin width in microseconds for a window drawn `width` pixels wide: the largest m * 2**a (m in 4..7)
    that is not wider than a pixel, at least 1.

    Rounding the width down to this grid keeps it the same over a whole pan and lets coarse bins be folded
    from fine ones; a pixel holds between 1 and 1.25 bins.

    >>> bin_width(0, 72 * 3600 * 1_000_000, 1280)
    201326592
    >>> bin_width(0, 10, 100)
    1
    """
    if end <= start:
        raise ValueError(f"window from {start} to {end}: the end must lie after the start")
    if width < 1:
        raise ValueError(f"width of {width} pixels: at least 1 is accepted")
    pixel = max((end - start) // width, 1)
    exponent = max(pixel.bit_length() - 3, 0)
    return (pixel >> exponent) << exponent


class EnvelopeSeries:
    """One series prepared for drawing at any zoom.

    t          int64 microseconds UTC, shape (n,), never falling
    v          float64, shape (n,); what is not finite is missing
    gap_limit  the largest spacing in microseconds that is still joined by a line; None joins all

    Raises ValueError where shapes differ, t falls, or gap_limit is below 1.

    >>> series = EnvelopeSeries([0, 1, 2, 30], [1.0, 5.0, 2.0, 4.0], gap_limit=10)
    >>> seen = series.envelope(0, 40, 100)
    >>> seen.v.tolist(), seen.connects.tolist(), seen.lone.tolist()
    ([1.0, 5.0, 2.0, 4.0], [True, True, False, False], [False, False, False, True])
    """

    def __init__(self, t: object, v: object, gap_limit: int | None = None) -> None:
        times = np.ascontiguousarray(t, dtype=np.int64)
        values = np.ascontiguousarray(v, dtype=np.float64)
        if times.ndim != 1 or times.shape != values.shape:
            shapes = f"t has shape {times.shape}, v {values.shape}"
            raise ValueError(f"{shapes}: two equal one-dimensional arrays are accepted")
        if gap_limit is not None and gap_limit < 1:
            raise ValueError(f"gap_limit of {gap_limit} microseconds: at least 1 is accepted")
        if len(times) > 1 and bool(np.any(times[1:] < times[:-1])):
            at = int(np.flatnonzero(times[1:] < times[:-1])[0]) + 1
            raise ValueError(f"t falls at sample {at}: instants in rising order are accepted")
        self._t, self._v, self._broken = _without_missing(times, values, gap_limit)
        self._levels: dict[int, _Cells] = {}
        self._tiles: dict[int, _Tile] = {}
        self._base = self._finest_level()

    def __len__(self) -> int:
        """Number of samples that are not missing."""
        return len(self._t)

    def envelope(self, start: int, end: int, width: int) -> Envelope:
        """Vertices of the window from `start` to `end` (microseconds) drawn `width` pixels wide, with one
        more vertex on each side, so that lines enter and leave the picture."""
        width_of_bin = bin_width(start, end, width)
        first, stop = self._span(start, end)
        count = stop - first
        if count <= 2 * width:  # as many samples as min/max would give: draw the samples themselves
            cut_after = self._broken[first + 1 : stop + 1]
            lone = self._broken[first:stop] & cut_after
            return Envelope(self._t[first:stop], self._v[first:stop], ~cut_after, lone, False)
        tile = self._tile(start, end, width_of_bin)
        a = max(int(np.searchsorted(tile.t, start, side="left")) - 1, 0)
        b = min(int(np.searchsorted(tile.t, end, side="right")) + 1, len(tile.t))
        return Envelope(tile.t[a:b], tile.v[a:b], tile.connects[a:b], tile.lone[a:b], b - a < count)

    def _span(self, start: int, end: int) -> tuple[int, int]:
        first = max(int(np.searchsorted(self._t, start, side="left")) - 1, 0)
        return first, min(int(np.searchsorted(self._t, end, side="right")) + 1, len(self._t))

    def _tile(self, start: int, end: int, width_of_bin: int) -> _Tile:
        known = self._tiles.get(width_of_bin)
        if known is not None and known.start <= start and end <= known.end:
            return known
        span = end - start  # one window to spare on each side: the next steps of a pan are ready
        tile = self._make_tile(start - span, end + span, width_of_bin)
        self._tiles.pop(width_of_bin, None)
        self._tiles[width_of_bin] = tile
        if len(self._tiles) > _TILES_KEPT:
            del self._tiles[next(iter(self._tiles))]
        return tile

    def _make_tile(self, start: int, end: int, width_of_bin: int) -> _Tile:
        first, stop = self._span(start, end)
        # Whole bins only, and one more bin on each side: the neighbour of the window's edge may lie there.
        first = self._bin_start(max(self._bin_start(first, width_of_bin) - 1, 0), width_of_bin)
        stop = self._bin_stop(min(self._bin_stop(stop - 1, width_of_bin), len(self._t) - 1), width_of_bin)
        cells = self._cells(first, stop, width_of_bin)
        picked, ends_cell = _vertices(cells, self._broken)
        connects = np.ones(len(picked), dtype=np.bool_)
        connects[ends_cell] = ~self._broken[cells.last + 1]
        before = np.concatenate(([not self._broken[cells.first[0]]], connects[:-1]))
        return _Tile(start, end, self._t[picked], self._v[picked], connects, ~connects & ~before)

    def _bin_start(self, sample: int, width_of_bin: int) -> int:
        edge = int(self._t[sample]) // width_of_bin * width_of_bin
        return int(np.searchsorted(self._t, edge, side="left"))

    def _bin_stop(self, sample: int, width_of_bin: int) -> int:
        edge = (int(self._t[sample]) // width_of_bin + 1) * width_of_bin
        return int(np.searchsorted(self._t, edge, side="left"))

    def _cells(self, first: int, stop: int, width_of_bin: int) -> _Cells:
        exponent = width_of_bin.bit_length() - 3
        if exponent < self._base:
            every = np.arange(first, stop, dtype=np.intp)
            return _fold(_Cells(self._t[first:stop] // width_of_bin, every, every, every, every), self._v)
        level = self._level(exponent)
        a = int(np.searchsorted(level.first, first, side="left"))
        b = int(np.searchsorted(level.first, stop, side="left"))
        fine = level.part(a, b)
        factor = width_of_bin >> exponent
        return _fold(_Cells(fine.bin // factor, fine.first, fine.last, fine.low, fine.high), self._v)

    def _finest_level(self) -> int:
        """Exponent of the finest level worth keeping: about four samples in a bin."""
        if len(self._t) < 2:
            return 62
        spacing = max(int(self._t[-1] - self._t[0]) // (len(self._t) - 1), 1)
        return (4 * spacing).bit_length()

    def _level(self, exponent: int) -> _Cells:
        level = self._levels.get(exponent)
        if level is not None:
            return level
        if exponent <= self._base:
            every = np.arange(len(self._t), dtype=np.intp)
            level = _fold(_Cells(self._t >> exponent, every, every, every, every), self._v)
        else:
            finer = self._level(exponent - 1)
            level = _fold(_Cells(finer.bin >> 1, finer.first, finer.last, finer.low, finer.high), self._v)
        self._levels[exponent] = level
        return level


def _without_missing(t: Instants, v: Values, gap_limit: int | None) -> tuple[Instants, Values, Flags]:
    """Samples that are finite, and `broken` of shape (n + 1,): no line runs between sample i - 1 and i."""
    kept = np.flatnonzero(np.isfinite(v))
    t, v = t[kept], v[kept]
    broken = np.ones(len(kept) + 1, dtype=np.bool_)
    if len(kept) > 1:
        broken[1:-1] = np.diff(kept) > 1
        if gap_limit is not None:
            broken[1:-1] |= np.diff(t) > gap_limit
    return t, v, broken


def _fold(cells: _Cells, v: Values) -> _Cells:
    """Joins neighbouring cells of one bin number; of equal extremes the earliest stays."""
    starts = np.concatenate(([0], np.flatnonzero(cells.bin[1:] != cells.bin[:-1]) + 1))
    ends = np.concatenate((starts[1:], [len(cells.bin)])) - 1
    sizes = ends - starts + 1
    return _Cells(
        cells.bin[starts],
        cells.first[starts],
        cells.last[ends],
        _earliest(cells.low, v[cells.low], np.minimum, starts, sizes),
        _earliest(cells.high, v[cells.high], np.maximum, starts, sizes),
    )


def _earliest(indices: Indices, values: Values, extreme: np.ufunc, starts: Indices, sizes: Indices) -> Indices:
    best = extreme.reduceat(values, starts)
    hits = np.flatnonzero(values == np.repeat(best, sizes))
    return indices[hits[np.searchsorted(hits, starts)]]


def _vertices(cells: _Cells, broken: Flags) -> tuple[Indices, Indices]:
    """Samples to draw of each cell in order of time, and the position of each cell's last one."""
    early, late = np.minimum(cells.low, cells.high), np.maximum(cells.low, cells.high)
    rows = np.empty((len(cells.bin), 4), dtype=np.intp)
    rows[:, 0] = np.where(broken[cells.first], cells.first, early)
    rows[:, 1] = early
    rows[:, 2] = late
    rows[:, 3] = np.where(broken[cells.last + 1], cells.last, late)
    keep = np.ones(rows.shape, dtype=np.bool_)
    keep[:, 1:] = rows[:, 1:] != rows[:, :-1]
    return rows[keep], np.cumsum(keep.sum(axis=1)) - 1
