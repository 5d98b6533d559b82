"""A crossing counts only when it lasts: N of the last M minutes past a limit, with hysteresis to end it."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from core.record.instant import MINUTE, Instant
from core.record.samples import Flags, Times, Values


@dataclass(frozen=True, slots=True)
class Spell:
    """A sustained crossing. `known_at` is when it was first certain (N of M minutes); `end` None while it goes
    on; `minutes` counts those past the limit."""

    start: Instant
    known_at: Instant
    end: Instant | None
    minutes: int


def spells(t: Times, v: Values, limit: float | Values, n: int, m: int, *, below: bool = False) -> tuple[Spell, ...]:
    """The sustained crossings of `limit` (one number, or one per sample), shapes (k,).

    A spell begins once `n` of the last `m` minutes are past the limit, and is dated from the first of these; it
    ends once at most `m - n` of the last `m` are. A minute is past when at least half of its samples are; a
    minute without samples is not past.

    >>> t = np.arange(30) * MINUTE
    >>> v = np.where((t >= 5 * MINUTE) & (t < 20 * MINUTE), 40.0, 10.0)
    >>> [(s.start // MINUTE, s.known_at // MINUTE, s.end // MINUTE) for s in spells(t, v, 30.0, 10, 12)]
    [(5, 14, 20)]
    """
    known = np.isfinite(v)
    over = (v < limit) if below else (v > limit)
    first, past = _minutes_past(t[known], over[known])
    if not past.any():
        return ()
    total: Times = np.concatenate((np.zeros(m, np.int64), np.cumsum(past, dtype=np.int64)))
    count: Times = total[m:] - total[:-m]
    on = _held(count >= n, count <= m - n)
    edges = np.flatnonzero(np.diff(np.concatenate(([False], on, [False])).astype(np.int8)))
    return tuple(_spell(first, past, int(a), int(b), m) for a, b in edges.reshape(-1, 2))


def _minutes_past(t: Times, over: Flags) -> tuple[int, Flags]:
    """The first minute, and for each minute from it whether at least half of its samples are past the limit."""
    if not t.size:
        return 0, np.zeros(0, np.bool_)
    minutes = t // MINUTE
    first = int(minutes[0])
    index = minutes - first
    size = int(index[-1]) + 1
    samples = np.bincount(index, minlength=size)
    past = np.bincount(index, weights=over.astype(np.float64), minlength=size)
    return first, (past * 2 >= samples) & (samples > 0) & (past > 0)


def _held(on: Flags, off: Flags) -> Flags:
    """True from a minute that switches on until one that switches off."""
    events = np.where(on, 1, np.where(off, 0, -1))
    last = np.maximum.accumulate(np.where(events >= 0, np.arange(events.size), -1))
    return np.asarray((last >= 0) & (events[np.maximum(last, 0)] == 1))


def _spell(first: int, past: Flags, a: int, b: int, m: int) -> Spell:
    low = max(0, a - m + 1)
    start = low + int(np.argmax(past[low : a + 1]))
    last = start + int(np.flatnonzero(past[start:b])[-1])
    end = None if b == past.size else (first + last + 1) * MINUTE
    return Spell((first + start) * MINUTE, (first + a) * MINUTE, end, int(past[start : last + 1].sum()))
