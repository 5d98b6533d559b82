"""A table of any kind, opened: its header, its first rows, and its rows block by block."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass
from pathlib import Path
from typing import Protocol

from storage.intake.findings import unreadable
from storage.intake.spreadsheet import SheetTable, Workbook
from storage.intake.table_dialect import HEAD, Dialect, column_names, header_line, text_dialect
from storage.intake.table_text import RowBlock, TextTable
from storage.intake.writing import AS_FOUND, Writing, check_writing

FIRST_ROWS = 200
"""Rows looked at for proposals and the preview."""
MOST_COLUMNS = 500


class Blocks(Protocol):
    """Blocks of rows, the header's row first, with the digest and size of what was read."""

    @property
    def sha(self) -> str: ...

    @property
    def size(self) -> int: ...

    def __iter__(self) -> Iterator[RowBlock]: ...


@dataclass(frozen=True, slots=True)
class Table:
    """What a table's beginning shows. `first` are its first rows, as wide as the header, with their lines."""

    path: Path
    dialect: Dialect
    header: tuple[str, ...]
    first: tuple[tuple[int, tuple[str, ...]], ...]
    sheets: tuple[str, ...] = ()
    book: Workbook | None = None

    def column(self, name: str) -> tuple[str, ...]:
        """The first values of a column, empty ones left out; none where there is no such column."""
        if name not in self.header:
            return ()
        i = self.header.index(name)
        return tuple(row[i] for _line, row in self.first if row[i])

    def blocks(
        self, progress: Callable[[int, int], None] | None = None, cancelled: Callable[[], bool] | None = None
    ) -> Blocks:
        """All rows from the header on."""
        if self.book is not None:
            return SheetTable(self.book, self.dialect.sheet, self.dialect.header_line, progress, cancelled,
                              self.path.name)  # fmt: skip
        return TextTable(self.path, self.dialect, progress, cancelled)


def open_table(path: Path | str, said: Writing = AS_FOUND, book: Workbook | None = None) -> Table:
    """Look at a table's beginning. What a person says of how it is written beats what is found.

    `book` is the spreadsheet, where it was opened already.

    Raises:
        UnreadableFileError: it is no table, or one that cannot be read safely.
        RecordError: what is said of it cannot be.
        OSError: it cannot be opened.
    """
    check_writing(said)
    file = Path(path)
    if book is not None:
        return _open_sheet(file, book, said)
    with file.open("rb") as stream:
        head = stream.read(HEAD)
    if head.startswith(b"\xd0\xcf\x11\xe0"):
        raise unreadable(1, file.name, "sheet.old_format", accepted="XLSX, ODS or CSV")
    if head.startswith(b"PK\x03\x04"):
        return _open_sheet(file, Workbook(file), said)
    dialect = text_dialect(head, is_whole=len(head) < HEAD, said=said)
    rows: list[list[str]] = []
    lines: list[int] = []
    for block in TextTable(file, dialect):
        rows += block.as_rows()
        lines += block.lines
        if len(rows) > FIRST_ROWS:
            break
    return _begun(file, dialect, rows[: FIRST_ROWS + 1], lines)


def _open_sheet(file: Path, book: Workbook, said: Writing) -> Table:
    name = said.sheet or next(iter(book.sheets), "")
    numbers: list[int] = []
    rows: list[list[str]] = []
    first = 1
    for number, cells in book.rows(name) if said.header_line == 0 else ():
        rows.append(cells)
        first = number - len(rows) + 1
        if len(rows) > 60:
            break
    header = said.header_line or header_line(rows) + first - 1
    rows = []
    for number, cells in book.rows(name, header):
        if any(cells):
            rows.append(cells)
            numbers.append(number)
        if len(rows) > FIRST_ROWS:
            break
    return _begun(file, Dialect("", "", header, name), rows, numbers, book)


def _begun(
    file: Path, dialect: Dialect, rows: list[list[str]], lines: list[int], book: Workbook | None = None
) -> Table:
    if len(rows) < 2:
        accepted = "a header and rows; of a log: episode,at,channel,value,unit,by,note"
        raise unreadable(dialect.header_line, file.name, "table.no_rows", accepted=accepted)
    header = column_names(_without_tail(rows[0]))
    if len(header) > MOST_COLUMNS:
        raise unreadable(dialect.header_line, str(len(header)), "table.too_wide", accepted=MOST_COLUMNS)
    width = len(header)
    first = tuple((line, tuple(fitted(cells, width))) for line, cells in zip(lines[1:], rows[1:], strict=False))
    return Table(file, dialect, header, first, book.sheets if book else (), book)


def _without_tail(cells: list[str]) -> list[str]:
    end = len(cells)
    while end and not cells[end - 1].strip():
        end -= 1
    return cells[:end]


def fitted(cells: list[str], width: int) -> list[str]:
    """A row as wide as the header: empty cells at its end are added or taken away; more is left for the reader.

    >>> fitted(["a", ""], 1), fitted(["a"], 2)
    (['a'], ['a', ''])
    """
    cells = [c.strip() for c in cells]
    while len(cells) > width and not cells[-1]:
        cells.pop()
    return cells + [""] * (width - len(cells))
