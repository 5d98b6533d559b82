"""Device samples on their way from a file to the store: gathered per episode and channel, in bounded memory."""

from __future__ import annotations

import zlib
from collections.abc import Iterator
from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

from core.record.channels import Channel
from core.record.instant import HOUR, Instant
from core.record.samples import Times, Values
from storage.chunks import Block, decode, hour_blocks

Lines = NDArray[np.int32]
_PENDING = 2_000_000
"""Samples held as plain arrays (20 bytes each) before they are packed."""


@dataclass(slots=True)
class _Series:
    """One channel of one episode. `packed` holds what was compressed early, hour by hour, with its lines."""

    t: list[Times] = field(default_factory=list)
    v: list[Values] = field(default_factory=list)
    lines: list[Lines] = field(default_factory=list)
    decimals: int = 0
    packed: dict[int, list[tuple[Block, bytes]]] = field(default_factory=dict)

    def in_order(self) -> tuple[Times, Values, Lines]:
        """What is held as plain arrays, by time; rows of one time in order of lines."""
        if not self.t:
            return np.empty(0, np.int64), np.empty(0), np.empty(0, np.int32)
        t, v, lines = np.concatenate(self.t), np.concatenate(self.v), np.concatenate(self.lines)
        if not (t[1:] > t[:-1]).all():
            order = np.lexsort((lines, t))
            t, v, lines = t[order], v[order], lines[order]
        return t, v, lines

    def clear(self) -> None:
        """Forget the plain arrays."""
        self.t, self.v, self.lines = [], [], []


@dataclass(frozen=True, slots=True)
class Repeated:
    """A sample that stands twice in the file: its lines, and which."""

    line: int
    first_line: int
    episode: str
    channel: str
    at: Instant


@dataclass(slots=True)
class LeakUse:
    """From when to when a file's leak rows of an episode say one definition."""

    first: Instant
    last: Instant
    line: int


class SampleSpool:
    """Gathers samples; `blocks` gives them hour by hour, `repeated` those that stand twice."""

    def __init__(self) -> None:
        self._series: dict[tuple[str, str], _Series] = {}
        self._pending = 0
        self.repeated: list[Repeated] = []
        self.leak_uses: dict[tuple[str, str], LeakUse] = {}
        self.units: dict[str, set[str]] = {}

    def add(
        self, episode: str, channel: Channel, unit: str, definition: str, t: Times, v: Values, lines: Lines,
        decimals: int,
    ) -> None:  # fmt: skip
        """Add samples of one episode and channel, in any order."""
        series = self._series.setdefault((episode, channel.key), _Series())
        series.t.append(t)
        series.v.append(v)
        series.lines.append(lines)
        series.decimals = max(series.decimals, decimals)
        self.units.setdefault(channel.key, set()).add(unit)
        if definition and channel.key == "leak":
            self.note_leak(episode, definition, int(t.min()), int(t.max()), int(lines[np.argmin(t)]))
        self._pending += t.size
        if self._pending > _PENDING:
            self._pack()

    def note_leak(self, episode: str, definition: str, first: Instant, last: Instant, line: int) -> None:
        """Note what a leak row says of how leak is defined."""
        use = self.leak_uses.get((episode, definition))
        if use is None:
            self.leak_uses[(episode, definition)] = LeakUse(first, last, line)
            return
        if (first, line) < (use.first, use.line):
            use.first, use.line = first, line
        use.last = max(use.last, last)

    def kinds(self) -> list[tuple[str, str]]:
        """The (episode, channel) pairs with samples."""
        return list(self._series)

    def _pack(self) -> None:
        for key, series in self._series.items():
            t, v, lines = self._without_repeats(key, *series.in_order())
            at = 0
            for block in hour_blocks(t, v, series.decimals):
                held = zlib.compress(np.diff(lines[at : at + block.n], prepend=np.int32(0)).tobytes(), 1)
                series.packed.setdefault(block.t0 // HOUR, []).append((block, held))
                at += block.n
            series.clear()
        self._pending = 0

    def _without_repeats(
        self, key: tuple[str, str], t: Times, v: Values, lines: Lines
    ) -> tuple[Times, Values, Lines]:
        again = np.flatnonzero(t[1:] == t[:-1]) + 1
        if again.size == 0:
            return t, v, lines
        for i in again:
            first = int(np.searchsorted(t, t[i]))
            self.repeated.append(Repeated(int(lines[i]), int(lines[first]), *key, int(t[i])))
        keep = np.ones(t.size, np.bool_)
        keep[again] = False
        return t[keep], v[keep], lines[keep]

    def blocks(self, key: tuple[str, str]) -> Iterator[Block]:
        """The samples of one episode and channel as blocks, hour by hour, repeats left out and noted."""
        series = self._series[key]
        if not series.packed:
            t, v, _lines = self._without_repeats(key, *series.in_order())
            yield from hour_blocks(t, v, series.decimals)
            return
        self._pack()
        for hour in sorted(series.packed):
            yield from self._one_hour(key, series.packed[hour], series.decimals)

    def _one_hour(self, key: tuple[str, str], pieces: list[tuple[Block, bytes]], decimals: int) -> Iterator[Block]:
        if len(pieces) == 1:
            yield pieces[0][0]
            return
        merged = _Series(decimals=decimals)
        for block, held in pieces:
            t, v, _decimals = decode(block.blob, block.t0)
            merged.t.append(t)
            merged.v.append(v)
            steps = np.frombuffer(zlib.decompress(held), np.int32)
            merged.lines.append(np.cumsum(steps, dtype=np.int32))
        t, v, _lines = self._without_repeats(key, *merged.in_order())
        yield from hour_blocks(t, v, decimals)
