"""Looks through a spreadsheet file before anything reads it: XLSX and ODS are zipped XML, and both can be bombs.

Every part is unpacked in bounded memory and read once by an event parser. Refused: parts that unpack too large,
document types and entities, nesting beyond any spreadsheet's, more cells than can be held (a lone cell in a far
corner or a repeated one makes millions), parts that are encrypted. What passes is handed on as a new archive of just
those parts, so that a size the archive lies about cannot come back.
"""

from __future__ import annotations

import io
import re
import zipfile
from dataclasses import dataclass, field
from typing import BinaryIO
from xml.parsers import expat

from storage.intake.findings import UnreadableFileError, unreadable
from storage.intake.sheet_formats import SheetFormats
from storage.intake.sheet_numbers import NumberWatch

MOST_BYTES = 128 << 20
"""Unpacked bytes of all parts together."""
MOST_CELLS = 2_000_000
DEEPEST = 64
_PARTS = 2_000
_MOST_MERGED = 10_000
_BLOCK = 1 << 18
_ODS_CONTENT = "content.xml"
_CELL = re.compile(r"([A-Z]{1,3})([1-9][0-9]{0,6})")
_WANTED = re.compile(
    r"\[Content_Types\]\.xml|_rels/.*|xl/workbook\.xml|xl/_rels/.*|xl/sharedStrings\.xml|xl/styles\.xml|"
    r"xl/worksheets/.*|mimetype|META-INF/manifest\.xml|content\.xml|styles\.xml|settings\.xml|meta\.xml|xl/tables/.*"
)


@dataclass(slots=True)
class Scan:
    """What was found in the parts: cells by the area they span, merged rows of ODS as (sheet, row) from 1, and how
    numbers are shown."""

    cells: int = 0
    merged: set[tuple[int, int]] = field(default_factory=set)
    formats: SheetFormats = field(default_factory=SheetFormats)


def guarded_copy(file: BinaryIO) -> tuple[io.BytesIO, Scan]:
    """A safe copy of a spreadsheet, and what the scan found.

    Raises:
        UnreadableFileError: `sheet.*`, saying what is wrong with it.
    """
    scan, copy, left = Scan(), io.BytesIO(), MOST_BYTES
    try:
        with (
            zipfile.ZipFile(file) as source,
            zipfile.ZipFile(copy, "w", zipfile.ZIP_DEFLATED, True, 1) as out,
        ):
            parts = source.infolist()
            if len(parts) > _PARTS:
                raise unreadable(0, str(len(parts)), "sheet.too_many_parts", accepted=_PARTS)
            for part in parts:
                if part.is_dir() or not _WANTED.fullmatch(part.filename):
                    continue
                if part.flag_bits & 1:
                    raise unreadable(0, part.filename[:80], "sheet.encrypted", accepted="a file without a password")
                data = _unpacked(source, part, left)
                left -= len(data)
                if part.filename.endswith((".xml", ".rels")):
                    _look(part.filename, data, scan)
                out.writestr(part.filename, data)
    except UnreadableFileError:
        raise
    except Exception as error:  # the archive module raises whatever the slicing of a damaged archive meets
        raise unreadable(0, "", "sheet.damaged", detail=type(error).__name__, accepted="XLSX or ODS") from None
    copy.seek(0)
    return copy, scan


def _unpacked(source: zipfile.ZipFile, part: zipfile.ZipInfo, most: int) -> bytearray:
    made = bytearray()
    with source.open(part) as stream:
        while block := stream.read(_BLOCK):
            made += block
            if len(made) > most:
                raise unreadable(0, part.filename[:80], "sheet.too_large", accepted=MOST_BYTES)
    return made


def _look(name: str, data: bytearray, scan: Scan) -> None:
    """Read one part of XML by events; nothing of it is built in memory."""
    parser = expat.ParserCreate()
    watch = _Watch(name, scan)
    parser.StartElementHandler = watch.start
    parser.EndElementHandler = watch.end
    if name == _ODS_CONTENT:
        parser.CharacterDataHandler = watch.text
    parser.StartDoctypeDeclHandler = watch.doctype
    parser.EntityDeclHandler = watch.doctype
    parser.buffer_text = True
    try:
        for at in range(0, len(data), _BLOCK):
            parser.Parse(bytes(data[at : at + _BLOCK]), False)
        parser.Parse(b"", True)
    except expat.ExpatError as error:
        raise unreadable(0, name[:80], "sheet.damaged", detail=expat.errors.messages[error.code],
                         accepted="XLSX or ODS") from None  # fmt: skip
    scan.cells += watch.cells()


class _Watch:
    """Counts depth and cells of one part."""

    def __init__(self, name: str, scan: Scan) -> None:
        self._name, self._scan, self._depth = name, scan, 0
        self._rows, self._columns = [1 << 30, 0], [1 << 30, 0]
        self._table = self._row = 0
        self._repeat_row, self._row_cells, self._filled, self._ods_cells = 1, 0, False, 0
        self._numbers = NumberWatch(name, scan.formats)

    def start(self, tag: str, attributes: dict[str, str]) -> None:
        self._depth += 1
        if self._depth > DEEPEST:
            raise unreadable(0, self._name[:80], "sheet.too_deep", accepted=DEEPEST)
        local = tag.rpartition(":")[2]
        self._numbers.start(local, attributes)
        if local == "c" and "r" in attributes:
            self._note_cell(attributes["r"])
        elif local == "table":
            self._table, self._row = self._table + 1, 0
        elif local == "table-row":
            self._row += 1
            self._repeat_row = _number(attributes.get("table:number-rows-repeated", "1"))
            self._row_cells, self._filled = 0, False
        elif local in ("table-cell", "covered-table-cell"):
            self._note_ods(attributes)

    def end(self, tag: str) -> None:
        self._depth -= 1
        local = tag.rpartition(":")[2]
        self._numbers.end(local)
        if local != "table-row":
            return
        self._row += self._repeat_row - 1
        if self._filled:
            self._ods_cells += self._repeat_row * self._row_cells
            self._check(self._ods_cells)

    def text(self, data: str) -> None:
        self._numbers.text(data)

    def doctype(self, *_: object) -> None:
        raise unreadable(0, self._name[:80], "sheet.document_type", accepted="XML without document types or entities")

    def cells(self) -> int:
        """The cells of the rectangle that holds every cell of the part."""
        if self._rows[1] == 0:
            return self._ods_cells
        return (self._rows[1] - self._rows[0] + 1) * (self._columns[1] - self._columns[0] + 1)

    def _note_cell(self, reference: str) -> None:
        found = _CELL.fullmatch(reference)
        if found is None:
            raise unreadable(0, reference[:20], "sheet.damaged", detail="cell address", accepted="XLSX or ODS")
        column = 0
        for letter in found[1]:
            column = column * 26 + ord(letter) - 64
        row = int(found[2])
        if row < self._rows[0] or row > self._rows[1] or column < self._columns[0] or column > self._columns[1]:
            self._rows = [min(self._rows[0], row), max(self._rows[1], row)]
            self._columns = [min(self._columns[0], column), max(self._columns[1], column)]
            self._check(self.cells())

    def _note_ods(self, attributes: dict[str, str]) -> None:
        repeat = _number(attributes.get("table:number-columns-repeated", "1"))
        if any(name.endswith("value-type") for name in attributes):
            self._filled = True
            self._row_cells += repeat
        elif repeat < 1024:  # an empty tail repeated to the sheet's edge fills nothing
            self._row_cells += repeat
        wide, high = (_number(attributes.get(f"table:number-{way}-spanned", "1")) for way in ("columns", "rows"))
        if wide > 1 or high > 1:
            self._scan.merged.update((self._table, self._row + i) for i in range(min(high, _MOST_MERGED)))
        self._check(self._ods_cells + self._row_cells)

    def _check(self, cells: int) -> None:
        if self._scan.cells + cells > MOST_CELLS:
            raise unreadable(0, self._name[:80], "sheet.too_many_cells", accepted=MOST_CELLS)


def _number(text: str) -> int:
    return int(text) if text.isascii() and text.isdigit() and len(text) < 10 else MOST_CELLS + 1
