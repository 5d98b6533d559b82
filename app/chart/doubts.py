"""Stretches in which a trace is uncertain, ready to be asked for many instants at once.

A leak that is noted every second crosses its limit thousands of times in a night: nothing here may look through
all stretches for one value or one repaint.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence

import numpy as np
from numpy.typing import NDArray

from app.chart.shapes import Instants, Span


class Doubts:
    """Spans, which may overlap, each with its reason; a span holds its start and not its end.

    >>> doubts = Doubts([Span(10, 20, "leak"), Span(15, 18, "mask off"), Span(21, 30, "leak")])
    >>> doubts.covers(np.array([9, 10, 20, 29])).tolist()
    [False, True, False, True]
    >>> doubts.word_at(16), doubts.word_at(20)
    ('mask off', '')
    >>> list(doubts.between(0, 100, joined=1))
    [(10, 30)]
    """

    def __init__(self, spans: Sequence[Span]) -> None:
        self._spans = sorted(spans, key=lambda s: s.start)
        self._starts = np.array([s.start for s in self._spans], np.int64)
        ends = np.array([s.end for s in self._spans], np.int64)
        self._reach = np.maximum.accumulate(ends) if len(ends) else ends  # the latest end so far

    def __bool__(self) -> bool:
        return bool(self._spans)

    def covers(self, t: Instants) -> NDArray[np.bool_]:
        """Which of some instants lie in a span."""
        if not self._spans:
            return np.zeros(len(t), np.bool_)
        last = np.searchsorted(self._starts, t, side="right") - 1
        return (last >= 0) & (t < self._reach[np.maximum(last, 0)])

    def word_at(self, at: int) -> str:
        """The reason at an instant, of the span that began last; empty where none holds it."""
        i = int(np.searchsorted(self._starts, at, side="right")) - 1
        while i >= 0 and self._reach[i] > at:
            if self._spans[i].end > at:
                return self._spans[i].word
            i -= 1
        return ""

    def between(self, start: int, end: int, *, joined: int) -> Iterator[tuple[int, int]]:
        """What is covered between two instants; stretches at most `joined` apart are told as one."""
        a = int(np.searchsorted(self._reach, start, side="right"))
        b = int(np.searchsorted(self._starts, end, side="left"))
        if a >= b:
            return
        breaks = np.flatnonzero(self._starts[a + 1 : b] - self._reach[a : b - 1] > joined) + a + 1
        firsts, nexts = np.concatenate(([a], breaks)), np.concatenate((breaks, [b]))
        for first, following in zip(firsts, nexts, strict=True):
            yield int(self._starts[first]), int(self._reach[following - 1])
