"""Medians of a device channel per quarter of an hour: breath noise averages out, and a slope stays cheap."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from core.record.instant import Instant
from core.record.samples import Times, Values


@dataclass(frozen=True, slots=True)
class Medians:
    """One value per bin that holds samples, shapes (n,): bin number, first and last sample, mean time, median."""

    bin: Times
    first: Times
    last: Times
    t: Times
    v: Values


def medians(t: Times, v: Values, span: Instant) -> Medians:
    """The median of each bin of `span` microseconds since 1970. NaN are left out; `t` in order of time.

    >>> m = medians(np.array([0, 1, 2, 10, 11]), np.array([3.0, 1.0, 2.0, 5.0, 7.0]), 10)
    >>> m.v.tolist(), m.t.tolist()
    ([2.0, 6.0], [1, 10])
    """
    known = np.isfinite(v)
    if not known.all():
        t, v = t[known], v[known]
    bins = t // span
    if not bins.size:
        return Medians(bins, t, t, t, v)
    starts = np.flatnonzero(np.concatenate(([True], np.diff(bins) > 0)))
    ends = np.concatenate((starts[1:], [bins.size]))
    size = ends - starts
    middle = _middles(v, bins, starts, size)
    offset = np.add.reduceat(t - t[0], starts) // size  # relative to the first: sums of instants would overflow
    return Medians(bins[starts], t[starts], t[ends - 1], t[0] + offset, middle)


def with_newest(bins: Medians, t: Times, v: Values, span: Instant, not_before: Instant = 0) -> Medians:
    """The same, its last bin taken as the last `span` up to the newest sample, from `not_before` on.

    A bin that has just begun would give the median of a breath or two as the newest value of all.

    >>> t, v = np.arange(0, 21, 2), np.array([1.0] * 10 + [9.0])
    >>> with_newest(medians(t, v, 10), t, v, 10).v.tolist(), medians(t, v, 10).v.tolist()
    ([1.0, 1.0, 1.0], [1.0, 1.0, 9.0])
    """
    known = np.isfinite(v)
    t, v = t[known], v[known]
    if not t.size:
        return bins
    i = int(np.searchsorted(t, max(int(t[-1]) - span + 1, not_before)))
    mean = int(t[i]) + int((t[i:] - t[i]).sum()) // (t.size - i)
    newest = (t[-1] // span, t[i], t[-1], mean, _middle(v[i:]))
    older = (bins.bin, bins.first, bins.last, bins.t, bins.v)
    return Medians(*(np.concatenate((old[:-1], [new])) for old, new in zip(older, newest, strict=True)))


def _middles(v: Values, bins: Times, starts: Times, size: Times) -> Values:
    """The median of each bin. Bins of one size, as a device writes them, are sorted as the rows of a table."""
    inner = size[1:-1]
    if inner.size and bool((inner == inner[0]).all()):
        k = int(inner[0])
        rows = np.sort(v[starts[1] : starts[-1]].reshape(-1, k), axis=1)
        middle = (rows[:, (k - 1) // 2] + rows[:, k // 2]) / 2.0
        return np.concatenate(([_middle(v[: starts[1]])], middle, [_middle(v[starts[-1] :])]))
    ordered = v[np.lexsort((v, bins))]
    return np.asarray((ordered[starts + (size - 1) // 2] + ordered[starts + size // 2]) / 2.0)


def _middle(v: Values) -> float:
    """The median of a few values: sorting them costs a third of numpy's general median."""
    ordered = np.sort(v)
    return float((ordered[(v.size - 1) // 2] + ordered[v.size // 2]) / 2.0)
