"""Reading the ledger by index: an episode's entries and device samples as known at a sequence."""

from __future__ import annotations

from bisect import bisect_left
from collections.abc import Callable, Iterable, Iterator
from dataclasses import dataclass, replace
from typing import Any

import numpy as np
import sqlalchemy as sa

from core.record import instant
from core.record.entries import Action, Entry
from core.record.instant import Instant
from core.record.knowledge import standing
from core.record.message import RecordError
from core.record.samples import DeviceSamples, Flags, mask_samples, shift_samples
from storage import schema as s
from storage.chunks import decode
from storage.errors import store_error
from storage.rules import WITHDRAWN_WHOLE

_IN_LIMIT = 500
_e, _b, _c = s.entry.c, s.batch.c, s.chunk.c
ENTRY_COLUMNS = (
    _e.episode_id, _e.channel, _e.at, _e.number, _e.words, _e.raw, _e.raw_unit, _e.decimals, _e.zone, _e.by,
    _e.note, _e.doubt, _e.action, _e.replaces, _e.reason, _e.source, _e.seq, _e.id, _b.recorded_at,
)  # fmt: skip
_SELECT_ENTRIES: sa.Select[Any] = sa.select(*ENTRY_COLUMNS).join_from(s.entry, s.batch, _e.batch_seq == _b.seq)


ChunkRow = tuple[int, str, str, Instant, bytes, bytes]
"""Sequence, channel, source, start, bytes and their SHA-256 of a block of device samples."""
ReadChunks = Callable[[sa.Connection, str, int, str | None, tuple[Instant, Instant] | None], Iterator[ChunkRow]]
LAID_ANEW = "withdrawal"
"""The kind of source by which an older program did what is now seen by passing a withdrawn file over."""


def _entry(row: sa.Row[Any]) -> Entry:
    return made_entry(list(row))


def made_entry(v: list[Any]) -> Entry:
    """An entry of the values of `ENTRY_COLUMNS`.

    Raises:
        StoreError: `store.damaged` where a value is of a kind that is never written.
    """
    try:
        v[12] = Action(v[12])
        sound = type(v[2]) is int and type(v[18]) is int and (v[3] is None or type(v[3]) is float)
    except ValueError:
        sound = False
    if not sound:
        raise store_error("store.damaged", detail=f"entry {v[16]}")
    v[13] = v[13] or ""
    return Entry(*v)


def episode_entries(connection: sa.Connection, episode: str, head: int) -> tuple[Entry, ...]:
    """All entries up to `head` that bear on an episode, in order of sequence.

    Beside the episode's own these are the entries it shares a chain of moves with: an entry moved here needs
    the one it began as, an entry moved away needs the one that took it.
    """
    own = connection.execute(_SELECT_ENTRIES.where((_e.episode_id == episode) & (_e.seq <= head)).order_by(_e.seq))
    found = {e.id: e for e in map(_entry, own)}
    away = connection.execute(_SELECT_ENTRIES.where((_e.moved_from == episode) & (_e.seq <= head)))
    fresh = [e for e in map(_entry, away) if e.id not in found]
    missing = {e.replaces for e in found.values() if e.replaces} - found.keys()
    if not fresh and not missing:
        return tuple(found.values())
    _add_chains(connection, found, fresh, missing, head)
    return tuple(sorted(found.values(), key=lambda e: e.seq))


def entries_where(connection: sa.Connection, condition: sa.ColumnElement[bool]) -> list[Entry]:
    """The entries of any episode for which a condition on the tables entry and batch holds, in order."""
    return [_entry(row) for row in connection.execute(_SELECT_ENTRIES.where(condition).order_by(_e.seq))]


def texts_of(connection: sa.Connection, channel: str) -> tuple[tuple[str, str], ...]:
    """The texts of a channel that stand in any episode, as (episode, text), in order of recording."""
    rows = connection.execute(_SELECT_ENTRIES.where(_e.channel == channel).order_by(_e.seq))
    found = [x.entry for x in standing(map(_entry, rows))]
    return tuple((e.episode, e.words) for e in sorted(found, key=lambda e: e.seq) if e.words)


def _add_chains(
    connection: sa.Connection, found: dict[str, Entry], fresh: list[Entry], missing: set[str], head: int
) -> None:
    """Follow replacements through other episodes, both ways, until nothing new turns up."""
    while fresh or missing:
        fresh = fresh + _where_in(connection, _e.id, missing, head)
        found.update({e.id: e for e in fresh})
        followers = _where_in(connection, _e.replaces, {e.id for e in fresh}, head)
        missing = {e.replaces for e in fresh if e.replaces} - found.keys()
        fresh = [e for e in followers if e.id not in found]


def _where_in(connection: sa.Connection, column: sa.ColumnElement[str], ids: Iterable[str], head: int) -> list[Entry]:
    wanted = list(ids)
    out: list[Entry] = []
    for start in range(0, len(wanted), _IN_LIMIT):
        query = _SELECT_ENTRIES.where(column.in_(wanted[start : start + _IN_LIMIT]) & (_e.seq <= head))
        out += map(_entry, connection.execute(query))
    return out


def chunk_rows(
    connection: sa.Connection, episode: str, head: int, channel: str | None = None,
    between: tuple[Instant, Instant] | None = None,
) -> Iterator[ChunkRow]:  # fmt: skip
    """The blocks of device samples of an episode as known at `head`, in order; `between` those that touch a span."""
    query = sa.select(_c.seq, _c.channel, s.source.c.id, _c.t0, _c.blob, _c.sha).join_from(
        s.chunk, s.source, _c.source_seq == s.source.c.seq
    )
    query = query.where((_c.episode_id == episode) & (_c.seq <= head) & (s.source.c.kind != LAID_ANEW))
    if channel is not None:
        query = query.where(_c.channel == channel)
    if between is not None:
        query = query.where((_c.t1 >= between[0]) & (_c.t0 <= between[1]))
    for row in connection.execute(query.order_by(_c.seq)):
        yield row[0], row[1], row[2], row[3], row[4], row[5]


def episode_samples(
    connection: sa.Connection, episode: str, head: int, spans: Iterable[Entry], channel: str | None = None,
    between: tuple[Instant, Instant] | None = None, rows_of: ReadChunks = chunk_rows,
) -> tuple[DeviceSamples, ...]:  # fmt: skip
    """The device samples of an episode as known at `head`, one block per channel.

    A later block wins where it overlaps an earlier one; mask and shift entries (`spans`, in order) act on what
    was recorded before them. A file that was withdrawn whole is passed over as if it had never been laid there.
    """
    waiting = list(spans)
    gone = {(span.channel, span.source) for span in waiting if _withdraws_whole(span)}
    if any(span.action is Action.SHIFT for span in waiting):
        between = None
    channels: dict[str, Pieces] = {}
    for seq, key, source, t0, blob, sha in rows_of(connection, episode, head, channel, between):
        while waiting and waiting[0].seq < seq:
            _apply(waiting.pop(0), channels)
        if (key, source) in gone:
            continue
        t, v, decimals = decode(blob, t0, sha)
        channels.setdefault(key, Pieces()).add(DeviceSamples(episode, key, source, t, v, decimals))
    for span in waiting:
        _apply(span, channels)
    made = (pieces.joined() for pieces in channels.values())
    return tuple(block for block in made if block is not None)


def _withdraws_whole(span: Entry) -> bool:
    return span.action is Action.MASK and bool(span.source) and span.reason == WITHDRAWN_WHOLE


def _apply(span: Entry, channels: dict[str, Pieces]) -> None:
    pieces = channels.get(span.channel)
    if pieces is not None and span.number is not None:
        pieces.change(span)


@dataclass(frozen=True, slots=True)
class _Span:
    source: str
    start: Instant
    end: Instant


def span_of(entry: Entry) -> _Span:
    """What a mask or shift acts on. A shift acts from `at` on, to the instant in `words` where one stands."""
    if entry.action is Action.MASK:
        return _Span(entry.source, entry.at, int(entry.number or 0))
    try:
        end = instant.parse(entry.words) if entry.words else 2**62
    except RecordError:
        end = 2**62
    return _Span(entry.source, entry.at, end)


class Pieces:
    """Blocks of one channel that do not overlap, kept in order of time while later ones win."""

    def __init__(self) -> None:
        self._blocks: list[DeviceSamples] = []
        self._starts: list[Instant] = []

    def add(self, block: DeviceSamples) -> None:
        """Lay a block over what is there: between its first and last sample nothing older remains."""
        if block.t.size == 0:
            return
        first, last = int(block.t[0]), int(block.t[-1])
        i = bisect_left(self._starts, first)
        if i and int(self._blocks[i - 1].t[-1]) >= first:
            i -= 1
        j = i
        kept = []
        while j < len(self._blocks) and self._starts[j] <= last:
            old = self._blocks[j]
            kept += [_part(old, old.t < first), _part(old, old.t > last)]
            j += 1
        new = sorted((b for b in (*kept, block) if b.t.size), key=lambda b: int(b.t[0]))
        self._blocks[i:j] = new
        self._starts[i:j] = [int(b.t[0]) for b in new]

    def change(self, span: Entry) -> None:
        """Mask or shift the samples of the span's source (any source where it names none)."""
        what = span_of(span)
        moved: list[DeviceSamples] = []
        kept: list[DeviceSamples] = []
        for block in self._blocks:
            if what.source and block.source != what.source:
                kept.append(block)
            elif span.action is Action.MASK:
                kept.append(mask_samples(block, what.start, what.end))
            else:
                inside = (block.t >= what.start) & (block.t <= what.end)
                kept.append(_part(block, ~inside))
                moved.append(shift_samples(_part(block, inside), int(span.number or 0)))
        self._blocks = [b for b in kept if b.t.size]
        self._starts = [int(b.t[0]) for b in self._blocks]
        for block in moved:
            self.add(block)

    def joined(self) -> DeviceSamples | None:
        """All pieces as one block; its source is the newest piece's, its decimals the finest."""
        if not self._blocks:
            return None
        last = self._blocks[-1]
        return replace(
            last,
            t=np.concatenate([b.t for b in self._blocks]),
            v=np.concatenate([b.v for b in self._blocks]),
            decimals=max(b.decimals for b in self._blocks),
        )


def _part(block: DeviceSamples, keep: Flags) -> DeviceSamples:
    return replace(block, t=block.t[keep], v=block.v[keep])


def spans_in_force(entries: Iterable[Entry]) -> list[Entry]:
    """Mask and shift entries that nothing has withdrawn or replaced, in order of sequence."""
    known = list(entries)
    gone = {e.replaces for e in known if e.replaces}
    spans = [e for e in known if e.action in (Action.MASK, Action.SHIFT) and e.id not in gone]
    return sorted(spans, key=lambda e: e.seq)
