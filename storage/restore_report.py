"""What an old store holds that a restored backup does not: the work of the hours since, to be entered again.

A store is often restored because the old one is damaged, so the old one is read as far as it can be.
"""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Iterable
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import sqlalchemy as sa

from core.record.entries import Action
from core.record.instant import Instant
from storage import schema as s
from storage.damaged_reading import DamagedLedger
from storage.engine import Database
from storage.errors import StoreError

Row = dict[str, Any]
MOST_TOLD = 200
"""Entries that are told one by one; the rest is counted."""
_COUNTED = (s.document.name, s.policy.name, s.person_event.name)
_HEAVY = ("blob", "data")
_SAID = ("seen", "settled")
"""Transitions of a flag that a person makes; the program makes the others of what is entered again."""


@dataclass(frozen=True, slots=True)
class NewerEntry:
    """One entry as it was typed: channel, moment, text, unit, by whom. `action` tells a correction from a value."""

    channel: str
    at: Instant
    raw: str
    raw_unit: str
    note: str
    by: str
    action: str


@dataclass(frozen=True, slots=True)
class NewerEpisode:
    """What came later for one episode: entries, device samples, and when something was last recorded (0 where the
    batch cannot be read). `told` are its newest entries one by one, in order."""

    episode: str
    entries: int
    samples: int
    last_recorded: Instant
    told: tuple[NewerEntry, ...] = ()


@dataclass(frozen=True, slots=True)
class Newer:
    """What a store recorded after a sequence. `others` counts documents, policies and events.

    `damaged`: parts of the store cannot be read, so there may be more.
    """

    head: int
    batches: int
    first_recorded: Instant | None
    episodes: tuple[NewerEpisode, ...]
    others: int
    damaged: bool = False


@dataclass(frozen=True, slots=True)
class Compared:
    """An old store held against a head. `same`: whether it still holds that head, so that it continues it."""

    newer: Newer
    same: bool


def compare(old: Path, key: bytes | None, head: int, digest: str) -> Compared:
    """What a store on the disk holds beyond a head of sequence and hash, read as far as it can be.

    `key`: its data key, which a change of the passphrase does not change; None for a plain store.

    Raises:
        StoreError: `store.damaged`, `store.not_a_store` where nothing of it can be read.
    """
    try:
        database = Database(old, key, mode="ro")
        try:
            with database.read() as connection:
                query = sa.select(s.batch.c.hash).where(s.batch.c.last_seq == head)
                held = connection.execute(query).scalar()
                return Compared(newer(connection, head), head == 0 or held == digest)
        finally:
            database.close()
    except StoreError:
        ledger = DamagedLedger(old, key)
        try:
            return _compare_damaged(ledger, head, digest)
        finally:
            ledger.close()


def newer(connection: sa.Connection, head: int) -> Newer:
    """Everything recorded after a sequence, by episode in order of the last recording."""

    def after(table: sa.Table) -> Iterable[Row]:
        columns = [c for c in table.columns if c.name not in _HEAVY]
        query = sa.select(*columns).where(table.c.seq > head).order_by(table.c.seq)
        return [dict(row) for row in connection.execute(query).mappings()]

    later = sa.select(s.batch).where(s.batch.c.last_seq > head).order_by(s.batch.c.seq)
    headers = [dict(row) for row in connection.execute(later).mappings()]
    rows = ((t.name, row) for t in s.LEDGER_ROWS if t.name != s.erasure.name for row in after(t))
    return _told(headers, rows, head, damaged=False)


def _compare_damaged(ledger: DamagedLedger, head: int, digest: str) -> Compared:
    known = ledger.headers()
    held = next((h["hash"] for h in known.values() if h["last_seq"] == head), None)
    rows = ((name, row) for name, row in ledger.rows() if row["seq"] > head)
    later = [h for h in known.values() if h["last_seq"] > head]
    return Compared(_told(later, rows, head, damaged=True), head == 0 or held == digest)


def _told(headers: Iterable[Row], rows: Iterable[tuple[str, Row]], head: int, *, damaged: bool) -> Newer:
    batches = {h["seq"]: h for h in headers}
    entries: dict[str, list[Row]] = defaultdict(list)
    samples: dict[str, int] = defaultdict(int)
    last: dict[str, int] = defaultdict(int)
    others, top = 0, head
    for name, row in rows:
        top = max(top, row["seq"])
        if name in _COUNTED:
            others += 1
        elif name == s.entry.name and row["action"] == Action.FLAG and row["words"] not in _SAID:
            continue
        elif name in (s.entry.name, s.chunk.name):
            episode = row["episode_id"]
            recorded = batches[row["batch_seq"]]["recorded_at"] if row["batch_seq"] in batches else 0
            last[episode] = max(last[episode], recorded)
            if name == s.entry.name:
                entries[episode].append(row)
            else:
                samples[episode] += row["n"]
    room = MOST_TOLD
    episodes = []
    for episode in sorted(last, key=lambda k: (-last[k], k)):
        own = entries[episode][-room:] if room else []
        room -= len(own)
        told = tuple(_entry(row, batches) for row in own)
        episodes.append(NewerEpisode(episode, len(entries[episode]), samples[episode], last[episode], told))
    first = min((b["recorded_at"] for b in batches.values()), default=None)
    return Newer(top, len(batches), first, tuple(episodes), others, damaged)


def _entry(row: Row, batches: dict[int, Row]) -> NewerEntry:
    batch = batches.get(row["batch_seq"], {})
    by = row["by"] or batch.get("by", "")
    return NewerEntry(row["channel"], row["at"], row["raw"], row["raw_unit"], row["note"], by, row["action"])
