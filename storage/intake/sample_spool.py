"""Device samples on their way from a file to the store: gathered per episode and channel, in bounded memory.

Samples wait as plain arrays. When many wait, they are packed by the hour and put aside; an hour that comes in several
pieces is put together when it is asked for. What stays in memory of packed hours is where they lie.
"""

from __future__ import annotations

from array import array
from collections.abc import Iterator
from dataclasses import dataclass, field
from itertools import groupby
from struct import Struct

import numpy as np
from numpy.typing import NDArray

from core.record.channels import Channel
from core.record.instant import HOUR, Instant
from core.record.samples import Times, Values
from storage.block_cuts import blocks_of, hour_blocks, joined
from storage.chunks import Block, decode
from storage.intake.findings import MAX_LISTED, unreadable
from storage.intake.sealed_file import SealedFile

Lines = NDArray[np.int32]
MOST_SERIES = 50_000
"""Channels of episodes in one file: a ward has not had as many, and each takes a kilobyte."""
_PENDING = 1_200_000
"""Samples held as plain arrays (20 bytes each) before they are packed."""
_HEAD = Struct("<qqII")
"""What stands before a packed hour's block: its first and last moment, how many samples, bytes of their lines."""


@dataclass(slots=True)
class _Series:
    """One channel of one episode: what waits, and of its packed hours their number and where they lie."""

    t: list[Times] = field(default_factory=list)
    v: list[Values] = field(default_factory=list)
    lines: list[Lines] = field(default_factory=list)
    decimals: int = 0
    packed: array[int] = field(default_factory=lambda: array("q"))

    def in_order(self) -> tuple[Times, Values, Lines]:
        """What is held as plain arrays, by time; rows of one time in order of lines."""
        if not self.t:
            return np.empty(0, np.int64), np.empty(0), np.empty(0, np.int32)
        t, v, lines = np.concatenate(self.t), np.concatenate(self.v), np.concatenate(self.lines)
        self.clear()
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
    """Gathers samples; `blocks` gives them in order of time.

    `repeated` are those that stand twice, as far as they are listed; `repeated_count` counts them all.
    """

    def __init__(self) -> None:
        self._series: dict[tuple[str, str], _Series] = {}
        self._sealed = SealedFile()
        self._pending = 0
        self.repeated: list[Repeated] = []
        self.repeated_count = 0
        self.leak_uses: dict[tuple[str, str], LeakUse] = {}
        self.units: dict[str, set[str]] = {}

    def add(
        self, episode: str, channel: Channel, unit: str, definition: str, t: Times, v: Values, lines: Lines,
        decimals: int,
    ) -> None:  # fmt: skip
        """Add samples of one episode and channel, in any order.

        Raises:
            UnreadableFileError: `file.too_many_episodes`.
        """
        series = self._series.setdefault((episode, channel.key), _Series())
        if len(self._series) > MOST_SERIES:
            raise unreadable(int(lines[0]), episode[:80], "file.too_many_episodes", accepted=MOST_SERIES)
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

    def blocks(self, key: tuple[str, str]) -> Iterator[Block]:
        """The samples of one episode and channel as blocks in order of time, repeats left out and noted."""
        series = self._series[key]
        if series.packed:
            yield from joined(self._hours(key, series), series.decimals)
            return
        t, v, _lines = self._without_repeats(key, *series.in_order())
        yield from blocks_of(t, v, series.decimals)

    def _hours(self, key: tuple[str, str], series: _Series) -> Iterator[Block]:
        self._pack_series(key, series)
        hours = np.frombuffer(series.packed, np.int64)[::2]
        order = np.argsort(hours, kind="stable")
        for _hour, places in groupby(order.tolist(), key=lambda i: int(hours[i])):
            yield from self._one_hour(key, [series.packed[2 * i + 1] for i in places], series.decimals)

    def _pack(self) -> None:
        for key, series in self._series.items():
            self._pack_series(key, series)
        self._pending = 0

    def _pack_series(self, key: tuple[str, str], series: _Series) -> None:
        t, v, lines = self._without_repeats(key, *series.in_order())
        at = 0
        for block in hour_blocks(t, v, series.decimals):
            written = _lines_as_bytes(lines[at : at + block.n])
            head = _HEAD.pack(block.t0, block.t1, block.n, len(written))
            series.packed.extend((block.t0 // HOUR, self._sealed.put(head + written + block.blob)))
            at += block.n

    def _without_repeats(
        self, key: tuple[str, str], t: Times, v: Values, lines: Lines
    ) -> tuple[Times, Values, Lines]:
        again = np.flatnonzero(t[1:] == t[:-1]) + 1
        if again.size == 0:
            return t, v, lines
        self.repeated_count += again.size
        for i in again[: MAX_LISTED - len(self.repeated)].tolist():
            first = int(np.searchsorted(t, t[i]))
            self.repeated.append(Repeated(int(lines[i]), int(lines[first]), *key, int(t[i])))
        keep = np.ones(t.size, np.bool_)
        keep[again] = False
        return t[keep], v[keep], lines[keep]

    def _one_hour(self, key: tuple[str, str], places: list[int], decimals: int) -> Iterator[Block]:
        merged = _Series(decimals=decimals)
        for place in places:
            data = self._sealed.get(place)
            t0, t1, n, written = _HEAD.unpack_from(data)
            block = Block(t0, t1, n, data[_HEAD.size + written :])
            if len(places) == 1:
                yield block
                return
            t, v, _decimals = decode(block.blob, t0)
            merged.t.append(t)
            merged.v.append(v)
            merged.lines.append(_lines_from_bytes(data[_HEAD.size : _HEAD.size + written], n))
        t, v, _lines = self._without_repeats(key, *merged.in_order())
        yield from hour_blocks(t, v, decimals)


def _lines_as_bytes(lines: Lines) -> bytes:
    """Lines that keep one step as first and step; others as they are."""
    step = int(lines[1] - lines[0]) if lines.size > 1 else 0
    if lines.size < 3 or (np.diff(lines) == step).all():
        return np.array([lines[0], step], "<i4").tobytes()
    return lines.astype("<i4").tobytes()


def _lines_from_bytes(data: bytes, n: int) -> Lines:
    read = np.frombuffer(data, "<i4").astype(np.int32)
    if n < 3 or read.size == 2:
        return np.asarray(read[0] + read[1] * np.arange(n), np.int32)
    return read
