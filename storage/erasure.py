"""Removal of an episode after the ward's retention time: its rows go, their digests stay in the chain.

What is left proves that nothing else was changed, and tells nothing of the patient: a digest covers a random
salt that goes with the row. Documents name several patients, so they go by the time at which they were kept.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import fields

import sqlalchemy as sa

from core.record.entries import Action, NewEntry
from core.record.instant import Instant
from core.record.knowledge import standing
from core.record.message import refuse
from storage import episode_index
from storage import schema as s
from storage.chain import row_digest
from storage.draft_batch import DraftEntry, DraftErasure
from storage.reading_ledger import episode_entries

_AT_ONCE = 500
KEPT = "kept when the episode it was moved from was removed"


def erasures_of(connection: sa.Connection, episode: str, reason: str) -> tuple[DraftErasure, ...]:
    """What the chain keeps of every row of an episode: its entries, the rows by which some were moved away from it,
    its device samples, and the files that brought nothing but it, since their names may be the patient's.

    Raises:
        RecordError: `erasure.unknown_episode`, `erasure.no_reason`.
    """
    if not reason.strip():
        raise refuse("erasure.no_reason", accepted="why it is removed")
    e, c = s.entry.c, s.chunk.c
    found = [
        *_erased(connection, s.entry, (e.episode_id == episode) | (e.moved_from == episode), reason),
        *_erased(connection, s.chunk, c.episode_id == episode, reason),
    ]
    if not found:
        raise refuse("erasure.unknown_episode", episode=episode, accepted="an episode of the store")
    found += _erased(connection, s.source, s.source.c.seq.in_(_own_sources(connection, episode)), reason)
    return tuple(found)


def erased_documents(connection: sa.Connection, until: Instant, reason: str) -> tuple[DraftErasure, ...]:
    """What the chain keeps of documents that were kept up to a moment."""
    recorded = sa.select(s.batch.c.seq).where(s.batch.c.recorded_at <= until)
    return tuple(_erased(connection, s.document, s.document.c.batch_seq.in_(recorded), reason))


def _erased(
    connection: sa.Connection, table: sa.Table, which: sa.ColumnElement[bool], reason: str
) -> Iterator[DraftErasure]:
    columns = [c for c in table.columns if c.name not in ("blob", "data")]
    for row in connection.execute(sa.select(*columns).where(which).order_by(table.c.seq)).mappings():
        yield DraftErasure(table.name, row["seq"], row["batch_seq"], row_digest(table.name, dict(row)), reason)


def _own_sources(connection: sa.Connection, episode: str) -> list[int]:
    """The sources that brought rows of an episode and of no other."""
    brought: tuple[set[int], set[int]] = (set(), set())
    b, c = s.batch.c, s.chunk.c
    for table in (s.entry, s.chunk):
        query = (
            sa.select(s.source.c.seq, table.c.episode_id == episode)
            .select_from(s.source.join(s.batch, b.source_id == s.source.c.id).join(table, table.c.batch_seq == b.seq))
            .distinct()
        )
        for seq, own in connection.execute(query):
            brought[bool(own)].add(int(seq))
    for seq, own in connection.execute(sa.select(c.source_seq, c.episode_id == episode).distinct()):
        brought[bool(own)].add(int(seq))
    return sorted(brought[True] - brought[False])


def kept_elsewhere(connection: sa.Connection, episode: str) -> tuple[DraftEntry, ...]:
    """Values that were moved from an episode to others and stand there, as first entries of their own.

    They were logged in the wrong place and belong to other patients; their chains begin with rows that go.
    """
    query = sa.select(s.entry.c.episode_id).where(s.entry.c.moved_from == episode).distinct()
    others = sorted({row[0] for row in connection.execute(query)} - {episode})
    kept: list[DraftEntry] = []
    for other in others:
        entries = episode_entries(connection, other, 2**62)
        gone = {e.id for e in entries if e.episode == episode}
        for found in standing(entries):
            if found.first in gone and found.entry.episode == other:
                new = {f.name: getattr(found.entry, f.name) for f in fields(NewEntry)}
                new |= {"action": Action.ASSERT, "replaces": "", "reason": KEPT}
                kept.append(DraftEntry(NewEntry(**new), source_recorded_at=found.entry.recorded_at))
    return tuple(kept)


def remove(connection: sa.Connection, gone: Sequence[DraftErasure], episode: str | None) -> None:
    """Remove rows, once the ledger has their digests: the triggers let no row go before."""
    for table in (s.entry, s.chunk, s.source, s.document):
        own = [g.seq for g in gone if g.table == table.name]
        for start in range(0, len(own), _AT_ONCE):
            connection.execute(sa.delete(table).where(table.c.seq.in_(own[start : start + _AT_ONCE])))
    if episode is not None:
        connection.execute(sa.delete(s.episode_now).where(s.episode_now.c.episode_id == episode))
        episode_index.rebuild(connection)  # rows by which entries were moved elsewhere went too
    connection.execute(sa.delete(s.cache))


def remove_drafts(connection: sa.Connection, until: Instant) -> None:
    """Forget what was being typed up to a moment and never recorded."""
    connection.execute(sa.delete(s.draft).where(s.draft.c.saved_at <= until))
