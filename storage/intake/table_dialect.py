"""How a table's text is written: encoding, delimiter, where its header stands. Found by looking, and shown."""

from __future__ import annotations

import codecs
import csv
from collections import Counter
from dataclasses import dataclass

from storage.intake.findings import unreadable
from storage.intake.writing import AS_FOUND, Writing, delimiter_said

HEAD = 256 * 1024
"""Bytes looked at to tell how a file is written."""
DELIMITERS = (",", ";", "\t", "|")
ENCODINGS = (
    "utf-8",
    "utf-8-sig",
    "utf-16",
    "utf-16-le",
    "utf-16-be",
    "cp1252",
    "latin-1",
    "iso8859-15",
    "cp437",
)
_BOMS = ((b"\xef\xbb\xbf", "utf-8-sig"), (b"\xff\xfe", "utf-16"), (b"\xfe\xff", "utf-16"))
_LOOKED_AT = 60


@dataclass(frozen=True, slots=True)
class Dialect:
    """How to read a table. `header_line` counts from 1; `sheet` is empty for text, `delimiter` for sheets.

    `encoding_is_sure` is False where the bytes fit no Unicode and a one-byte encoding was taken.
    """

    encoding: str = "utf-8"
    delimiter: str = ","
    header_line: int = 1
    sheet: str = ""
    encoding_is_sure: bool = True


def text_dialect(head: bytes, *, is_whole: bool, said: Writing = AS_FOUND) -> Dialect:
    """How text is written, by its first bytes; what a person says of it is taken as said.

    Raises:
        UnreadableFileError: `file.empty`, `file.binary`.

    >>> text_dialect("Zeit;pCO2\\n1;5,3\\n2;5,9\\n".encode(), is_whole=True).delimiter
    ';'
    """
    if not head.strip():
        raise unreadable(1, "", "file.empty", accepted="a header and rows")
    if said.encoding:
        encoding, sure = said.encoding, _fits_as_said(head, said.encoding, is_whole=is_whole)
    else:
        encoding, sure = _encoding(head, is_whole=is_whole)
    text = head.decode(encoding, "ignore")
    lines = text.splitlines()
    lines = lines[: -1 if not is_whole and len(lines) > 1 else None][:_LOOKED_AT]
    delimiter = delimiter_said(said.delimiter) or _delimiter(lines)
    return Dialect(encoding, delimiter, said.header_line or header_line(_rows(lines, delimiter)), "", sure)


def _fits_as_said(head: bytes, encoding: str, *, is_whole: bool) -> bool:
    """Whether nothing speaks against an encoding that was said: letters that are UTF-8 are hardly of another one."""
    if head.isascii() or codecs.lookup(encoding).name.startswith("utf"):
        return True
    try:
        head.decode("utf-8")
    except UnicodeDecodeError as error:
        return is_whole or error.start < len(head) - 4
    return False


def _encoding(head: bytes, *, is_whole: bool) -> tuple[str, bool]:
    for mark, name in _BOMS:
        if head.startswith(mark):
            return name, True
    even, odd = head[0:400:2].count(0), head[1:400:2].count(0)
    if even or odd:
        pairs = len(head[:400]) // 2
        if odd > 0.6 * pairs and even == 0:
            return "utf-16-le", True
        if even > 0.6 * pairs and odd == 0:
            return "utf-16-be", True
    if b"\x00" in head:
        raise unreadable(1, "NUL", "file.binary", accepted="a table as text, XLSX or ODS")
    try:
        head.decode("utf-8")
    except UnicodeDecodeError as error:
        if is_whole or error.start < len(head) - 4:
            return _one_byte_encoding(head), False
    return "utf-8", True


def _one_byte_encoding(head: bytes) -> str:
    """The Windows encoding, where every byte is a letter of it; else that of old DOS programs, in which each is."""
    try:
        head.decode("cp1252")
    except UnicodeDecodeError:
        return "cp437"
    return "cp1252"


def _delimiter(lines: list[str]) -> str:
    """The delimiter that cuts most lines into the same number of fields, and into the most of them."""

    def score(mark: str) -> tuple[float, int]:
        counts = Counter(len(row) for row in _rows(lines, mark) if row)
        if not counts:
            return 0.0, 0
        width, rows = max(counts.items(), key=lambda item: (item[1], item[0]))
        return (rows / sum(counts.values()) if width > 1 else 0.0), width

    return max(DELIMITERS, key=score)


def _rows(lines: list[str], delimiter: str) -> list[list[str]]:
    try:
        return [[c.strip() for c in row] for row in csv.reader(lines, delimiter=delimiter)]
    except csv.Error:
        return [line.split(delimiter) for line in lines]


def header_line(rows: list[list[str]]) -> int:
    """The line of the header: the first as wide as most rows, with words in it; titles before it are passed over.

    >>> header_line([["Ward 7"], [], ["time", "pH"], ["1:00", "7.31"], ["2:00", "7.33"]])
    3
    """
    widths = Counter(len(_trimmed(row)) for row in rows if len(_trimmed(row)) > 1)
    if not widths:
        return 1
    usual = max(widths.items(), key=lambda item: (item[1], item[0]))[0]
    for number, row in enumerate(rows, 1):
        cells = _trimmed(row)
        if len(cells) >= usual and sum(_is_word(c) for c in cells) > len(cells) / 2:
            return number
    return next((n for n, row in enumerate(rows, 1) if len(_trimmed(row)) == usual), 1)


def _trimmed(row: list[str]) -> list[str]:
    end = len(row)
    while end and not row[end - 1].strip():
        end -= 1
    return row[:end]


def _is_word(cell: str) -> bool:
    return any(c.isalpha() for c in cell) and not cell[:1].isdigit()


def column_names(cells: list[str]) -> tuple[str, ...]:
    """The header's names, each of its own: empty ones are numbered, repeated ones counted.

    >>> column_names(["pH", "", "pH"])
    ('pH', 'column 2', 'pH (2)')
    """
    seen: Counter[str] = Counter()
    made = []
    for number, cell in enumerate(cells, 1):
        name = " ".join(cell.split())[:120] or f"column {number}"
        seen[name] += 1
        made.append(name if seen[name] == 1 else f"{name} ({seen[name]})")
    return tuple(made)
