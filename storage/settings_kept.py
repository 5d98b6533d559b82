"""Layouts and drafts: kept in the store and encrypted with it, outside the ledger, changed in place.

Each carries its digest, since the chain does not cover it: one that was damaged is left out when reading, and
named by verify.
"""

from __future__ import annotations

from hashlib import sha256

import sqlalchemy as sa

from core.record.instant import Instant
from storage import facts_kept
from storage import schema as s

_REVISION = "layout_revision"


def digest(name: str, text: str) -> str:
    """The digest of a kept text under its name, as hex."""
    return sha256(f"{name}\x00{text}".encode("utf-8", "replace")).hexdigest()


def _row(name: str, text: str) -> dict[str, str]:
    return {"name": name, "text": text, "sha": digest(name, text)}


def damaged(connection: sa.Connection) -> list[tuple[str, str]]:
    """The (table, name) of layouts and drafts that are not what was kept."""
    found = []
    for table in (s.layout, s.draft):
        rows = connection.execute(sa.select(table.c.name, table.c.text, table.c.sha).order_by(table.c.name))
        found += [(table.name, str(name)) for name, text, sha in rows if sha != digest(name, text)]
    return found


def layouts(connection: sa.Connection) -> dict[str, str]:
    """Every layout's text by name, in order of name."""
    query = sa.select(s.layout.c.name, s.layout.c.text, s.layout.c.sha).order_by(s.layout.c.name)
    return {name: text for name, text, sha in connection.execute(query) if sha == digest(name, text)}


def layout_revision(connection: sa.Connection) -> int:
    """A number that rises with every change of layouts."""
    query = sa.select(s.store_facts.c.value).where(s.store_facts.c.key == _REVISION)
    return int(connection.execute(query).scalar() or 0)


def put_layout(connection: sa.Connection, name: str, text: str | None) -> None:
    """Keep a layout's text, or forget it (None)."""
    revision = layout_revision(connection) + 1
    facts_kept.put(connection, {_REVISION: str(revision)})
    connection.execute(sa.delete(s.layout).where(s.layout.c.name == name))
    if text is not None:
        connection.execute(sa.insert(s.layout), {**_row(name, text), "revision": revision})


def drafts(connection: sa.Connection) -> dict[str, str]:
    """Every draft's text by name, oldest first."""
    d = s.draft.c
    query = sa.select(d.name, d.text, d.sha).order_by(d.saved_at, d.name)
    return {name: text for name, text, sha in connection.execute(query) if sha == digest(name, text)}


def put_draft(connection: sa.Connection, name: str, text: str | None, now: Instant) -> None:
    """Keep a draft's text, or forget it (None)."""
    connection.execute(sa.delete(s.draft).where(s.draft.c.name == name))
    if text is not None:
        connection.execute(sa.insert(s.draft), {**_row(name, text), "saved_at": now})
