"""Reading a damaged store for what is left: every row that can be read, found by halves around those that cannot."""

from __future__ import annotations

import heapq
from collections.abc import Iterator, Mapping
from pathlib import Path
from typing import Any

import sqlalchemy as sa

from storage import schema as s
from storage.engine import driver_errors, raw_connection
from storage.errors import store_error, translated

Row = dict[str, Any]
_PAGE = 512
_LEAST_ROW_BYTES = 20


class DamagedLedger:
    """A store's file opened for reading whatever can be read. Close it."""

    def __init__(self, path: Path, key: bytes | None) -> None:
        self.path, self._key = path, key
        self._connection = _opened(path, key)
        self.top_is_known = True
        """Whether every table told its last row; else there may have been more."""
        self.top = self._top()

    def close(self) -> None:
        """Close the file."""
        self._connection.close()

    def facts(self) -> dict[str, str]:
        """The store's own facts, as far as they can be read."""
        found = self._ask("SELECT key, value FROM store_facts")
        return {str(k): str(v) for k, v in found or ()}

    def _ask(self, query: str, values: tuple[int, ...] = ()) -> list[Any] | None:
        """What a query gives; None where a page fails. The driver answers nothing more over a connection that met a
        bad page, so the next question gets a new one."""
        try:
            return list(self._connection.execute(query, values).fetchall())
        except driver_errors():
            self._connection.close()
            self._connection = _opened(self.path, self._key)
            return None

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
        """The rows of a table outside the ledger; none where it cannot be read to its end."""
        names = [c.name for c in table.columns]
        found = self._ask(f'SELECT {_list(names)} FROM "{table.name}"')
        return [dict(zip(names, row, strict=True)) for row in found or ()]

    def _rows(self, table: sa.Table) -> Iterator[Row]:
        start = 1
        while start <= self.top:
            yield from self._between(table, start, min(start + _PAGE - 1, self.top))
            start += _PAGE

    def _between(self, table: sa.Table, low: int, high: int) -> Iterator[Row]:
        """Rows from `low` to `high`; where reading fails, each half alone, down to the one row that is lost."""
        names = [c.name for c in table.columns]
        query = f'SELECT {_list(names)} FROM "{table.name}" WHERE seq BETWEEN ? AND ? ORDER BY seq'
        found = self._ask(query, (low, high))
        if found is None:
            if low == high:
                return
            middle = (low + high) // 2
            yield from self._between(table, low, middle)
            yield from self._between(table, middle + 1, high)
            return
        for row in found:
            made = dict(zip(names, row, strict=True))
            if _is_sound(table, made):
                yield made

    def _top(self) -> int:
        """The largest sequence there may be: the largest that any table can tell, else what the file could hold."""
        tops: list[int] = []
        asked = [("last_seq", s.batch.name), *(("seq", t.name) for t in s.LEDGER_ROWS)]
        for column, table in asked:
            found = self._ask(f'SELECT max("{column}") FROM "{table}"')
            if found and isinstance(found[0][0], int):
                tops.append(found[0][0])
            elif found is None:
                self.top_is_known = False
        most = self.path.stat().st_size // _LEAST_ROW_BYTES
        return min(max(tops), most) if tops else 0 if self.top_is_known else most


def _list(names: list[str]) -> str:
    return ", ".join(f'"{n}"' for n in names)


def _is_sound(table: sa.Table, row: Mapping[str, Any]) -> bool:
    """Whether every value is of the kind its column holds: damage in a plain file can leave others."""
    for column in table.columns:
        value, kind = row[column.name], column.type.python_type
        if value is None:
            if not column.nullable:
                return False
        elif kind is float:
            if not isinstance(value, float | int):
                return False
        elif not isinstance(value, kind):
            return False
    return True


def _opened(path: Path, key: bytes | None) -> Any:
    """A connection that can read at least the schema; its journal is left out where it stands in the way."""
    failed: BaseException | None = None
    for mode in ("ro", "immutable"):
        connection = None
        try:
            connection = raw_connection(path, key, mode=mode)
            query = "SELECT count(*) FROM sqlite_master WHERE name IN ('batch', 'entry')"
            ours = connection.execute(query).fetchone()[0] == 2
        except driver_errors() as error:
            failed = failed or error
            if connection is not None:
                connection.close()
        else:
            if ours:
                return connection
            connection.close()
            raise store_error("store.not_a_store", path=path.name)
    assert failed is not None
    raise translated(failed, path) from failed
