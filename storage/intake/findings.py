"""What an intake finds in a file: rows it refuses, rows it doubts, and what it would add to the store."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sized
from dataclasses import dataclass, field

import numpy as np

from core.record.instant import Instant
from core.record.message import Message, Value
from core.record.samples import DeviceSamples
from storage.chunks import decode
from storage.draft_batch import DraftChunk, DraftEntry, SourceFacts
from storage.intake.fresh_chunks import FreshChunks, Span

MAX_LISTED = 10_000
"""Refusals and doubts that are listed; beyond them only their number is kept."""


@dataclass(frozen=True, slots=True)
class Refusal:
    """A row that cannot be taken: its line (the header is 1; 0 is the file), column, value, and why."""

    line: int
    column: str
    value: str
    message: Message


@dataclass(frozen=True, slots=True)
class Doubt:
    """A row that is taken and marked, or a contradiction to look at: line, column, value, and why."""

    line: int
    column: str
    value: str
    message: Message


@dataclass(slots=True)
class UnknownCode:
    """A code that is no quantity of the log until a person says which: key, name, an example with its unit."""

    key: str
    name: str
    example: str
    unit: str
    count: int = 0


@dataclass(frozen=True, slots=True)
class Intake:
    """What a file would add. It is taken whole or not at all: only without refusals.

    `whole` is False where reading had to stop before the end of the file, so that nothing of it can be taken.
    `repeated_in_store` counts rows that the store already has; they are skipped.
    `aside` lists what is readable and not for this record, with the reason: codes that are no channel, results
    that were cancelled. `aside_count` counts them all. `unknown_codes` are those a person may give a channel.
    `unknown_patients` are the identifiers, and the names in a table's own column, that a person has to answer for;
    `new_episodes` those of its episodes that the store has nothing of.
    `head` is the store's newest sequence when the file was read: what was recorded since was not looked at.
    """

    source: SourceFacts
    entries: tuple[DraftEntry, ...] = ()
    chunks: FreshChunks | tuple[()] = ()
    refusals: tuple[Refusal, ...] = ()
    refused_rows: int = 0
    repeated_in_store: int = 0
    doubts: tuple[Doubt, ...] = ()
    whole: bool = True
    aside: tuple[Refusal, ...] = ()
    aside_count: int = 0
    unknown_patients: tuple[str, ...] = ()
    unknown_codes: tuple[UnknownCode, ...] = ()
    head: int | None = None
    new_episodes: tuple[str, ...] = ()

    @property
    def overlaid(self) -> int:
        """How many device samples of earlier files would lie under this one's and no longer count."""
        return sum(span.over for span in self.spans.values())

    @property
    def sample_count(self) -> int:
        """How many device samples it would add."""
        return sum(span.count for span in self.spans.values())

    @property
    def empty_count(self) -> int:
        """How many of them hold no value: the device wrote the moment and nothing for it."""
        return sum(span.empty for span in self.spans.values())

    @property
    def spans(self) -> Mapping[tuple[str, str], Span]:
        """Where the device samples lie, by episode and channel."""
        return self.chunks.spans if isinstance(self.chunks, FreshChunks) else {}

    @property
    def samples(self) -> tuple[DeviceSamples, ...]:
        """The device samples it would add, one block per episode and channel."""
        grouped: dict[tuple[str, str], list[DraftChunk]] = {}
        for c in self.chunks:
            grouped.setdefault((c.episode, c.channel), []).append(c)
        return tuple(_joined(chunks) for chunks in grouped.values())

    @property
    def episodes(self) -> tuple[str, ...]:
        """The episodes it bears on, in order of appearance."""
        return episodes_of(self.entries, self.spans)


def episodes_of(entries: Iterable[DraftEntry], spans: Iterable[tuple[str, str]]) -> tuple[str, ...]:
    """The episodes of entries and of samples' (episode, channel), in order of appearance."""
    return tuple(dict.fromkeys([*(d.entry.episode for d in entries), *(episode for episode, _channel in spans)]))


def _joined(chunks: list[DraftChunk]) -> DeviceSamples:
    parts = [decode(c.block.blob, c.block.t0) for c in chunks]
    first = chunks[0]
    t, v = np.concatenate([p[0] for p in parts]), np.concatenate([p[1] for p in parts])
    return DeviceSamples(first.episode, first.channel, first.source, t, v, max(p[2] for p in parts))


@dataclass(slots=True)
class Findings:
    """Refusals and doubts while a file is read; memory stays bounded however bad the file is."""

    refusals: list[Refusal] = field(default_factory=list)
    doubts: list[Doubt] = field(default_factory=list)
    refused_lines: set[int] = field(default_factory=set)
    refused_rows: int = 0

    def refuse(self, line: int, column: str, value: str, message: Message) -> None:
        """Note a row that cannot be taken."""
        if line not in self.refused_lines:
            self.refused_rows += 1
        if len(self.refusals) < MAX_LISTED:
            self.refusals.append(Refusal(line, column, value[:200], message))
            self.refused_lines.add(line)

    def doubt(self, line: int, column: str, value: str, message: Message) -> None:
        """Note a row that is taken and marked."""
        if len(self.doubts) < MAX_LISTED:
            self.doubts.append(Doubt(line, column, value[:200], message))


class UnreadableFileError(Exception):
    """Reading cannot go on: what stands after this line cannot be told."""

    def __init__(self, line: int, value: str, message: Message) -> None:
        super().__init__(message.key)
        self.line, self.value, self.message = line, value, message


def unreadable(line: int, value: str, key: str, **values: Value) -> UnreadableFileError:
    """The error that ends the reading of a file."""
    return UnreadableFileError(line, value, Message(key, values))


MOST_ENTRIES = 500_000
"""Entries of one file: they are judged together, and each takes about a kilobyte of memory."""


def check_entry_count(entries: Sized, line: int) -> None:
    """Refuse a file of more entries than can be judged together; device samples are not counted.

    Raises:
        UnreadableFileError: `file.too_many_entries`.
    """
    if len(entries) > MOST_ENTRIES:
        raise unreadable(line, "", "file.too_many_entries", accepted=MOST_ENTRIES)


CLOCK_LEAD: Instant = 5 * 60 * 1_000_000
"""A time may lead the clock by 5 minutes: clocks of machines differ by that much (common practice, no source)."""
