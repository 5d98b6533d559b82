"""Commits entries one by one, for a benchmark that counts what each costs the disk.

Run as a program: `python -m tests.support.bare_insert bare|store FOLDER COUNT`.
"""

from __future__ import annotations

import sys
from pathlib import Path
from typing import Any

from core.record.entries import NewEntry
from core.record.instant import parse
from storage.engine import raw_connection
from storage.store import Store

NOW = parse("2026-03-28T02:00:00+00:00")


def bare_table(path: Path) -> Any:
    """A table of its own in a file with the store's settings, and nothing else."""
    connection = raw_connection(path, None, mode="rwc")
    connection.execute("PRAGMA journal_mode = WAL")
    connection.execute("CREATE TABLE IF NOT EXISTS t (seq INTEGER PRIMARY KEY, at BIGINT, number FLOAT, words TEXT)")
    return connection


def bare_insert(connection: Any, i: int) -> None:
    """One row in one transaction: the least that can be done."""
    connection.execute("BEGIN IMMEDIATE")
    connection.execute("INSERT INTO t (at, number, words) VALUES (?, ?, ?)", (i, 20.0, "AB"))
    connection.execute("COMMIT")


def entry(i: int, episode: str = "E1") -> NewEntry:
    """One entry as the log strip makes it."""
    return NewEntry(episode, "rr", NOW + i, 20.0, None, "20", "/min", 0, "UTC", "AB")


def store_insert(store: Store, i: int) -> None:
    """One entry through the door."""
    store.append([entry(i)], by="AB", operation="log", now=NOW + i)


def main() -> None:
    """Commit COUNT times."""
    kind, folder, count = sys.argv[1], Path(sys.argv[2]), int(sys.argv[3])
    if kind == "bare":
        connection = bare_table(folder / "bare.db")
        for i in range(count):
            bare_insert(connection, i)
    else:
        with Store.open(folder / "ward.luff") as store:
            for i in range(count):
                store_insert(store, i)


if __name__ == "__main__":
    main()
