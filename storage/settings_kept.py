"""Layouts and drafts: kept in the store and encrypted with it, outside the ledger, changed in place."""

from __future__ import annotations

import sqlalchemy as sa

from core.record.instant import Instant
from storage import schema as s

_REVISION = "layout_revision"


def layouts(connection: sa.Connection) -> dict[str, str]:
    """Every layout's text by name, in order of name."""
    query = sa.select(s.layout.c.name, s.layout.c.text).order_by(s.layout.c.name)
    return {row[0]: row[1] for row in connection.execute(query)}


def layout_revision(connection: sa.Connection) -> int:
    """A number that rises with every change of layouts."""
    query = sa.select(s.store_facts.c.value).where(s.store_facts.c.key == _REVISION)
    return int(connection.execute(query).scalar() or 0)


def put_layout(connection: sa.Connection, name: str, text: str | None) -> None:
    """Keep a layout's text, or forget it (None)."""
    revision = layout_revision(connection) + 1
    connection.execute(sa.delete(s.store_facts).where(s.store_facts.c.key == _REVISION))
    connection.execute(sa.insert(s.store_facts), {"key": _REVISION, "value": str(revision)})
    connection.execute(sa.delete(s.layout).where(s.layout.c.name == name))
    if text is not None:
        connection.execute(sa.insert(s.layout), {"name": name, "text": text, "revision": revision})


def drafts(connection: sa.Connection) -> dict[str, str]:
    """Every draft's text by name, oldest first."""
    query = sa.select(s.draft.c.name, s.draft.c.text).order_by(s.draft.c.saved_at, s.draft.c.name)
    return {row[0]: row[1] for row in connection.execute(query)}


def put_draft(connection: sa.Connection, name: str, text: str | None, now: Instant) -> None:
    """Keep a draft's text, or forget it (None)."""
    connection.execute(sa.delete(s.draft).where(s.draft.c.name == name))
    if text is not None:
        connection.execute(sa.insert(s.draft), {"name": name, "text": text, "saved_at": now})
