"""A store changed behind the program's back."""

from pathlib import Path

from storage.engine import raw_connection
from storage.triggers import expected_triggers


def tamper(path: Path, *statements: str) -> None:
    """What somebody with the key and a database program could do."""
    c = raw_connection(path, None)
    c.execute("PRAGMA foreign_keys = OFF")
    for name in expected_triggers():
        c.execute(f"DROP TRIGGER {name}")
    for statement in statements:
        c.execute(statement)
    for text in expected_triggers().values():
        c.execute(text)
    c.close()
