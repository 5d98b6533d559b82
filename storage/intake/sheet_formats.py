"""How the numbers of a sheet are shown: a spreadsheet keeps 7.40 as 7.4 and the two decimals in the cell's format.

What is gathered while the guard looks through the parts is held as plain arrays, a few bytes a cell.
"""

from __future__ import annotations

import re
from array import array
from dataclasses import dataclass, field
from functools import lru_cache

import numpy as np

GENERAL = -1
"""Decimals of a number without a format, or with one that shows no fixed decimals."""
PERCENT = 64
"""Added to the decimals of a number that is shown as per cent: 0.28 as 28 %."""
_BUILT_IN = {1: 0, 2: 2, 3: 0, 4: 2, 9: PERCENT, 10: PERCENT + 2, 37: 0, 38: 0, 39: 2, 40: 2}
"""Formats that files name by number alone (ECMA-376 part 1, 18.8.30)."""
_NO_TEXT = re.compile(r'"[^"]*"|\\.|\[[^\]]*\]|_.|\*.')
_PLAIN = re.compile(r"[^0#?]*[#,]*0(?:\.(?P<behind>0+))?#*(?P<tail>[^0#?]*)")
_SHOWN = re.compile(r"[+-]?\d[\d.,'\u00a0\u202f ]*")
_TOLERANCE = 1e-9


def decimals_of_format(code: str) -> int:
    """The fixed decimals that a number format shows; `GENERAL` where it shows none, a date, or a scaled number.

    >>> decimals_of_format("0.00"), decimals_of_format("#,##0.0;[Red]-#,##0.0"), decimals_of_format("General")
    (2, 1, -1)
    >>> decimals_of_format("0.0%") == PERCENT + 1, decimals_of_format("dd/mm/yyyy hh:mm"), decimals_of_format("0,")
    (True, -1, -1)
    """
    first = _NO_TEXT.sub("", code.split(";", maxsplit=1)[0]).strip()
    found = _PLAIN.fullmatch(first)
    if found is None or re.search(r"[a-zA-Z/]", first) or "," in found["tail"]:
        return GENERAL
    behind = len(found["behind"] or "")
    return behind + PERCENT if "%" in first else behind


@dataclass(slots=True)
class ShownCells:
    """Of one sheet: rows and columns of its numbers, from 1, and how each is shown (a style, or decimals)."""

    rows: array[int] = field(default_factory=lambda: array("I"))
    columns: array[int] = field(default_factory=lambda: array("H"))
    shown: array[int] = field(default_factory=lambda: array("h"))

    def add(self, row: int, column: int, shown: int) -> None:
        """Note a number."""
        if 0 < column < 1 << 16 and -1 <= shown < 1 << 15 and 0 < row < 1 << 31:
            self.rows.append(row)
            self.columns.append(column)
            self.shown.append(shown)


@dataclass(slots=True)
class SheetFormats:
    """What the parts of a spreadsheet say of formats, gathered part by part in any order."""

    cells: dict[str, ShownCells] = field(default_factory=dict)
    """By the sheet's part of XLSX, or the number of the table of ODS (there with decimals instead of styles)."""
    styles: list[int] = field(default_factory=list)
    codes: dict[int, str] = field(default_factory=dict)
    sheets: dict[str, str] = field(default_factory=dict)
    targets: dict[str, str] = field(default_factory=dict)

    def of_sheet(self, name: str, number: int) -> Shown:
        """How the numbers of a sheet are shown, by its name and its number among the sheets (from 1)."""
        target = self.targets.get(self.sheets.get(name, ""), "")
        part = target.lstrip("/") if target.startswith("/") else f"xl/{target}"
        if part in self.cells:
            return Shown(self.cells[part], [self._decimals(s) for s in self.styles])
        return Shown(self.cells.get(str(number), ShownCells()), None)

    def _decimals(self, format_number: int) -> int:
        if format_number in self.codes:
            return decimals_of_format(self.codes[format_number])
        return _BUILT_IN.get(format_number, GENERAL)


class Shown:
    """How the numbers of one sheet are shown, row by row."""

    def __init__(self, cells: ShownCells, styles: list[int] | None) -> None:
        rows, columns, shown = (np.array(x, np.int64) for x in (cells.rows, cells.columns, cells.shown))
        if styles is not None:
            known = np.array([*styles, GENERAL], np.int64)
            shown = known[np.where((shown >= 0) & (shown < len(styles)), shown, len(styles))]
        order = np.argsort(rows, kind="stable")
        self._rows, self._columns, self._shown = rows[order], columns[order], shown[order]

    def row(self, number: int) -> dict[int, int]:
        """Decimals by column (from 1) of a row's numbers; `GENERAL` where no format says."""
        start, end = self._rows.searchsorted((number, number + 1)).tolist()
        return dict(zip(self._columns[start:end].tolist(), self._shown[start:end].tolist(), strict=True))


def decimals_as_shown(text: str, value: float) -> int:
    """The decimals of a number in a text that shows it (ODS keeps both); `GENERAL` where the text is another number.

    >>> decimals_as_shown("7,40", 7.4), decimals_as_shown("1,234", 1234.0), decimals_as_shown("a week", 7.0)
    (2, 0, -1)
    """
    found = _SHOWN.search(text)
    if found is None:
        return GENERAL
    digits = re.sub("['\u00a0\u202f ]", "", found[0])
    at = max(digits.rfind("."), digits.rfind(","))
    whole, behind = (digits[:at], digits[at + 1 :]) if at >= 0 else (digits, "")
    plain = f"{re.sub('[.,]', '', whole)}.{behind or '0'}"
    for number, decimals in ((plain, len(behind)), (re.sub("[.,]", "", digits), 0)):
        if abs(float(number) - value) <= 0.5 * 10.0**-decimals + _TOLERANCE:
            return decimals
    return GENERAL


@lru_cache(maxsize=1 << 16)
def number_as_shown(value: float, shown: int) -> str:
    """A number as its cell shows it, where that is the number itself; else in its shortest exact form.

    >>> number_as_shown(7.4, 2), number_as_shown(0.28, PERCENT), number_as_shown(7.405, 2), number_as_shown(24.0, -1)
    ('7.40', '28', '7.405', '24')
    """
    exact = repr(value).removesuffix(".0")
    if shown == GENERAL:
        return exact
    if shown >= PERCENT:
        value, shown = value * 100, shown - PERCENT
        exact = repr(round(value, 10)).removesuffix(".0")
    text = f"{value:.{shown}f}"
    return text if abs(float(text) - value) <= _TOLERANCE * max(1.0, abs(value)) else exact
