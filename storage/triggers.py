"""Append-only triggers on the ledger's tables. They stop accidents; the hash chain shows intent.

A row may be removed only after an erasure row keeps its digest; no row may ever be changed.
"""

from __future__ import annotations

import sqlalchemy as sa

from storage.schema import APPEND_ONLY, LEDGER_ROWS, erasure

_ERASABLE = frozenset(t.name for t in LEDGER_ROWS) - {erasure.name}


def expected_triggers() -> dict[str, str]:
    """Every trigger by its name, as the text that makes it."""
    made: dict[str, str] = {}
    for table in (t.name for t in APPEND_ONLY):
        made[f"no_update_{table}"] = (
            f'CREATE TRIGGER no_update_{table} BEFORE UPDATE ON "{table}" '
            f"BEGIN SELECT RAISE(ABORT, 'the ledger is append-only'); END"
        )
        unless = (
            f" WHEN NOT EXISTS (SELECT 1 FROM erasure WHERE removed_seq = OLD.seq AND removed_table = '{table}')"
            if table in _ERASABLE
            else ""
        )
        made[f"no_delete_{table}"] = (
            f'CREATE TRIGGER no_delete_{table} BEFORE DELETE ON "{table}"{unless} '
            f"BEGIN SELECT RAISE(ABORT, 'the ledger is append-only'); END"
        )
    return made


def create_triggers(connection: sa.Connection) -> None:
    """Make all triggers in a new store."""
    for text in expected_triggers().values():
        connection.exec_driver_sql(text)


def trigger_findings(connection: sa.Connection) -> list[tuple[str, str]]:
    """Triggers that are missing, changed or unknown, as (name, what is wrong)."""
    rows = connection.exec_driver_sql("SELECT name, sql FROM sqlite_master WHERE type = 'trigger'")
    present = {str(name): " ".join(str(text).split()) for name, text in rows}
    expected = {name: " ".join(text.split()) for name, text in expected_triggers().items()}
    found = [(name, "missing") for name in expected if name not in present]
    found += [(n, "changed") for n, text in present.items() if n in expected and text != expected[n]]
    found += [(name, "unknown") for name in present if name not in expected]
    return sorted(found)
