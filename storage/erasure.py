"""Removal of an episode after the ward's retention time: its rows go, their digests stay in the chain.

What is left proves that nothing else was changed, and tells nothing of the patient: a digest covers a random
salt that goes with the row. Documents and backups have retention times of their own.
"""

from __future__ import annotations

from dataclasses import fields

import sqlalchemy as sa

from core.record.entries import Action, NewEntry
from core.record.knowledge import standing
from core.record.message import refuse
from storage import schema as s
from storage.chain import row_digest
from storage.draft_batch import DraftEntry, DraftErasure
from storage.reading_ledger import episode_entries

_REMOVED = (s.entry, s.chunk)
KEPT = "kept when the episode it was moved from was removed"


def erasures_of(connection: sa.Connection, episode: str, reason: str) -> tuple[DraftErasure, ...]:
    """What the chain keeps of every row of an episode.

    Raises:
        RecordError: `erasure.unknown_episode`, `erasure.no_reason`.
    """
    if not reason.strip():
        raise refuse("erasure.no_reason", accepted="why it is removed")
    found: list[DraftErasure] = []
    for table in _REMOVED:
        columns = [c for c in table.columns if c.name != "blob"]
        query = sa.select(*columns).where(table.c.episode_id == episode).order_by(table.c.seq)
        for row in connection.execute(query).mappings():
            digest = row_digest(table.name, dict(row))
            found.append(DraftErasure(table.name, row["seq"], row["batch_seq"], digest, reason))
    if not found:
        raise refuse("erasure.unknown_episode", episode=episode, accepted="an episode of the store")
    return tuple(found)


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


def remove(connection: sa.Connection, episode: str) -> None:
    """Remove the rows, once the ledger has their digests: the triggers let no row go before."""
    for table in _REMOVED:
        connection.execute(sa.delete(table).where(table.c.episode_id == episode))
    connection.execute(sa.delete(s.episode_now).where(s.episode_now.c.episode_id == episode))
    connection.execute(sa.delete(s.cache))
