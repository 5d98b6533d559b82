"""Appending a batch: sequence, recording time and hash are allocated inside the write lock."""

from __future__ import annotations

import json
import os
from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from operator import itemgetter
from typing import Any
from uuid import uuid4

import sqlalchemy as sa

from core.record.entries import Action, NewEntry
from core.record.instant import Instant
from core.record.message import refuse
from storage import schema as s
from storage.chain import GENESIS, batch_hash, last_batch, row_digest, rows_digest
from storage.chunks import CODEC
from storage.draft_batch import DraftBatch, DraftChunk, DraftEntry, Receipt, SourceFacts
from storage.rules import Replaced, check_entry

ENGINE = "luffmark/0.1.0"
_ID_LENGTH = 36
_IN_LIMIT = 500
_MANY = 100

Row = dict[str, Any]


@dataclass(frozen=True, slots=True)
class Appended:
    """A batch that the ledger took: its receipt, its header, and each row with its table and its digest, in order."""

    receipt: Receipt
    header: Row
    rows: tuple[tuple[sa.Table, Row, str], ...]


def append_batch(connection: sa.Connection, draft: DraftBatch, now: Instant) -> Appended:
    """Add a batch at the end of the ledger, inside the caller's write transaction.

    The recording time never steps back: behind the last one it is held, and the skew is noted.

    Raises:
        RecordError: a domain rule is broken, or the batch is empty.
    """
    before = last_batch(connection)
    rows = _rows(connection, draft, first=1 if before is None else before["last_seq"] + 1)
    if not rows:
        raise refuse("batch.empty", operation=draft.operation, accepted="at least one row")
    header, digests = _header(draft, rows, before, now)
    connection.execute(sa.insert(s.batch), header)
    for table in s.LEDGER_ROWS:
        if own := [row for t, row in rows if t is table]:
            _insert(connection, table, own)
    ids = tuple(row["id"] for t, row in rows if t is s.entry)
    receipt = Receipt(header["seq"], header["first_seq"], header["last_seq"], ids, header["recorded_at"],
                      header["hash"], header["skew"])  # fmt: skip
    return Appended(receipt, header, tuple((t, row, d) for (t, row), d in zip(rows, digests, strict=True)))


def _insert(connection: sa.Connection, table: sa.Table, rows: list[Row]) -> None:
    """Insert rows. Many blocks of samples go to the driver as they are: their columns need no conversion."""
    if table is not s.chunk or len(rows) < _MANY:
        connection.execute(sa.insert(table), rows)
        return
    statement = sa.insert(table).compile(dialect=connection.dialect)
    if not statement.positiontup:  # a driver that takes values by name
        connection.execute(sa.insert(table), rows)
        return
    in_order = itemgetter(*statement.positiontup)
    connection.exec_driver_sql(str(statement), [in_order(row) for row in rows])


def _header(
    draft: DraftBatch, rows: list[tuple[sa.Table, Row]], before: sa.RowMapping | None, now: Instant
) -> tuple[Row, list[str]]:
    """A batch's header, and the digest of each of its rows."""
    earliest = now if before is None else before["recorded_at"]
    number = 1 if before is None else before["seq"] + 1
    for _table, row in rows:
        row["batch_seq"] = number
    digests = [row_digest(table.name, row) for table, row in rows]
    header: Row = {
        "seq": number,
        "id": str(uuid4()),
        "first_seq": rows[0][1]["seq"],
        "last_seq": rows[-1][1]["seq"],
        "prev_hash": GENESIS if before is None else before["hash"],
        "digest": rows_digest(digests),
        "recorded_at": max(now, earliest),
        "skew": max(0, earliest - now),
        "by": draft.by,
        "operation": draft.operation,
        "source_id": draft.source.id if draft.source else "",
        "engine": ENGINE,
    }
    header["hash"] = batch_hash(header)
    return header, digests


def _rows(connection: sa.Connection, draft: DraftBatch, first: int) -> list[tuple[sa.Table, Row]]:
    """All rows of a batch in order, numbered from `first`; the batch's own number is still open."""
    made: list[tuple[sa.Table, Row]] = []

    def add(table: sa.Table, row: Row) -> int:
        number = first + len(made)
        made.append((table, {"seq": number, "batch_seq": 0, "salt": os.urandom(16), **row}))
        return number

    sources = _source_numbers(connection, {c.source for c in draft.chunks})
    for facts in _new_sources(draft, sources):
        known = connection.execute(sa.select(s.source.c.seq).where(s.source.c.id == facts.id)).scalar()
        sources[facts.id] = known or add(s.source, _source_row(facts))
    for policy in draft.policies:
        add(s.policy, {"hash": policy.hash, "text": policy.text})
    for row in _entry_rows(connection, draft.entries):
        add(s.entry, row)
    for chunk in draft.chunks:
        add(s.chunk, _chunk_row(chunk, sources[chunk.source]))
    for doc in draft.documents:
        add(s.document, {"id": doc.id, "kind": doc.kind, "name": doc.name, "data": doc.data,
                         "sha": _sha(doc.data)})  # fmt: skip
    for e in draft.events:
        add(s.person_event, {"person": e.person, "event": e.event, "detail": e.detail})
    for gone in draft.erasures:
        add(s.erasure, {"removed_table": gone.table, "removed_seq": gone.seq, "removed_batch": gone.batch,
                        "removed_digest": gone.digest, "reason": gone.reason})  # fmt: skip
    return made


def _sha(data: bytes) -> bytes:
    from hashlib import sha256

    return sha256(data).digest()


def _source_numbers(connection: sa.Connection, names: Iterable[str]) -> dict[str, int]:
    found = connection.execute(sa.select(s.source.c.id, s.source.c.seq).where(s.source.c.id.in_(list(names))))
    return {str(row[0]): int(row[1]) for row in found}


def _new_sources(draft: DraftBatch, known: Mapping[str, int]) -> list[SourceFacts]:
    """The source of the batch, and a plain one for each stream of samples that no source was given for."""
    made = {draft.source.id: draft.source} if draft.source else {}
    for chunk in draft.chunks:
        if chunk.source not in known and chunk.source not in made:
            made[chunk.source] = SourceFacts("stream", chunk.source, id=chunk.source)
    return list(made.values())


def _source_row(facts: SourceFacts) -> Row:
    text = json.dumps(dict(facts.facts), sort_keys=True, ensure_ascii=False)
    return {"id": facts.id, "kind": facts.kind, "name": facts.name, "sha": facts.sha, "size": facts.size,
            "facts": text}  # fmt: skip


def _chunk_row(chunk: DraftChunk, source_seq: int) -> Row:
    b = chunk.block
    return {"episode_id": chunk.episode, "source_seq": source_seq, "channel": chunk.channel, "t0": b.t0,
            "t1": b.t1, "n": b.n, "codec": CODEC, "blob": b.blob, "sha": b.sha}  # fmt: skip


def _entry_rows(connection: sa.Connection, drafts: tuple[DraftEntry, ...]) -> list[Row]:
    wanted = {d.entry.replaces for d in drafts if d.entry.replaces}
    known = replaced_entries(connection, wanted)
    rows: list[Row] = []
    for draft in drafts:
        new = draft.entry
        check_entry(new, known.get)
        entry_id = draft.id or str(uuid4())
        known[entry_id] = Replaced(new.episode, new.channel, new.action)
        moved_from = known[new.replaces].episode if new.action is Action.MOVE else None
        rows.append(_entry_row(new, entry_id, moved_from, draft.source_recorded_at))
    return rows


def _entry_row(new: NewEntry, entry_id: str, moved_from: str | None, source_time: Instant | None) -> Row:
    if len(entry_id) > _ID_LENGTH:
        raise refuse("entry.id_too_long", value=entry_id[:80], accepted=_ID_LENGTH)
    return {
        "id": entry_id, "episode_id": new.episode, "channel": new.channel, "at": int(new.at),
        # adding 0.0 turns -0.0 to 0.0, which SQLite would do on its own and so break the digest
        "number": None if new.number is None else float(new.number) + 0.0,
        "words": new.words, "raw": new.raw, "raw_unit": new.raw_unit, "decimals": new.decimals,
        "zone": new.zone, "by": new.by, "note": new.note, "doubt": new.doubt, "action": str(new.action),
        "replaces": new.replaces or None, "reason": new.reason, "source": new.source,
        "moved_from": moved_from, "source_recorded_at": source_time,
    }  # fmt: skip


def replaced_entries(connection: sa.Connection, ids: Iterable[str]) -> dict[str, Replaced]:
    """What the store knows of the entries that are to be replaced, by id."""
    wanted = list(ids)
    e = s.entry.c
    found: dict[str, Replaced] = {}
    for start in range(0, len(wanted), _IN_LIMIT):
        some = wanted[start : start + _IN_LIMIT]
        rows = connection.execute(sa.select(e.id, e.episode_id, e.channel, e.action).where(e.id.in_(some)))
        found.update({row[0]: Replaced(row[1], row[2], row[3]) for row in rows})
    return found
