"""Rows read straight from the leaves of a damaged file: which table a row is of is told by the shape of its values.

The schema is fixed, so no page that names the tables is needed, nor those that lead from a table to its leaves. The
form of a page is that of the SQLite file format (sqlite.org/fileformat2.html, sections 1.6 and 2.1).
"""

from __future__ import annotations

import struct
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

import sqlalchemy as sa

from storage import schema as s
from storage.damaged_pages import Pages

Row = dict[str, Any]
_LEAF, _OTHERS = 0x0D, frozenset({0x02, 0x05, 0x0A})
_FILE_HEADER = 100
_SCHEMA_WORDS = ("table", "index", "trigger", "view")
_WITHOUT_NUMBER = (s.store_facts, s.layout, s.draft, s.episode_now)
_LEAST_MOMENT = 10**9
_FLOATS = {t.name: [c.name for c in t.columns if isinstance(c.type, sa.Float)] for t in s.metadata.sorted_tables}
_REAL, _TEXT_FROM = 7, 12
_FIXED = {0: 0, 1: 1, 2: 2, 3: 3, 4: 4, 5: 6, 6: 8, _REAL: 8, 8: 0, 9: 0}
"""Bytes of a value by its kind: NULL, integers, a real, the constants 0 and 1. Texts and blobs tell their length."""


@dataclass(frozen=True, slots=True)
class _Place:
    page: int
    offset: int


class LeafRows:
    """Every row that any readable leaf holds, by table; ledger rows by their number."""

    def __init__(self, pages: Pages) -> None:
        self._pages = pages
        self._places: dict[str, dict[int, _Place]] = {t.name: {} for t in s.APPEND_ONLY}
        self._others: dict[str, list[Row]] = {t.name: [] for t in _WITHOUT_NUMBER}
        self._overflow: set[int] = set()
        self.lost_pages = 0
        """Pages that cannot be read, or are none of this file's: they may have held rows."""
        self._look_through()

    def rows(self, table: sa.Table) -> Iterator[Row]:
        """The rows of a ledger table in order of their number."""
        found = self._places[table.name]
        for number in sorted(found):
            place = found[number]
            content = self._pages.page(place.page)
            assert content is not None
            named = _named(*_Cells(self._pages, self._overflow).record(content, place.offset))
            assert named is not None
            yield named[1]

    def kept(self, table: sa.Table) -> list[Row]:
        """The rows of a table outside the ledger."""
        return self._others[table.name]

    def numbers(self) -> Iterator[int]:
        """Every number that a ledger row carries."""
        for table in s.LEDGER_ROWS:
            yield from self._places[table.name]

    def _look_through(self) -> None:
        blank: list[int] = []
        strange: list[int] = []
        for number in range(1, self._pages.count + 1):
            content = self._pages.page(number)
            if content is None:
                self.lost_pages += 1
                continue
            start = _FILE_HEADER if number == 1 else 0
            if content[start] == _LEAF:
                if not self._leaf(number, content, start):
                    strange.append(number)
            elif content[start] not in _OTHERS:
                (blank if content[start] == 0 else strange).append(number)
        self.lost_pages += sum(n not in self._overflow for n in strange)
        unused = sum(n not in self._overflow for n in blank)
        self.lost_pages += max(0, unused - self._free_pages())

    def _free_pages(self) -> int:
        """How many pages the file's head says are free: these are blank on purpose."""
        first = self._pages.page(1)
        return 0 if first is None else int(struct.unpack(">I", first[36:40])[0])

    def _leaf(self, number: int, content: bytes, start: int) -> bool:
        """Take the rows of a leaf; whether all of it made sense."""
        (cells,) = struct.unpack(">H", content[start + 3 : start + 5])
        whole = True
        for i in range(min(cells, self._pages.usable // 4)):
            at = start + 8 + 2 * i
            (offset,) = struct.unpack(">H", content[at : at + 2])
            try:
                record = _Cells(self._pages, self._overflow).record(content, offset)
            except (IndexError, ValueError, struct.error):
                whole = False
                continue
            named = _named(*record)
            if named is not None:
                self._take(named[0], named[1], _Place(number, offset))
            elif not _is_of_the_file(record[1]):
                whole = False
        return whole

    def _take(self, table: str, row: Row, place: _Place) -> None:
        if table in self._places:
            self._places[table].setdefault(row["seq"], place)
        elif table in self._others:
            self._others[table].append(row)


class _Cells:
    """Reads cells of table leaves, with what of them overflows into other pages."""

    def __init__(self, pages: Pages, visited: set[int]) -> None:
        self._pages, self._visited = pages, visited

    def record(self, content: bytes, offset: int) -> tuple[int, list[Any]]:
        """The (row number, values) of a cell.

        Raises:
            IndexError, ValueError, struct.error: it is none.
        """
        length, at = _varint(content, offset)
        number, at = _varint(content, at)
        usable = self._pages.usable
        local = _local(length, usable)
        if not 0 < length <= self._pages.count * usable or at + local > usable:
            raise ValueError("length")
        head, kinds = _kinds(content[at : at + local])
        if head + sum(_width(k) for k in kinds) != length:  # known before any other page is followed
            raise ValueError("length")
        return number, _values(self._payload(content, at, length, local), head, kinds)

    def _payload(self, content: bytes, at: int, length: int, local: int) -> bytes:
        usable = self._pages.usable
        parts = [content[at : at + local]]
        if local == length:
            return parts[0]
        (following,) = struct.unpack(">I", content[at + local : at + local + 4])
        left = length - local
        while left > 0:
            page = self._pages.page(following) if 0 < following <= self._pages.count else None
            if page is None:
                raise ValueError("overflow")
            self._visited.add(following)
            parts.append(page[4 : 4 + min(left, usable - 4)])
            left -= len(parts[-1])
            (following,) = struct.unpack(">I", page[:4])
        return b"".join(parts)


def _local(length: int, usable: int) -> int:
    """How much of a payload stands on the leaf itself."""
    most, least = usable - 35, (usable - 12) * 32 // 255 - 23
    if length <= most:
        return length
    kept = least + (length - least) % (usable - 4)
    return kept if kept <= most else least


def _varint(data: bytes, at: int) -> tuple[int, int]:
    value = 0
    for i in range(8):
        byte = data[at + i]
        value = value << 7 | byte & 0x7F
        if byte < 0x80:
            return value, at + i + 1
    value = value << 8 | data[at + 8]
    return value - (1 << 64) if value >= 1 << 63 else value, at + 9


def _kinds(payload: bytes) -> tuple[int, list[int]]:
    """The length of a record's head, and the kind of each of its values."""
    size, at = _varint(payload, 0)
    kinds = []
    while at < size:
        kind, at = _varint(payload, at)
        kinds.append(kind)
    if at != size:
        raise ValueError("head")
    return size, kinds


def _width(kind: int) -> int:
    if kind in _FIXED:
        return _FIXED[kind]
    if kind < _TEXT_FROM:
        raise ValueError("kind")
    return (kind - _TEXT_FROM) // 2


def _values(payload: bytes, at: int, kinds: Sequence[int]) -> list[Any]:
    made: list[Any] = []
    for kind in kinds:
        end = at + _width(kind)
        made.append(_value(payload[at:end], kind))
        at = end
    return made


def _value(data: bytes, kind: int) -> Any:
    if kind >= _TEXT_FROM:
        return data.decode("utf-8") if kind % 2 else data
    if kind == _REAL:
        return struct.unpack(">d", data)[0]
    if kind in (8, 9):
        return kind - 8
    return None if kind == 0 else int.from_bytes(data, "big", signed=True)


def _named(number: int, values: Sequence[Any]) -> tuple[str, Row] | None:
    """The table that a record is of, and its row by column; None where it fits none of them."""
    for table in (*s.APPEND_ONLY, *_WITHOUT_NUMBER):
        names = [c.name for c in table.columns]
        if len(values) > len(names):
            continue
        row = dict(zip(names, [*values, *[None] * (len(names) - len(values))], strict=True))
        for name in _FLOATS[table.name]:
            row[name] = float(row[name]) if type(row[name]) is int else row[name]  # whole ones are kept as integers
        if table not in _WITHOUT_NUMBER:
            if row["seq"] is not None or number < 1:
                continue
            row["seq"] = number
        if is_sound(table, row) and _fits(table, row):
            return table.name, row
    return None


def _fits(table: sa.Table, row: Mapping[str, Any]) -> bool:
    """Layouts and drafts have the same shape: the one counts changes, the other holds a moment."""
    if table is s.layout:
        return bool(0 < row["revision"] < _LEAST_MOMENT)
    return table is not s.draft or row["saved_at"] == 0 or row["saved_at"] >= _LEAST_MOMENT


def _is_of_the_file(values: Sequence[Any]) -> bool:
    """Whether a record is none of ours and has its place all the same: schema, migration, statistics, cache."""
    return len(values) <= 3 or values[0] in _SCHEMA_WORDS


def is_sound(table: sa.Table, row: Mapping[str, Any]) -> bool:
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
