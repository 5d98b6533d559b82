"""Breaks that nobody logged: leak at the device's ceiling, or no breath, for three minutes (rules 6.14)."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from core.judgement.context import Context
from core.record.episode import Series
from core.record.instant import MINUTE, Instant
from core.record.samples import Flags, Times
from core.record.support import Break

_GAP = 2 * MINUTE
"""Samples further apart than this do not make one run."""
_NO_BREATH = ("rr_total", "vte", "mv")


def probable_breaks(ctx: Context) -> tuple[Break, ...]:
    """The unlogged breaks that device values suggest, by time; those that touch a logged break are left out.

    No leak flag and no tidal volume counts in them; the window asks what happened.
    """
    rules = ctx.policy.leak
    least = int(rules.no_breath_min.value * MINUTE)
    leak = ctx.episode.number("leak").machine
    found = _runs(leak, leak.v >= rules.device_ceiling_L_per_min.value, least)
    for channel in _NO_BREATH:
        series = ctx.episode.number(channel).machine
        found += _runs(series, series.v <= 0, least)
    return tuple(b for b in _merged(found) if _unlogged(ctx, b))


def in_any(times: Times, breaks: Sequence[Break]) -> Flags:
    """Whether each time lies in one of the breaks, shape (n,) to (n,)."""
    inside = np.zeros(times.shape, np.bool_)
    for b in breaks:
        inside |= (times >= b.start) & (times < (b.end if b.end is not None else np.iinfo(np.int64).max))
    return inside


def _runs(series: Series, hit: Flags, least: Instant) -> list[Break]:
    """Runs of hits that last at least `least`, from the first hit to the next sample that is none."""
    if not hit.any():
        return []
    t = series.t
    joined = np.concatenate(([False], hit[:-1] & (np.diff(t) <= _GAP)))
    starts = np.flatnonzero(hit & ~joined)
    lasts = np.flatnonzero(hit & ~np.concatenate((hit[1:] & joined[1:], [False])))
    runs: list[Break] = []
    for a, b in zip(starts.tolist(), lasts.tolist(), strict=True):
        last = b == t.size - 1
        end = None if last else int(min(t[b + 1], t[b] + _GAP))
        length = (int(t[b]) + MINUTE if end is None else end) - int(t[a])
        if length >= least:
            runs.append(Break(int(t[a]), end))
    return runs


def _merged(breaks: list[Break]) -> list[Break]:
    out: list[Break] = []
    for b in sorted(breaks, key=lambda b: b.start):
        if out and (out[-1].end is None or b.start <= out[-1].end):
            end = None if out[-1].end is None or b.end is None else max(out[-1].end, b.end)
            out[-1] = Break(out[-1].start, end)
        else:
            out.append(b)
    return out


def _unlogged(ctx: Context, b: Break) -> bool:
    start, end = ctx.support.start, ctx.support.end
    if start is None or (b.end is not None and b.end <= start) or (end is not None and b.start >= end):
        return False
    last = b.end if b.end is not None else ctx.as_of
    return not any(k.start <= last and (k.end is None or b.start <= k.end) for k in ctx.support.breaks)
