"""Reading a damaged store for what is left: by the driver where the file's structure is whole, else leaf by leaf."""

from __future__ import annotations

import heapq
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import sqlalchemy as sa

from storage import keys
from storage import schema as s
from storage.damaged_pages import Pages
from storage.engine import driver_errors, raw_connection
from storage.errors import StoreError, store_error
from storage.leaf_rows import LeafRows, Row, is_sound
from storage.store_file import data_key


def key_of(path: Path, passphrase: str | None) -> bytes | None:
    """The key of a store whose first page may be lost: what has no key file and holds our rows is a plain store.

    Raises:
        StoreError: as `data_key`.
    """
    try:
        return data_key(path, passphrase)
    except StoreError:
        if keys.envelope_path(path).exists():
            raise
        pages = Pages(path, None)
        try:
            if any(LeafRows(pages).numbers()):
                return None
        finally:
            pages.close()
        raise


class DamagedLedger:
    """A store's file opened for reading whatever can be read. Close it."""

    def __init__(self, path: Path, key: bytes | None) -> None:
        self.path = path
        self._connection = _sound_connection(path, key)
        self._pages = Pages(path, key) if self._connection is None else None
        self._leaves = LeafRows(self._pages) if self._pages is not None else None
        if self._leaves is not None and not any(self._leaves.numbers()) and not any(self._leaves.rows(s.batch)):
            self.close()
            raise store_error("store.damaged", path=path.name, detail="no row can be read")
        self.proved = key is not None and (self._pages is None or self._pages.proved)
        """Whether each row that can be read is what was written."""
        self.tail_is_known = self._leaves is None or not self._leaves.lost_pages
        """Whether nothing more may have been recorded: no page is lost."""
        self.top = self._top()
        """The largest sequence that is known to have been."""

    def close(self) -> None:
        """Close the file."""
        if self._connection is not None:
            self._connection.close()
        if self._pages is not None:
            self._pages.close()

    def facts(self) -> dict[str, str]:
        """The store's own facts, as far as they can be read."""
        return {row["key"]: row["value"] for row in self.kept(s.store_facts)}

    def headers(self) -> dict[int, Row]:
        """The batches that can be read, by number."""
        return {row["seq"]: row for row in self._rows(s.batch)}

    def rows(self) -> Iterator[tuple[str, Row]]:
        """Every ledger row that can be read, in order of sequence, with its table's name."""

        def named(table: sa.Table) -> Iterator[tuple[int, str, Row]]:
            for row in self._rows(table):
                yield row["seq"], table.name, row

        for _seq, name, row in heapq.merge(*(named(t) for t in s.LEDGER_ROWS), key=lambda found: found[0]):
            yield name, row

    def kept(self, table: sa.Table) -> list[Row]:
        """The rows of a table outside the ledger."""
        if self._leaves is not None:
            return self._leaves.kept(table)
        return [row for row in self._selected(table, "1") if is_sound(table, row)]

    def _rows(self, table: sa.Table) -> Iterator[Row]:
        if self._leaves is not None:
            return self._leaves.rows(table)
        return (row for row in self._selected(table, "seq") if is_sound(table, row))

    def _selected(self, table: sa.Table, order: str) -> Iterator[Row]:
        assert self._connection is not None
        names = [c.name for c in table.columns]
        columns = ", ".join(f'"{n}"' for n in names)
        for row in self._connection.execute(f'SELECT {columns} FROM "{table.name}" ORDER BY {order}'):
            yield dict(zip(names, row, strict=True))

    def _top(self) -> int:
        tops = [row["last_seq"] for row in self._rows(s.batch)]
        if self._leaves is not None:
            tops += self._leaves.numbers()
        elif self._connection is not None:
            asked = (f'SELECT max(seq) FROM "{t.name}"' for t in s.LEDGER_ROWS)
            tops += [self._connection.execute(query).fetchone()[0] or 0 for query in asked]
        return min(max(tops, default=0), self.path.stat().st_size // _LEAST_ROW_BYTES + 1)


_LEAST_ROW_BYTES = 20


def _sound_connection(path: Path, key: bytes | None) -> Any | None:
    """A connection to a file whose structure is whole; None where it is not.

    Raises:
        StoreError: `store.not_a_store` where it is whole and none of ours.
    """
    connection = None
    try:
        connection = raw_connection(path, key, mode="ro")
        connection.execute("BEGIN")  # one state to the end, though another window may still write
        tables = {row[0] for row in connection.execute("SELECT name FROM sqlite_master WHERE type = 'table'")}
        if connection.execute("PRAGMA quick_check(1)").fetchone()[0] == "ok":
            if not {s.batch.name, s.entry.name} <= tables:
                raise store_error("store.not_a_store", path=path.name)
            for table in (*s.APPEND_ONLY, s.store_facts, s.layout, s.draft):
                _read_texts(connection, table)
            return connection
    except driver_errors():
        pass  # then it is read leaf by leaf
    except StoreError:
        if connection is not None:
            connection.close()
        raise
    if connection is not None:
        connection.close()
    return None


def _read_texts(connection: Any, table: sa.Table) -> None:
    """Read every text of a table: the driver stops at one that is no text, and would hide the rows behind it."""
    columns = ", ".join(f'"{c.name}"' for c in table.columns if c.type.python_type is str)
    if columns:
        for _row in connection.execute(f'SELECT {columns} FROM "{table.name}"'):
            pass
