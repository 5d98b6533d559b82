"""Documents and policies as the chain keeps them."""

from __future__ import annotations

from dataclasses import dataclass
from hashlib import sha256

import sqlalchemy as sa

from core.record.instant import Instant
from storage import schema as s
from storage.errors import store_error


@dataclass(frozen=True, slots=True)
class DocumentFacts:
    """What is known of a kept document without reading it."""

    id: str
    kind: str
    name: str
    size: int
    sha: str
    by: str
    recorded_at: Instant
    seq: int
    facts: str = ""
    """What it is of, as its maker wrote it down with it; "" where nothing was."""


def listed(connection: sa.Connection) -> tuple[DocumentFacts, ...]:
    """Every document's facts, in order."""
    d, b, e = s.document.c, s.batch.c, s.person_event.c
    said = sa.and_(e.batch_seq == d.batch_seq, e.event == d.kind)
    query = (
        sa.select(d.id, d.kind, d.name, sa.func.length(d.data), d.sha, b.by, b.recorded_at, d.seq, e.detail)
        .select_from(s.document.join(s.batch, d.batch_seq == b.seq).outerjoin(s.person_event, said))
        .order_by(d.seq)
    )
    return tuple(
        DocumentFacts(r[0], r[1], r[2], r[3], bytes(r[4]).hex(), r[5], r[6], r[7], r[8] or "")
        for r in connection.execute(query)
    )


def data(connection: sa.Connection, document_id: str) -> bytes:
    """A document's bytes, checked against their digest.

    Raises:
        StoreError: `document.unknown`, `document.damaged`.
    """
    query = sa.select(s.document.c.data, s.document.c.sha).where(s.document.c.id == document_id)
    row = connection.execute(query).first()
    if row is None:
        raise store_error("document.unknown", value=document_id)
    if sha256(row[0]).digest() != bytes(row[1]):
        raise store_error("document.damaged", value=document_id)
    return bytes(row[0])


@dataclass(frozen=True, slots=True)
class KeptPolicy:
    """A policy that was put in force: its text, the hash it was kept under, by whom and when."""

    hash: str
    text: str
    by: str
    recorded_at: Instant
    seq: int


def policies(connection: sa.Connection, head: int) -> tuple[KeptPolicy, ...]:
    """Every policy that was put in force up to a sequence, the newest first."""
    p, b = s.policy.c, s.batch.c
    query = (
        sa.select(p.hash, p.text, b.by, b.recorded_at, p.seq)
        .join_from(s.policy, s.batch, p.batch_seq == b.seq)
        .where(p.seq <= head)
        .order_by(p.seq.desc())
    )
    return tuple(KeptPolicy(str(r[0]), str(r[1]), str(r[2]), int(r[3]), int(r[4])) for r in connection.execute(query))


def policy(connection: sa.Connection, head: int) -> tuple[str, str] | None:
    """The (hash, text) of the newest policy up to a sequence."""
    p = s.policy.c
    row = connection.execute(sa.select(p.hash, p.text).where(p.seq <= head).order_by(p.seq.desc()).limit(1)).first()
    return (str(row[0]), str(row[1])) if row else None
