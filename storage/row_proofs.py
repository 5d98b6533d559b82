"""What a plain store keeps of each episode, so that a read can tell that every row is there and as it was written.

An encrypted store proves each page as it is read. The chain proves rows batch by batch, and a batch may hold a file
of a whole ward: to hold one episode against it would read everybody's. So beside each episode stands how many rows
bear on it and the sum of their digests; whoever reads the episode adds up the very rows that the answer rests on.
Derived from the ledger and rebuildable; it stands in the table `cache`, up to the sequence that `covered` names.
"""

from __future__ import annotations

import json
from collections import defaultdict
from collections.abc import Collection, Iterable, Iterator, Mapping, Sequence
from dataclasses import dataclass, field
from hashlib import sha256
from typing import Any

import sqlalchemy as sa

from storage import schema as s
from storage.chain import batch_hash, last_batch, row_digest
from storage.errors import StoreError, store_error

POLICIES, DOCUMENTS, OPEN = "policies", "documents", "open"
COVERED = "covered/1"
"""Up to where the ledger is summed up, by this way of summing: where the way changes its number does, and what an
older program kept counts as nothing, to be made anew once the chain was found whole."""
EPISODE = "episode/"
_AT_ONCE = 500
_MODULUS = 1 << 256
Row = Mapping[str, Any]


def _one(digest: str, beside: object) -> bytes:
    """The proof of one row: its digest, and what a read takes from another table with it."""
    return sha256(f"{digest} {beside}".encode()).digest()


@dataclass(slots=True)
class Total:
    """How many rows there are, and the sum of their digests."""

    rows: int = 0
    digests: int = 0

    def add(self, digest: str, beside: object) -> None:
        """One row more: its digest, and what a read takes from another table with it."""
        self.rows += 1
        self.digests = (self.digests + int.from_bytes(_one(digest, beside))) % _MODULUS

    def add_open(self, episode: str, now: Sequence[int | None], times: int = 1) -> None:
        """One row more of the table of episodes (or, -1, one less), where the episode has not ended."""
        if now and now[-1] is None:
            self.rows += times
            self.digests = (self.digests + times * int.from_bytes(_one(episode, list(now)))) % _MODULUS

    def add_all(self, other: Total) -> None:
        """The rows of another total more."""
        self.rows += other.rows
        self.digests = (self.digests + other.digests) % _MODULUS

    def kept(self) -> list[int | str]:
        """As it is kept."""
        return [self.rows, f"{self.digests:064x}"]


@dataclass(slots=True)
class EpisodeProof:
    """Of one episode: its entries with those that were moved away from it, its device samples, and its row in the
    table of episodes (`episode_now` without the key)."""

    entries: Total = field(default_factory=Total)
    chunks: Total = field(default_factory=Total)
    now: list[int | None] = field(default_factory=list)

    def data(self) -> bytes:
        """As it is kept."""
        return json.dumps([self.entries.kept(), self.chunks.kept(), self.now]).encode()


def _total(kept: Any) -> Total:
    rows, digests = kept
    return Total(int(rows), int(digests, 16))


def _proof(data: bytes) -> EpisodeProof:
    entries, chunks, now = json.loads(data)
    return EpisodeProof(_total(entries), _total(chunks), now)


def _read(connection: sa.Connection, keys: Iterable[str]) -> dict[str, bytes]:
    wanted = sorted(keys)
    found: dict[str, bytes] = {}
    for start in range(0, len(wanted), _AT_ONCE):
        query = sa.select(s.cache.c.key, s.cache.c.data).where(s.cache.c.key.in_(wanted[start : start + _AT_ONCE]))
        found.update({row[0]: bytes(row[1]) for row in connection.execute(query)})
    return found


def proofs(connection: sa.Connection, episodes: Iterable[str]) -> dict[str, EpisodeProof]:
    """What is kept of some episodes; nothing of those that nothing is recorded of."""
    return _proofs(_read(connection, {EPISODE + e for e in episodes}))


def _proofs(found: Mapping[str, bytes]) -> dict[str, EpisodeProof]:
    try:
        return {k.removeprefix(EPISODE): _proof(data) for k, data in found.items() if k.startswith(EPISODE)}
    except (ValueError, TypeError) as error:
        raise not_as_written() from error


def total_kept(connection: sa.Connection, name: str) -> Total:
    """What is kept under a name: of every document and what was written down with it (`DOCUMENTS`), of every episode
    that has not ended (`OPEN`)."""
    return _total_of(_read(connection, (name,)), name)


def _total_of(found: Mapping[str, bytes], name: str) -> Total:
    try:
        return _total(json.loads(found[name])) if name in found else Total()
    except (ValueError, TypeError) as error:
        raise not_as_written() from error


def policies_kept(connection: sa.Connection) -> list[list[int | str]]:
    """What is kept of each policy: its sequence and its proof, in order."""
    return _policies(_read(connection, (POLICIES,)))


def _policies(found: Mapping[str, bytes]) -> list[list[int | str]]:
    try:
        return [[int(seq), str(proof)] for seq, proof in json.loads(found.get(POLICIES, b"[]"))]
    except (ValueError, TypeError) as error:
        raise not_as_written() from error


def policy_proof(row: Row) -> list[int | str]:
    """The same of a policy as it is read."""
    return [row["seq"], _one(row_digest("policy", row), row["recorded_at"]).hex()]


def not_as_written(episode: str = "") -> StoreError:
    """What a read says that found other rows than were written."""
    return store_error("store.episode_not_as_written", episode=episode) if episode else store_error(
        "store.not_as_written"
    )  # fmt: skip


def covers(connection: sa.Connection) -> bool:
    """Whether the whole ledger can be held against what is kept: not in a store of an older program.

    Raises:
        StoreError: `store.not_as_written` where the ledger ends before what is kept of it.
    """
    last = checked_last(connection)
    head = 0 if last is None else int(last["last_seq"])
    covered = _covered(_read(connection, (COVERED,)))
    if covered is not None and covered > head:
        raise not_as_written()
    return head == (covered or 0)


def _covered(found: Mapping[str, bytes]) -> int | None:
    text = found.get(COVERED, b"")
    return int(text) if text.isdigit() else None


def checked_last(connection: sa.Connection) -> sa.RowMapping | None:
    """The newest batch, as the chain says and as the index of sequences says.

    Raises:
        StoreError: `store.not_as_written`.
    """
    last = last_batch(connection)
    newest = connection.execute(sa.select(sa.func.max(s.batch.c.last_seq))).scalar()
    if last is None and newest is None:
        return None
    if last is None or newest != last["last_seq"]:
        raise not_as_written()
    check_header(dict(last))
    return last


def check_header(header: Row) -> None:
    """Refuse a batch whose facts are not those of its hash.

    Raises:
        StoreError: `store.not_as_written`.
    """
    if batch_hash(header) != header["hash"]:
        raise not_as_written()


# -- keeping ---------------------------------------------------------------------------------------------


@dataclass(slots=True)
class _Sums:
    """What rows add to each proof."""

    episodes: dict[str, EpisodeProof] = field(default_factory=lambda: defaultdict(EpisodeProof))
    policies: list[list[int | str]] = field(default_factory=list)
    documents: Total = field(default_factory=Total)

    def entry(self, row: Row, digest: str, recorded_at: int) -> None:
        for episode in {row["episode_id"], row["moved_from"] or row["episode_id"]}:
            self.episodes[episode].entries.add(digest, recorded_at)


def note_batch(
    connection: sa.Connection, header: Row, rows: Iterable[tuple[sa.Table, Row, str]], touched: Iterable[str]
) -> None:
    """Bring what is kept up to date with a batch that was just taken, in the same transaction.

    `rows`: (table, row, digest) of the batch in order; `touched`: the episodes whose row in the table of episodes may
    be another now. Where an older program wrote in between, which keeps no proofs, all are let go until the store is
    opened again.
    """
    sums = _of_batch(connection, header, rows)
    changed = sums.episodes.keys() | set(touched)
    found = _read(connection, {COVERED, POLICIES, DOCUMENTS, OPEN, *(EPISODE + e for e in changed)})
    if (_covered(found) or 0) != header["first_seq"] - 1:
        connection.execute(sa.delete(s.cache))
        return
    old = _proofs(found)
    now = _index_rows(connection, changed)
    made = {COVERED: str(header["last_seq"]).encode()}
    standing = _total_of(found, OPEN)
    for episode in changed:
        proof = old.get(episode) or EpisodeProof()
        standing.add_open(episode, proof.now, -1)
        if episode in sums.episodes:
            proof.entries.add_all(sums.episodes[episode].entries)
            proof.chunks.add_all(sums.episodes[episode].chunks)
        proof.now = now.get(episode, [])
        standing.add_open(episode, proof.now)
        made[EPISODE + episode] = proof.data()
    if changed:
        made[OPEN] = json.dumps(standing.kept()).encode()
    if sums.policies:
        made[POLICIES] = json.dumps(_policies(found) + sums.policies).encode()
    if sums.documents.rows:
        total = _total_of(found, DOCUMENTS)
        total.add_all(sums.documents)
        made[DOCUMENTS] = json.dumps(total.kept()).encode()
    _put(connection, made, found.keys())


def _of_batch(connection: sa.Connection, header: Row, rows: Iterable[tuple[sa.Table, Row, str]]) -> _Sums:
    sums, at = _Sums(), header["recorded_at"]
    own = list(rows)
    sources = _sources(connection, {row["source_seq"] for table, row, _ in own if table is s.chunk})
    kinds = {row["kind"] for table, row, _ in own if table is s.document}
    for table, row, digest in own:
        if table is s.entry:
            sums.entry(row, digest, at)
        elif table is s.chunk:
            sums.episodes[row["episode_id"]].chunks.add(digest, sources[row["source_seq"]])
        elif table is s.policy:
            sums.policies.append([row["seq"], _one(digest, at).hex()])
        elif table is s.document or (table is s.person_event and row["event"] in kinds):
            sums.documents.add(digest, at)
    return sums


def _sources(connection: sa.Connection, numbers: set[int]) -> dict[int, str]:
    """What a read takes of sources, by their number."""
    found: dict[int, str] = {}
    wanted = sorted(numbers)
    for start in range(0, len(wanted), _AT_ONCE):
        some = wanted[start : start + _AT_ONCE]
        query = sa.select(s.source.c.seq, s.source.c.id, s.source.c.kind).where(s.source.c.seq.in_(some))
        found.update({int(row[0]): f"{row[1]} {row[2]}" for row in connection.execute(query)})
    return found


def _index_rows(connection: sa.Connection, episodes: Iterable[str]) -> dict[str, list[int | None]]:
    wanted = sorted(episodes)
    found: dict[str, list[int | None]] = {}
    for start in range(0, len(wanted), _AT_ONCE):
        some = wanted[start : start + _AT_ONCE]
        rows = connection.execute(sa.select(s.episode_now).where(s.episode_now.c.episode_id.in_(some)))
        found.update({row[0]: list(row[1:]) for row in rows})
    return found


def _put(connection: sa.Connection, made: Mapping[str, bytes], known: Collection[str]) -> None:
    c = s.cache.c
    if old := [{"which": key, "made": made[key]} for key in made if key in known]:
        change = sa.update(s.cache).where(c.key == sa.bindparam("which")).values(data=sa.bindparam("made"))
        connection.execute(change, old)
    if new := [{"key": key, "data": data} for key, data in made.items() if key not in known]:
        connection.execute(sa.insert(s.cache), new)


def rebuilt(connection: sa.Connection) -> dict[str, bytes]:
    """What is kept, as the ledger alone makes it."""
    sums = _Sums()
    for row in whole_rows(connection, with_batch(s.entry)):
        sums.entry(row, row_digest("entry", row), row["recorded_at"])
    for row in whole_rows(connection, chunk_facts()):
        sums.episodes[row["episode_id"]].chunks.add(row_digest("chunk", row), source_told(row))
    for row in whole_rows(connection, with_batch(s.policy).order_by(s.policy.c.seq)):
        sums.policies.append(policy_proof(row))
    sums.documents = documents_total(connection)
    standing = Total()
    for found in connection.execute(sa.select(s.episode_now)):
        sums.episodes[found[0]].now = list(found[1:])
        standing.add_open(found[0], found[1:])
    last = last_batch(connection)
    made = {EPISODE + episode: proof.data() for episode, proof in sums.episodes.items()}
    if sums.episodes:
        made[OPEN] = json.dumps(standing.kept()).encode()
    if sums.policies:
        made[POLICIES] = json.dumps(sums.policies).encode()
    if sums.documents.rows:
        made[DOCUMENTS] = json.dumps(sums.documents.kept()).encode()
    return made if last is None else made | {COVERED: str(last["last_seq"]).encode()}


def whole_rows(connection: sa.Connection, query: sa.Select[Any]) -> Iterator[dict[str, Any]]:
    """What a question finds, by the names of its columns."""
    result = connection.execute(query)
    names = tuple(result.keys())
    for row in result:
        yield dict(zip(names, row, strict=False))


def with_batch(table: sa.Table) -> sa.Select[Any]:
    """Whole rows of a ledger table, without what their SHA-256 stands for, each with when it was recorded."""
    columns = [c for c in table.columns if c.name not in ("blob", "data")]
    return sa.select(*columns, s.batch.c.recorded_at).join_from(table, s.batch, table.c.batch_seq == s.batch.c.seq)


def source_told(row: Row) -> str:
    """What a read takes of the source of a row of `chunk_facts`."""
    return f"{row['source_id']} {row['source_kind']}"


def chunk_facts() -> sa.Select[Any]:
    """Rows of device samples without their bytes, each with the id and kind of its source."""
    columns = [c for c in s.chunk.columns if c.name != "blob"]
    return sa.select(*columns, s.source.c.id.label("source_id"), s.source.c.kind.label("source_kind")).join_from(
        s.chunk, s.source, s.chunk.c.source_seq == s.source.c.seq
    )


def documents_total(connection: sa.Connection) -> Total:
    """Of every document, and of what was written down with it."""
    total = Total()
    told = with_batch(s.person_event).join(
        s.document,
        sa.and_(s.document.c.batch_seq == s.person_event.c.batch_seq, s.document.c.kind == s.person_event.c.event),
    )
    for name, query in (("document", with_batch(s.document)), ("person_event", told)):
        for row in whole_rows(connection, query):
            total.add(row_digest(name, row), row["recorded_at"])
    return total


def rebuild(connection: sa.Connection) -> None:
    """Make what is kept anew from the ledger."""
    made = rebuilt(connection)
    connection.execute(sa.delete(s.cache))
    _put(connection, made, ())


def differs(connection: sa.Connection) -> str | None:
    """Of what something else is kept than the ledger makes: an episode, a table; None where all is well, or where
    a store of an older program keeps nothing of this kind."""
    kept = {row[0]: bytes(row[1]) for row in connection.execute(sa.select(s.cache.c.key, s.cache.c.data))}
    if COVERED not in kept:
        return None
    made = rebuilt(connection)
    wrong = sorted(k for k in kept.keys() | made.keys() if kept.get(k) != made.get(k))
    return wrong[0].removeprefix(EPISODE) if wrong else None
