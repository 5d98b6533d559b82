"""Closing: ended episodes copied into an archive, a store that opens in the same tool and is never written again.

An archive is encrypted with its store's key and carries a copy of its envelope, so the same passphrase and recovery
code open it. It holds the episodes' entries and device samples with their recording times, and every policy they were
judged by; no document, since a handover names other patients too.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from itertools import groupby
from pathlib import Path
from typing import TYPE_CHECKING, Any
from uuid import uuid4

import numpy as np
import sqlalchemy as sa

from core.record.entries import Action, NewEntry
from core.record.episode import Episode
from core.record.instant import DAY, Instant
from core.record.message import refuse
from storage import opening, redraft, rules
from storage import schema as s
from storage.draft_batch import DraftBatch, DraftEntry, SourceFacts
from storage.errors import store_error
from storage.store_file import remove_store

if TYPE_CHECKING:
    from storage.store import Store

RETENTION_SET = "retention time set"
MOST_DAYS = 36_525
_NAMED_AFTER = 8 * DAY
"""How long after its end a document may still name an episode: that of a shift of a week, closed a day late."""
WHY = "what it replaced belongs to another episode"
MOVED = "moved to another episode"
_AT_ONCE = 200


@dataclass(frozen=True, slots=True)
class Archived:
    """What went into an archive."""

    path: Path
    episodes: tuple[str, ...]
    entries: int
    samples: int


@dataclass(frozen=True, slots=True)
class Ended:
    """An ended episode: when it ended, and from when on the ward's retention time lets it go (None: unset)."""

    episode: str
    ended_at: Instant
    removable_from: Instant | None


def ended(store: Store) -> tuple[Ended, ...]:
    """Every episode whose end is recorded, the longest ended first."""
    days = retention_days(store)
    now = s.episode_now.c
    query = sa.select(now.episode_id, now.ended_at).where(now.ended_at.is_not(None)).order_by(now.ended_at)
    with store._opened.database.read() as connection:
        rows = connection.execute(query).all()
    return tuple(Ended(str(k), int(at), None if days is None else int(at) + days * DAY) for k, at in rows)


def retention_days(store: Store) -> int | None:
    """For how many days after its end an episode must stay; None while the ward has not said."""
    said = store.person_events((RETENTION_SET,), newest=1)
    return int(said[0].detail) if said and said[0].detail.isdigit() else None


def set_retention(store: Store, days: int, *, by: str, now: Instant) -> None:
    """Say for how many days after its end an episode must stay. It stands in the chain, with who said it.

    Raises:
        RecordError: `archive.bad_retention`.
    """
    if not 1 <= days <= MOST_DAYS:
        raise refuse("archive.bad_retention", value=days, accepted=MOST_DAYS)
    store.record_event(RETENTION_SET, person=by, now=now, detail=str(days))


def write(store: Store, episodes: Sequence[str], path: Path, *, by: str, now: Instant) -> Archived:
    """Copy ended episodes into a new archive, and hold each against what the store says before it is called done.

    Raises:
        RecordError: `archive.nothing`, `archive.not_ended`.
        StoreError: `store.exists`, `store.no_folder`, `store.disk_full`, `archive.differs`.
    """
    from storage.store import Store as Archive

    known = {e.episode for e in ended(store)}
    if not episodes:
        raise refuse("archive.nothing", accepted="at least one ended episode")
    for key in episodes:
        if key not in known:
            raise refuse("archive.not_ended", episode=key, accepted="an episode whose end is recorded")
    facts = {"imported": "no", "created_at": str(now), "created_by": by, "archive_of": store.store_id}
    made = Archive(path, opening.create_beside(path, store.path, store._opened.key, facts))
    try:
        with made:
            counts = _fill(store, made, frozenset(episodes))
            for key in episodes:
                if not _same(store.episode(key), made.episode(key)):
                    raise store_error("archive.differs", episode=key)
            made.record_event("archived", person=by, now=now, detail=", ".join(episodes))
            made.put_fact(opening.ARCHIVE, "yes")
    except BaseException:
        remove_store(path)
        raise
    store.record_event("archived", person=by, now=now, detail=f"{path.name}: {len(episodes)} episodes")
    return Archived(path, tuple(episodes), *counts)


@dataclass(frozen=True, slots=True)
class Removed:
    """What went with an episode. `naming` documents were kept after its end and may name it still; their own time
    is over from `naming_until` on."""

    episode: str
    documents: int = 0
    naming: int = 0
    naming_until: Instant | None = None


def remove(store: Store, episode: str, *, by: str, now: Instant) -> Removed:
    """Remove an episode whose retention time is over, for good; its digests stay in the chain. Documents and drafts
    as old as the ward's time go with it, whomever they name.

    Raises:
        RecordError: `archive.no_retention`, `archive.not_ended`, `archive.too_early`.
    """
    found = next((e for e in ended(store) if e.episode == episode), None)
    if found is None:
        raise refuse("archive.not_ended", episode=episode, accepted="an episode whose end is recorded")
    if found.removable_from is None:
        raise refuse("archive.no_retention", accepted="the ward's retention time in days")
    if now < found.removable_from:
        raise refuse("archive.too_early", episode=episode, accepted=found.removable_from)
    days = retention_days(store) or MOST_DAYS
    old = now - days * DAY
    before = store.documents()
    store.erase_episode(episode, reason=_over(days), by=by, now=now, documents_until=old)
    naming = [d.recorded_at for d in before if old < d.recorded_at <= found.ended_at + _NAMED_AFTER]
    until = max(naming) + days * DAY if naming else None
    return Removed(episode, sum(d.recorded_at <= old for d in before), len(naming), until)


def old_documents(store: Store, now: Instant) -> int:
    """How many documents are older than the ward's retention time; none while it is not set."""
    days = retention_days(store)
    return 0 if days is None else sum(d.recorded_at <= now - days * DAY for d in store.documents())


def remove_documents(store: Store, *, by: str, now: Instant) -> int:
    """Remove the documents and drafts that are older than the ward's retention time; how many documents.

    Raises:
        RecordError: `archive.no_retention`.
    """
    days = retention_days(store)
    if days is None:
        raise refuse("archive.no_retention", accepted="the ward's retention time in days")
    return store.erase_documents(now - days * DAY, reason=_over(days), by=by, now=now)


def _over(days: int) -> str:
    return f"retention time of {days} days is over"


def _fill(store: Store, archive: Store, episodes: frozenset[str]) -> tuple[int, int]:
    entries = samples = 0
    drafts: list[DraftBatch] = []
    times: list[Instant] = []
    for draft, at in _batches(store, episodes):
        entries += len(draft.entries)
        samples += sum(c.block.n for c in draft.chunks)
        drafts.append(draft)
        times.append(at)
        if len(drafts) == _AT_ONCE:
            archive.append_drafts(drafts, times)
            drafts, times = [], []
    if drafts:
        archive.append_drafts(drafts, times)
    return entries, samples


def _batches(store: Store, episodes: frozenset[str]) -> Iterator[tuple[DraftBatch, Instant]]:
    """What bears on the episodes, batch by batch as it was recorded, policies among it."""
    known: dict[str, rules.Replaced] = {}
    written: set[int] = set()
    with store._opened.database.read() as connection:
        rows = _rows(connection, episodes)
        for _number, group in groupby(rows, key=lambda found: found[1]["batch_seq"]):
            own = list(group)
            header = own[0][1]
            entries = [e for name, row in own if name == "entry" and (e := _entry(row, known, episodes)) is not None]
            chunks, source = [], None
            for row in (row for name, row in own if name == "chunk"):
                facts = _source(connection, row["source_seq"])
                if row["source_seq"] not in written and source is None:
                    written.add(row["source_seq"])
                    source = facts
                chunks.append(redraft.chunk_of(row, facts.id))
            policies = tuple(redraft.policy_of(row) for name, row in own if name == "policy")
            if entries or chunks or policies:
                made = DraftBatch(header["batch_by"], header["operation"], tuple(entries), tuple(chunks), source,
                                  policies=policies)  # fmt: skip
                yield made, header["recorded_at"]


def _rows(connection: sa.Connection, episodes: frozenset[str]) -> list[tuple[str, dict[str, Any]]]:
    b = s.batch.c
    found: list[tuple[str, dict[str, Any]]] = []
    for table in (s.entry, s.chunk, s.policy):
        t = table.c
        query = sa.select(table, b.by.label("batch_by"), b.operation, b.recorded_at).join_from(
            table, s.batch, t.batch_seq == b.seq
        )
        if table is s.entry:
            query = query.where(t.episode_id.in_(episodes) | t.moved_from.in_(episodes))
        elif table is s.chunk:
            query = query.where(t.episode_id.in_(episodes))
        found += [(table.name, dict(row)) for row in connection.execute(query).mappings()]
    return sorted(found, key=lambda one: one[1]["seq"])


def _entry(row: dict[str, Any], known: dict[str, rules.Replaced], episodes: frozenset[str]) -> DraftEntry | None:
    """An entry of the episodes; of one that was moved away from them, that it does not stand there any more."""
    draft = redraft.entry_of(row)
    if row["episode_id"] not in episodes:
        new = draft.entry
        gone = NewEntry(
            row["moved_from"], new.channel, new.at, by=new.by, zone=new.zone, action=Action.WITHDRAW,
            replaces=new.replaces, reason=MOVED,
        )  # fmt: skip
        draft = DraftEntry(gone, str(uuid4()))
    made = redraft.rooted(draft, known, WHY)
    if made is not None:
        known[made.id] = rules.Replaced(made.entry.episode, made.entry.channel, made.entry.action)
    return made


def _source(connection: sa.Connection, seq: int) -> SourceFacts:
    row = connection.execute(sa.select(s.source).where(s.source.c.seq == seq)).mappings().one()
    return redraft.source_of(dict(row))


def _same(one: Episode, other: Episode) -> bool:
    """Whether two records say the same: what stands and every sample."""
    told = [
        [(x.entry.channel, x.entry.at, x.entry.number, x.entry.words, x.entry.doubt) for x in e.standing]
        for e in (one, other)
    ]
    if told[0] != told[1] or one.series.keys() != other.series.keys():
        return False
    return all(
        np.array_equal(a.t, b.t) and np.array_equal(a.v, b.v, equal_nan=True)
        for a, b in ((one.series[k], other.series[k]) for k in one.series)
    )
