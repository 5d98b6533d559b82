"""Reading a plain store so that every row an answer rests on is held against what was written (`row_proofs`)."""

from __future__ import annotations

from collections.abc import Iterable, Iterator

import sqlalchemy as sa

from core.record.entries import Entry
from core.record.instant import Instant
from storage import schema as s
from storage.chain import row_digest
from storage.reading_ledger import ENTRY_COLUMNS, LAID_ANEW, ChunkRow, made_entry
from storage.row_proofs import (
    DOCUMENTS,
    EPISODE,
    OPEN,
    Row,
    Total,
    check_header,
    checked_last,
    chunk_facts,
    documents_total,
    not_as_written,
    policies_kept,
    policy_proof,
    proofs,
    source_told,
    total_kept,
    whole_rows,
    with_batch,
)

_AT_ONCE = 500
_NEVER = 2**62
_e, _c, _b, _now = s.entry.c, s.chunk.c, s.batch.c, s.episode_now.c
_ENTRY_NAMES = tuple(c.name for c in ENTRY_COLUMNS)
_ENTRIES = with_batch(s.entry)


class _Bearing:
    """Entries that an answer about one episode needs, each episode that they lie in whole and as it was written."""

    def __init__(self, connection: sa.Connection, asked: str) -> None:
        self._connection, self._asked = connection, asked
        self._read: set[str] = set()
        self._by_id: dict[str, Entry] = {}
        self._from: dict[str, str | None] = {}
        self._replacing: dict[str, list[str]] = {}

    def read(self, episode: str) -> None:
        """Read an episode's entries and those that were moved away from it.

        Raises:
            StoreError: `store.episode_not_as_written`, naming the one that was asked for.
        """
        if episode in self._read:
            return
        self._read.add(episode)
        total = Total()
        own = (_e.episode_id == episode) | (_e.moved_from == episode)
        for row in whole_rows(self._connection, _ENTRIES.where(own)):
            total.add(row_digest("entry", row), row["recorded_at"])
            self._take(row)
        kept = proofs(self._connection, (episode,)).get(episode)
        if total != (Total() if kept is None else kept.entries):
            raise not_as_written(self._asked)

    def _take(self, row: Row) -> None:
        if row["id"] in self._by_id:
            return
        entry = made_entry([row[name] for name in _ENTRY_NAMES])
        self._by_id[entry.id], self._from[entry.id] = entry, row["moved_from"]
        if entry.replaces:
            self._replacing.setdefault(entry.replaces, []).append(entry.id)

    def up_to(self, head: int) -> list[Entry]:
        """The entries up to `head` that bear on the episode: its own, and the chains it shares by moves."""
        episode = self._asked
        self.read(episode)
        found: set[str] = set()
        fresh = {k for k, e in self._by_id.items() if episode in (e.episode, self._from[k])}
        while fresh:
            found |= fresh
            for key in fresh:
                self.read(self._by_id[key].episode)
                self.read(self._from[key] or episode)
            near = {self._by_id[key].replaces or "" for key in fresh} & self._by_id.keys()
            near |= {later for key in fresh for later in self._replacing.get(key, ())}
            fresh = near - found
        return sorted((e for k in found if (e := self._by_id[k]).seq <= head), key=lambda e: e.seq)


def episode_entries(connection: sa.Connection, episode: str, head: int) -> tuple[Entry, ...]:
    """As `reading_ledger.episode_entries`, every row checked.

    Raises:
        StoreError: `store.episode_not_as_written`.
    """
    return tuple(_Bearing(connection, episode).up_to(head))


def chunk_rows(
    connection: sa.Connection, episode: str, head: int, channel: str | None = None,
    between: tuple[Instant, Instant] | None = None,
) -> Iterator[ChunkRow]:  # fmt: skip
    """As `reading_ledger.chunk_rows`, every row checked; the bytes are held against their SHA-256 when decoded.

    Raises:
        StoreError: `store.episode_not_as_written`.
    """
    total, wanted = Total(), dict[int, Row]()
    for row in whole_rows(connection, chunk_facts().where(_c.episode_id == episode)):
        total.add(row_digest("chunk", row), source_told(row))
        in_time = between is None or (row["t1"] >= between[0] and row["t0"] <= between[1])
        of_channel = channel in (None, row["channel"]) and row["source_kind"] != LAID_ANEW
        if row["seq"] <= head and of_channel and in_time:
            wanted[row["seq"]] = row
    kept = proofs(connection, (episode,)).get(episode)
    if total != (Total() if kept is None else kept.chunks):
        raise not_as_written(episode)
    yield from _with_bytes(connection, episode, wanted)


def _with_bytes(connection: sa.Connection, episode: str, wanted: dict[int, Row]) -> Iterator[ChunkRow]:
    numbers = sorted(wanted)
    for start in range(0, len(numbers), _AT_ONCE):
        some = numbers[start : start + _AT_ONCE]
        query = sa.select(_c.seq, _c.blob).where(_c.seq.in_(some))
        found = {row[0]: row[1] for row in connection.execute(query)}
        for seq in some:
            row = wanted[seq]
            if seq not in found:
                raise not_as_written(episode)
            yield seq, row["channel"], row["source_id"], row["t0"], found[seq], row["sha"]


def check_standing(connection: sa.Connection, since: Instant, head: int | None, named: Iterable[str]) -> None:
    """Hold the episodes that a ward is made of against what was written: none is missing, none is another.

    `named` came by the index of ends; the table itself is asked too, so that a fault of either is seen, and those
    that have not ended are added up.

    Raises:
        StoreError: `store.not_as_written`.
    """
    if head is not None:
        check_episodes(connection)
        return
    scanned = sa.select(s.episode_now).where(sa.func.coalesce(_now.ended_at, _NEVER) > since)
    rows = {row[0]: list(row[1:]) for row in connection.execute(scanned)}
    kept = proofs(connection, rows)
    standing = Total()
    for episode, now in rows.items():
        standing.add_open(episode, now)
    if standing != total_kept(connection, OPEN):
        raise not_as_written()
    if rows.keys() != set(named) or any(k not in kept or kept[k].now != now for k, now in rows.items()):
        raise not_as_written()


def check_episodes(connection: sa.Connection) -> None:
    """Hold the whole table of episodes against what was written.

    Raises:
        StoreError: `store.not_as_written`.
    """
    rows = {row[0]: list(row[1:]) for row in connection.execute(sa.select(s.episode_now))}
    kept = proofs(connection, rows)
    known = sa.select(sa.func.count()).select_from(s.cache).where(s.cache.c.key.startswith(EPISODE))
    if connection.execute(known).scalar() != len(rows):
        raise not_as_written()
    if any(k not in kept or kept[k].now != now for k, now in rows.items()):
        raise not_as_written()


def check_policy(connection: sa.Connection, head: int) -> None:
    """Hold the newest policy up to a sequence against what was written. An older one, which serves where this program
    cannot read the newest, proves itself by its hash.

    Raises:
        StoreError: `store.not_as_written`.
    """
    p = s.policy.c
    newest = with_batch(s.policy).where(p.seq <= head).order_by(p.seq.desc()).limit(1)
    found = [policy_proof(row) for row in whole_rows(connection, newest)]
    kept = [one for one in policies_kept(connection) if int(one[0]) <= head]
    if found != kept[-1:]:
        raise not_as_written()


def check_documents(connection: sa.Connection) -> None:
    """Hold what is known of every kept document against what was written.

    Raises:
        StoreError: `store.not_as_written`.
    """
    if documents_total(connection) != total_kept(connection, DOCUMENTS):
        raise not_as_written()


def check_known_at(connection: sa.Connection, at: Instant, head: int) -> None:
    """Hold the sequence known at a moment against the batches on both sides of it.

    Raises:
        StoreError: `store.not_as_written`.
    """
    last = checked_last(connection)
    around = connection.execute(sa.select(s.batch).where((_b.last_seq == head) | (_b.first_seq == head + 1)))
    found = [dict(row) for row in around.mappings()]
    for header in found:
        check_header(header)
    before = [h for h in found if h["last_seq"] == head]
    after = [h for h in found if h["first_seq"] == head + 1]
    at_end = head == (0 if last is None else last["last_seq"])
    if bool(after) == at_end or bool(before) != bool(head):
        raise not_as_written()
    if any(h["recorded_at"] > at for h in before) or any(h["recorded_at"] <= at for h in after):
        raise not_as_written()
