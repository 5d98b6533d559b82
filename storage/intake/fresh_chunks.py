"""The blocks of device samples that a file would add, in bounded memory however many they are."""

from __future__ import annotations

from array import array
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from struct import Struct
from typing import overload

from core.record.instant import Instant
from storage.chunks import Block
from storage.draft_batch import DraftChunk
from storage.intake.sealed_file import SealedFile

_HEAD = Struct("<IqqI")
"""What stands before a block's bytes: which episode and channel, its first and last moment, how many samples."""


@dataclass(slots=True)
class Span:
    """What there is of one episode and channel: its first and last moment, how many samples, how many of them empty.

    `over` counts samples taken in before that would lie under these and no longer count.
    """

    first: Instant
    last: Instant
    count: int
    empty: int = 0
    over: int = 0


class FreshChunks(Sequence[DraftChunk]):
    """A sequence of chunks; each is read anew when it is asked for."""

    def __init__(self, source: str) -> None:
        self._source, self._sealed = source, SealedFile()
        self._kinds: list[tuple[str, str]] = []
        self._places = array("q")
        self.spans: dict[tuple[str, str], Span] = {}
        self.samples = 0

    def add(self, key: tuple[str, str], block: Block) -> None:
        """Add a block of an episode and channel; those of one pair follow each other."""
        if not self._kinds or self._kinds[-1] != key:
            self._kinds.append(key)
        head = _HEAD.pack(len(self._kinds) - 1, block.t0, block.t1, block.n)
        self._places.append(self._sealed.put(head + block.blob))
        span = self.spans.setdefault(key, Span(block.t0, block.t1, 0))
        span.first, span.last = min(span.first, block.t0), max(span.last, block.t1)
        span.count += block.n
        span.empty += block.empty
        self.samples += block.n

    def note_over(self, key: tuple[str, str], count: int) -> None:
        """Note how many samples of the store would lie under those of an episode and channel."""
        if count:
            self.spans[key].over += count

    def __len__(self) -> int:
        return len(self._places)

    def __iter__(self) -> Iterator[DraftChunk]:
        return (self._made(i) for i in range(len(self)))

    @overload
    def __getitem__(self, index: int) -> DraftChunk: ...
    @overload
    def __getitem__(self, index: slice) -> tuple[DraftChunk, ...]: ...
    def __getitem__(self, index: int | slice) -> DraftChunk | tuple[DraftChunk, ...]:
        if isinstance(index, slice):
            return tuple(self._made(i) for i in range(*index.indices(len(self))))
        return self._made(range(len(self))[index])

    def _made(self, i: int) -> DraftChunk:
        data = self._sealed.get(self._places[i])
        kind, t0, t1, n = _HEAD.unpack_from(data)
        episode, channel = self._kinds[kind]
        return DraftChunk(episode, channel, self._source, Block(t0, t1, n, data[_HEAD.size :]))
