"""The store's own facts: its format, its id, what it is an archive of. Outside the ledger, so they carry a digest.

What a person decides stands in the chain as an event and not here.
"""

from __future__ import annotations

import json
from collections.abc import Mapping
from hashlib import sha256

import sqlalchemy as sa

from storage import schema as s

DIGEST = "digest"
_BEFORE_DIGESTS = frozenset(
    {"format", "readable_from", "store_id", "imported", "created_at", "created_by", "archive_of", "archive",
     "layout_revision", "retention_days"}
)  # fmt: skip
"""What a store could hold before facts had a digest: one without it holds nothing else."""


def digest(facts: Mapping[str, str]) -> str:
    """The digest of all facts, as hex."""
    text = json.dumps(sorted((k, v) for k, v in facts.items() if k != DIGEST))
    return sha256(text.encode("utf-8", "replace")).hexdigest()


def problem(facts: Mapping[str, str]) -> str:
    """What is wrong with a store's facts: `changed`, or "" where they are what was kept."""
    if DIGEST in facts:
        return "" if facts[DIGEST] == digest(facts) else "changed"
    return "changed" if facts.keys() - _BEFORE_DIGESTS else ""


def read(connection: sa.Connection) -> dict[str, str]:
    """Every fact by its key."""
    rows = connection.execute(sa.select(s.store_facts.c.key, s.store_facts.c.value))
    return {str(k): str(v) for k, v in rows}


def put(connection: sa.Connection, new: Mapping[str, str]) -> None:
    """Keep facts, each in place of the one before, and the digest of them all."""
    facts = read(connection) | dict(new)
    facts[DIGEST] = digest(facts)
    changed = {*new, DIGEST}
    connection.execute(sa.delete(s.store_facts).where(s.store_facts.c.key.in_(changed)))
    connection.execute(sa.insert(s.store_facts), [{"key": k, "value": facts[k]} for k in sorted(changed)])
