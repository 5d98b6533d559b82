"""Reads sheets of XLSX and ODS through calamine, after a guard has looked through the file."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from datetime import date, datetime, time, timedelta
from io import BytesIO
from pathlib import Path
from typing import Any

from core.record.message import refuse
from storage.intake.findings import unreadable
from storage.intake.sheet_formats import GENERAL, number_as_shown
from storage.intake.spreadsheet_guard import Scan, guarded_copy
from storage.intake.steady_file import read_bounded
from storage.intake.table_text import RowBlock

MOST = 64 << 20
"""Bytes of a spreadsheet file as it lies on the disk."""
_ROWS = 5_000


class Workbook:
    """A spreadsheet, opened safely.

    Raises:
        UnreadableFileError: `sheet.*`, `file.*`.
        OSError: it cannot be read.
    """

    def __init__(self, path: Path) -> None:
        from python_calamine import CalamineError, CalamineWorkbook

        data, self.sha = read_bounded(path, MOST)
        self.size = len(data)
        copy, self._scan = guarded_copy(BytesIO(data))
        self.without_format: dict[int, int] = {}
        """By column (from 0) the least decimals of numbers whose cells have no format that says them."""
        try:
            self._book = CalamineWorkbook.from_filelike(copy)
        except (CalamineError, OSError, ValueError) as error:
            detail = str(error).splitlines()[0][:120] if str(error) else type(error).__name__
            raise unreadable(0, path.name, "sheet.damaged", detail=detail, accepted="XLSX or ODS") from None

    @property
    def sheets(self) -> tuple[str, ...]:
        """The names of the sheets, in order."""
        return tuple(self._book.sheet_names)

    @property
    def scan(self) -> Scan:
        """What the guard found."""
        return self._scan

    def rows(self, sheet: str, first_line: int = 1) -> Iterator[tuple[int, list[str]]]:
        """The rows of a sheet from a line on, as texts, each with its number as the spreadsheet shows it.

        Raises:
            UnreadableFileError: `sheet.unknown`, `sheet.merged`.
        """
        from python_calamine import CalamineError

        if sheet not in self.sheets:
            raise unreadable(0, sheet[:80], "sheet.unknown", accepted=" | ".join(self.sheets)[:400])
        try:
            found = self._book.get_sheet_by_name(sheet)
            left = found.start[1] if found.start else 0
            shown = self._scan.formats.of_sheet(sheet, self.sheets.index(sheet) + 1)
            merged = self._merged_rows(found) | self._merged_in_ods(sheet)
            for number, cells in enumerate(found.iter_rows(), 1):  # empty rows above are among them
                if number < first_line:
                    continue
                if number in merged:
                    raise unreadable(number, merged[number], "sheet.merged", accepted="one value per cell")
                decimals = shown.row(number)
                yield number, [self._text(i, c, decimals.get(left + i + 1, GENERAL)) for i, c in enumerate(cells)]
        except CalamineError as error:
            detail = str(error)[:120]
            raise unreadable(0, sheet[:80], "sheet.damaged", detail=detail, accepted="XLSX or ODS") from None

    def _text(self, column: int, value: object, shown: int) -> str:
        """A cell's text; a number as its cell shows it. The least decimals of numbers without a format are noted."""
        if not isinstance(value, float):
            return cell_text(value)
        if shown == GENERAL:
            text = cell_text(value)
            behind = len(text.partition(".")[2])
            self.without_format[column] = min(behind, self.without_format.get(column, behind))
            return text
        return number_as_shown(value, shown)

    def _merged_rows(self, sheet: Any) -> dict[int, str]:
        """Rows in which cells are merged over several columns or rows."""
        found: dict[int, str] = {}
        for (top, left), (bottom, right) in sheet.merged_cell_ranges or ():
            name = f"rows {top + 1} to {bottom + 1}, columns {left + 1} to {right + 1}"
            for row in range(top + 1, min(bottom, top + 10_000) + 2):
                found[row] = name
        return found

    def _merged_in_ods(self, sheet: str) -> dict[int, str]:
        number = self.sheets.index(sheet) + 1
        return {row: f"row {row}" for table, row in self._scan.merged if table == number}


class SheetTable:
    """Iterates over the blocks of rows from the header on, as `TextTable` does for text."""

    def __init__(
        self, book: Workbook, sheet: str, header_line: int, progress: Callable[[int, int], None] | None = None,
        cancelled: Callable[[], bool] | None = None, name: str = "",
    ) -> None:  # fmt: skip
        self._book, self._sheet, self._header = book, sheet, header_line
        self._progress, self._cancelled, self._name = progress, cancelled, name
        self.sha, self.size = book.sha, book.size

    def __iter__(self) -> Iterator[RowBlock]:
        rows: list[list[str]] = []
        lines: list[int] = []
        for number, cells in self._book.rows(self._sheet, self._header):
            if not any(cells):
                continue
            rows.append(cells)
            lines.append(number)
            if len(rows) >= _ROWS:
                yield RowBlock(rows, lines)
                rows, lines = [], []
                if self._cancelled is not None and self._cancelled():
                    raise refuse("intake.cancelled", path=self._name)
                if self._progress is not None:
                    self._progress(number, max(number, self._book.scan.cells // max(1, len(cells))))
        if rows:
            yield RowBlock(rows, lines)


def cell_text(value: object) -> str:
    """A cell as text: a number in its shortest exact form, a date and time as ISO 8601 without offset.

    >>> cell_text(7.4), cell_text(24.0), cell_text(datetime(2026, 3, 28, 2, 10))
    ('7.4', '24', '2026-03-28 02:10:00')
    """
    if isinstance(value, str):
        return value.strip()
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, float):
        return repr(value).removesuffix(".0")
    if isinstance(value, datetime):
        return value.isoformat(sep=" ")
    if isinstance(value, (date, time)):
        return value.isoformat()
    if isinstance(value, timedelta):
        return str(value)
    return "" if value is None else str(value)
