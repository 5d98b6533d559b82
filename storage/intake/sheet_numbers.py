"""Gathers how the numbers of a spreadsheet are shown, event by event, while the guard reads its parts."""

from __future__ import annotations

import re
from collections.abc import Mapping

from storage.intake.sheet_formats import GENERAL, PERCENT, SheetFormats, ShownCells, decimals_as_shown

_CELL = re.compile(r"([A-Z]{1,3})([1-9][0-9]{0,6})")
_MOST = 2_000_000
_MOST_STYLES = 70_000
_MOST_REPEATED = 4_096
_MOST_TEXT = 80


class NumberWatch:
    """Is told of every element of one part; what it learns goes to `formats`."""

    def __init__(self, part: str, formats: SheetFormats) -> None:
        self._part, self._formats = part, formats
        self._is_sheet = part.startswith("xl/worksheets/") and part.endswith(".xml")
        self._is_ods = part == "content.xml"
        self._in_styles = False
        self._cells = formats.cells.setdefault(part, ShownCells()) if self._is_sheet else ShownCells()
        self._table = self._row = self._column = 0
        self._rows, self._repeat = 1, 1
        self._value: float | None = None
        self._percent, self._shown = False, ""

    def start(self, local: str, attributes: Mapping[str, str]) -> None:
        """An element begins."""
        if self._is_sheet:
            self._start_in_sheet(local, attributes)
        elif self._is_ods:
            self._start_in_ods(local, attributes)
        elif local == "xf" and self._in_styles and len(self._formats.styles) < _MOST_STYLES:
            self._formats.styles.append(_number(attributes.get("numFmtId", "0")))
        elif local == "cellXfs":
            self._in_styles = True
        elif local == "numFmt" and len(self._formats.codes) < _MOST_STYLES:
            self._formats.codes[_number(attributes.get("numFmtId", "0"))] = attributes.get("formatCode", "")[:200]
        elif local == "sheet":
            of = next((v for k, v in attributes.items() if k.rpartition(":")[2] == "id" and k != "id"), "")
            self._formats.sheets[attributes.get("name", "")] = of
        elif local == "Relationship" and self._part == "xl/_rels/workbook.xml.rels":
            self._formats.targets[attributes.get("Id", "")] = attributes.get("Target", "")

    def end(self, local: str) -> None:
        """An element ends."""
        if local == "cellXfs":
            self._in_styles = False
        elif self._is_ods and local == "table-cell":
            self._end_cell()
        elif self._is_ods and local == "table-row":
            self._row += self._rows - 1

    def text(self, data: str) -> None:
        """Text inside an element of ODS."""
        if self._value is not None and len(self._shown) < _MOST_TEXT:
            self._shown += data[:_MOST_TEXT]

    def _start_in_sheet(self, local: str, attributes: Mapping[str, str]) -> None:
        if local == "row":
            self._row, self._column = _number(attributes.get("r", str(self._row + 1))), 0
        if local != "c":
            return
        found = _CELL.fullmatch(attributes.get("r", ""))
        self._column = _letters(found[1]) if found else self._column + 1
        if attributes.get("t", "n") == "n" and len(self._cells.rows) < _MOST:
            self._cells.add(self._row, self._column, _number(attributes.get("s", "0")))

    def _start_in_ods(self, local: str, attributes: Mapping[str, str]) -> None:
        if local == "table":
            self._table, self._row = self._table + 1, 0
            self._cells = self._formats.cells.setdefault(str(self._table), ShownCells())
        elif local == "table-row":
            self._row, self._column, self._repeat = self._row + 1, 0, 0
            self._rows = _number(attributes.get("table:number-rows-repeated", "1"))
        elif local in ("table-cell", "covered-table-cell"):
            self._column += self._repeat
            self._repeat = _number(attributes.get("table:number-columns-repeated", "1"))
            kind = attributes.get("office:value-type", "")
            self._percent, self._shown, self._value = kind == "percentage", "", None
            if kind in ("float", "percentage"):
                self._value = _float(attributes.get("office:value", ""))

    def _end_cell(self) -> None:
        value, self._value = self._value, None
        if value is None:
            return
        shown = decimals_as_shown(self._shown, value * 100 if self._percent else value)
        shown += PERCENT if self._percent and shown != GENERAL else 0
        first = self._column + 1
        for row in range(self._row, self._row + min(self._rows, _MOST_REPEATED)):
            for column in range(first, first + min(self._repeat, _MOST_REPEATED)):
                if len(self._cells.rows) >= _MOST:
                    return
                self._cells.add(row, column, shown)


def _number(text: str) -> int:
    return int(text) if text.isascii() and text.isdigit() and len(text) < 8 else 0


def _float(text: str) -> float | None:
    try:
        return float(text)
    except ValueError:
        return None


def _letters(text: str) -> int:
    column = 0
    for letter in text:
        column = column * 26 + ord(letter) - 64
    return column
