"""Checking a store whole: pages, chain, triggers, orphans, domain rules, derived tables. One message per finding."""

from __future__ import annotations

import heapq
from collections.abc import Callable, Iterator
from functools import partial
from hashlib import sha256
from typing import Any

import sqlalchemy as sa

from core.record.entries import Action, NewEntry
from core.record.message import Message
from storage import episode_index, facts_kept, row_proofs, rules, settings_kept
from storage import schema as s
from storage.chain import GENESIS, batch_hash, row_digest, rows_digest
from storage.chunks import decode
from storage.engine import Database, integrity_findings
from storage.errors import StoreError
from storage.triggers import trigger_findings

_Digest = tuple[int, int, str]  # sequence, batch, digest
_STEP_ROWS = 1_000
_MOST_NAMED = 3


def findings(database: Database, *, encrypted: bool, step: Callable[[], None] = lambda: None) -> tuple[Message, ...]:
    """Everything that is wrong with a store; empty when all is well. Never raises for damage: it reports it.

    `step` is called every thousand rows; what it raises stops the check.
    """
    checks = (partial(_pages, encrypted=encrypted), _facts, _triggers, partial(_chain, step=step),
              partial(_blobs, step=step), _entries, _kept, _derived)  # fmt: skip
    found: list[Message] = []
    for check in checks:
        try:
            with database.read() as connection:
                found += check(connection)
        except StoreError as error:
            values = {"path": database.path.name, **error.message.values}
            found.append(Message("verify.unreadable", values))
    return tuple(found or _proofs(database))


def _proofs(database: Database) -> list[Message]:
    """What is kept to prove rows as they are read, held against the ledger once that is known to be sound."""
    if database.is_keyed:
        return []
    try:
        with database.read() as connection:
            wrong = row_proofs.differs(connection)
    except StoreError as error:
        return [Message("verify.unreadable", {"path": database.path.name, **error.message.values})]
    return [] if wrong is None else [Message("verify.derived", {"table": "cache", "episode": wrong, "count": 1})]


def chain_is_whole(connection: sa.Connection) -> bool:
    """Whether every row of the ledger is as its chain says."""
    return not _chain(connection, lambda: None)


def _pages(connection: sa.Connection, *, encrypted: bool) -> list[Message]:
    texts = integrity_findings(connection, encrypted=encrypted)
    return [Message("verify.pages", {"detail": text}) for text in texts]


def _triggers(connection: sa.Connection) -> list[Message]:
    found = trigger_findings(connection)
    return [Message("verify.trigger", {"name": name, "what": what}) for name, what in found]


def _facts(connection: sa.Connection) -> list[Message]:
    wrong = facts_kept.problem(facts_kept.read(connection))
    return [Message("verify.facts")] if wrong else []


def _kept(connection: sa.Connection) -> list[Message]:
    found = settings_kept.damaged(connection)
    return [Message("verify.kept", {"table": table, "name": name}) for table, name in found]


def _chain(connection: sa.Connection, step: Callable[[], None]) -> list[Message]:
    """Walk the chain; name its first broken link, and rows that no batch owns."""
    found: list[Message] = []
    rows = _stepping(_row_digests(connection), step)
    pending = next(rows, None)
    hash_before, seq_before, time_before = GENESIS, 0, None
    headers = connection.execute(sa.select(s.batch).order_by(s.batch.c.seq)).mappings()
    for number, header in enumerate(map(dict, headers), start=1):
        own: list[_Digest] = []
        while pending is not None and pending[0] <= header["last_seq"]:
            own.append(pending)
            pending = next(rows, None)
        wrong = _link(header, own, hash_before, seq_before, number)
        if wrong is None and time_before is not None and header["recorded_at"] < time_before:
            wrong = "recorded_at"
        if wrong:
            where = _where(connection, header)
            found.append(Message("verify.chain", {"batch": header["seq"], "what": wrong, **where}))
            return found
        hash_before, seq_before, time_before = header["hash"], header["last_seq"], header["recorded_at"]
    if pending is not None:
        found.append(Message("verify.orphan", {"seq": pending[0], "batch": pending[1]}))
    return found


def _stepping(rows: Iterator[_Digest], step: Callable[[], None]) -> Iterator[_Digest]:
    for number, row in enumerate(rows):
        if number % _STEP_ROWS == 0:
            step()
        yield row


def _where(connection: sa.Connection, header: dict[str, Any]) -> dict[str, Any]:
    """What a person can look for: when the batch was recorded, by whom, and of which episodes it is."""
    rows = sa.union(*(sa.select(t.c.episode_id).where(t.c.batch_seq == header["seq"]) for t in (s.entry, s.chunk)))
    episodes = sorted(str(r[0]) for r in connection.execute(rows))
    more = [f"and {len(episodes) - _MOST_NAMED} more"] if len(episodes) > _MOST_NAMED else []
    at = header["recorded_at"]
    return {"at": at if isinstance(at, int) else None, "by": str(header["by"]) or None,
            "episodes": ", ".join(episodes[:_MOST_NAMED] + more) or None}  # fmt: skip


def _link(header: dict[str, Any], own: list[_Digest], hash_before: str, seq_before: int, number: int) -> str | None:
    """What is wrong with one link of the chain, or None."""
    if header["seq"] != number:
        return "missing_batch"
    if header["prev_hash"] != hash_before:
        return "previous_hash"
    if batch_hash(header) != header["hash"]:
        return "batch_facts"
    expected = list(range(header["first_seq"], header["last_seq"] + 1))
    if header["first_seq"] != seq_before + 1 or [d[0] for d in own] != expected:
        return "missing_rows"
    if any(d[1] != header["seq"] for d in own):
        return "rows_of_another_batch"
    return None if rows_digest(d[2] for d in own) == header["digest"] else "rows_changed"


def _row_digests(connection: sa.Connection) -> Iterator[_Digest]:
    """The digest of every row of the ledger, in order of sequence, those of erased rows among them."""
    erased = sa.select(s.erasure.c.removed_seq, s.erasure.c.removed_batch, s.erasure.c.removed_digest)
    streams: list[Iterator[_Digest]] = [_table_digests(connection, t) for t in s.LEDGER_ROWS]
    streams.append((r[0], r[1], r[2]) for r in connection.execute(erased.order_by(s.erasure.c.removed_seq)))
    return heapq.merge(*streams)


def _table_digests(connection: sa.Connection, table: sa.Table) -> Iterator[_Digest]:
    columns = [c for c in table.columns if c.name not in ("blob", "data")]
    for row in connection.execute(sa.select(*columns).order_by(table.c.seq)).mappings():
        yield row["seq"], row["batch_seq"], _safe_digest(table.name, dict(row))


def _safe_digest(table: str, row: dict[str, Any]) -> str:
    try:
        return row_digest(table, row)
    except (ValueError, TypeError, UnicodeError):
        return sha256(b"unreadable").hexdigest()


def _blobs(connection: sa.Connection, step: Callable[[], None]) -> list[Message]:
    found: list[Message] = []
    for row in connection.execute(sa.select(s.chunk).order_by(s.chunk.c.seq)).mappings():
        step()
        try:
            t, _v, _d = decode(bytes(row["blob"]), row["t0"], bytes(row["sha"]))
            whole = t.size == row["n"] and int(t[0]) == row["t0"] and int(t[-1]) == row["t1"]
        except (StoreError, TypeError):
            whole = False
        if not whole:
            found.append(Message("verify.chunk", {"seq": row["seq"], "episode": row["episode_id"],
                                                  "channel": row["channel"]}))  # fmt: skip
    for seq, doc_id, data, digest in connection.execute(
        sa.select(s.document.c.seq, s.document.c.id, s.document.c.data, s.document.c.sha)
    ):
        if sha256(bytes(data)).digest() != bytes(digest):
            found.append(Message("verify.document", {"seq": seq, "id": doc_id}))
    return found


def _entries(connection: sa.Connection) -> list[Message]:
    """Every entry against the rules it was taken by, its replaced entry older than itself."""
    found: list[Message] = []
    known: dict[str, rules.Replaced] = {}
    erased = connection.execute(sa.select(s.erasure.c.seq).limit(1)).first() is not None
    for row in connection.execute(sa.select(s.entry).order_by(s.entry.c.seq)).mappings():
        wrong = _entry_problem(row, known)
        if wrong == "entry.replaces_unknown" and erased:
            wrong = ""  # it may have replaced an entry that was removed
        if wrong:
            found.append(Message("verify.entry", {"seq": row["seq"], "what": wrong}))
        known[row["id"]] = rules.Replaced(row["episode_id"], row["channel"], row["action"])
    return found


def _entry_problem(row: Any, known: dict[str, rules.Replaced]) -> str:
    try:
        new = NewEntry(
            row["episode_id"], row["channel"], row["at"], row["number"], row["words"], row["raw"],
            row["raw_unit"], row["decimals"], row["zone"], row["by"], row["note"], row["doubt"],
            Action(row["action"]), row["replaces"] or "", row["reason"], row["source"],
        )  # fmt: skip
        error = rules.problem(new, known.get)
    except (ValueError, TypeError) as wrong:
        return str(wrong)[:200]
    return error.message.key if error else ""


def _derived(connection: sa.Connection) -> list[Message]:
    """Derived tables must be what the ledger makes them."""
    kept, made = episode_index.kept(connection), episode_index.rebuilt(connection)
    if kept == made:
        return []
    old = {row["episode_id"]: row for row in kept}
    new = {row["episode_id"]: row for row in made}
    wrong = sorted(str(k) for k in old.keys() | new.keys() if old.get(k) != new.get(k))
    return [Message("verify.derived", {"table": "episode_now", "episode": wrong[0], "count": len(wrong)})]
