"""What was taken in from files and streams: each source with what it brought, by the ledger's own tables."""

from __future__ import annotations

import json
from collections.abc import Mapping
from dataclasses import dataclass

import sqlalchemy as sa

from core.record.entries import Entry
from core.record.instant import Instant
from storage import schema as s
from storage.reading_ledger import entries_where

_b, _c, _e, _s = s.batch.c, s.chunk.c, s.entry.c, s.source.c


@dataclass(frozen=True, slots=True)
class TakenSource:
    """A source with what it brought. `entries` and `samples` are counts; `first_seq` to `last_seq` its rows."""

    id: str
    kind: str
    name: str
    sha: str
    size: int
    facts: Mapping[str, str | int | float | bool | None]
    by: str
    recorded_at: Instant
    first_seq: int
    last_seq: int
    entries: int
    samples: int


@dataclass(frozen=True, slots=True)
class SampleSpan:
    """Where samples of a source lie: one episode and channel, from `start` to `end`, both included."""

    episode: str
    channel: str
    start: Instant
    end: Instant


def taken_sources(connection: sa.Connection) -> tuple[TakenSource, ...]:
    """Every source that batches name, in order of taking."""
    batches = sa.select(
        _b.source_id, sa.func.min(_b.first_seq), sa.func.max(_b.last_seq), sa.func.max(_b.recorded_at),
        sa.func.min(_b.by),
    ).where(_b.source_id != "").group_by(_b.source_id)  # fmt: skip
    found = {row[0]: row for row in connection.execute(batches)}
    counts = _counts(connection)
    made = []
    query = sa.select(_s.id, _s.kind, _s.name, _s.sha, _s.size, _s.facts).order_by(_s.seq)
    for source_id, kind, name, sha, size, facts in connection.execute(query):
        if source_id in found:
            _, first, last, recorded_at, by = found[source_id]
            entries, samples = counts.get(source_id, (0, 0))
            made.append(TakenSource(source_id, kind, name, sha, size, json.loads(facts), by, int(recorded_at),
                                    int(first), int(last), entries, samples))  # fmt: skip
    return tuple(made)


def _counts(connection: sa.Connection) -> dict[str, tuple[int, int]]:
    entries = sa.select(_b.source_id, sa.func.count()).join_from(s.entry, s.batch, _e.batch_seq == _b.seq)
    samples = sa.select(_s.id, sa.func.sum(_c.n)).join_from(s.chunk, s.source, _c.source_seq == _s.seq)
    by_entries = {r[0]: int(r[1]) for r in connection.execute(entries.group_by(_b.source_id))}
    by_samples = {r[0]: int(r[1] or 0) for r in connection.execute(samples.group_by(_s.id))}
    return {k: (by_entries.get(k, 0), by_samples.get(k, 0)) for k in by_entries.keys() | by_samples.keys()}


def source_entries(connection: sa.Connection, source_id: str) -> tuple[Entry, ...]:
    """The entries that a source brought, in order."""
    return tuple(entries_where(connection, _b.source_id == source_id))


def origins(connection: sa.Connection, episode: str) -> dict[str, str]:
    """The names of the files that an episode's entries came from, by the entry's id; typed entries are left out."""
    query = (
        sa.select(_e.id, _s.name)
        .join_from(s.entry, s.batch, _e.batch_seq == _b.seq)
        .join(s.source, _s.id == _b.source_id)
        .where(_e.episode_id == episode)
    )
    return {str(row[0]): str(row[1]) for row in connection.execute(query)}


def source_ids(connection: sa.Connection, episode: str) -> dict[str, str]:
    """The sources that an episode's entries came from, by the entry's id; typed entries are left out."""
    query = sa.select(_e.id, _b.source_id).join_from(s.entry, s.batch, _e.batch_seq == _b.seq)
    rows = connection.execute(query.where((_e.episode_id == episode) & (_b.source_id != "")))
    return {str(row[0]): str(row[1]) for row in rows}


def source_spans(connection: sa.Connection, source_id: str) -> tuple[SampleSpan, ...]:
    """Where a source's samples lie, one span per episode and channel."""
    query = sa.select(_c.episode_id, _c.channel, sa.func.min(_c.t0), sa.func.max(_c.t1)).join_from(
        s.chunk, s.source, _c.source_seq == _s.seq
    )
    query = query.where(_s.id == source_id).group_by(_c.episode_id, _c.channel)
    return tuple(SampleSpan(r[0], r[1], int(r[2]), int(r[3])) for r in connection.execute(query))
