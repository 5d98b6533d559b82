"""Reads a table of text in bounded blocks of rows, whatever its encoding, delimiter and line ends."""

from __future__ import annotations

import codecs
import csv
from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass
from pathlib import Path

from storage.intake.byte_fields import ByteFields, cut_fields
from storage.intake.findings import unreadable
from storage.intake.steady_file import SteadyFile
from storage.intake.table_dialect import Dialect
from storage.intake.watched_file import Progress, WatchedFile

MAX_LINE = 128 * 1024
_SHOWN = 80
_FIRST = 256
"""Lines of the first block: the header is among them, and the rows that are looked at for proposals."""


@dataclass(slots=True)
class RowBlock:
    """Rows of cells, and the line (from 1) on which each begins.

    A plain block (no quotes, every row as wide as the header) has fields of bytes instead of rows.
    """

    rows: list[list[str]]
    lines: Sequence[int]
    fields: ByteFields | None = None

    def as_rows(self) -> list[list[str]]:
        """The rows as cells, whichever way the block was cut."""
        if self.fields is None:
            return self.rows
        columns = [self.fields.texts(i) for i in range(self.fields.start.shape[0])]
        return [list(row) for row in zip(*columns, strict=True)]


class TextTable(WatchedFile):
    """Iterates over the blocks of rows behind the header, hashing as it goes.

    Raises:
        UnreadableFileError: a line without end, bytes that are not of the encoding, quotes that do not close, a
            file that changed.
        RecordError: `intake.cancelled`.
    """

    def __init__(
        self, path: Path, dialect: Dialect, progress: Progress | None = None,
        cancelled: Callable[[], bool] | None = None,
    ) -> None:  # fmt: skip
        super().__init__(path, progress, cancelled)
        self._dialect = dialect
        self._width = 0

    def __iter__(self) -> Iterator[RowBlock]:
        steady = SteadyFile.begin(self.path)
        line = 0
        for text in self._texts(steady):
            for part in _begin_and_rest(text) if not self._width else (text,):
                block, line = self._plain_block(part, line) or self._block(part, line)
                if block.rows and not self._width:
                    self._width = len(block.rows[0])
                if block.lines:
                    yield block
        steady.check()

    def _plain_block(self, text: str, before: int) -> tuple[RowBlock, int] | None:
        """A block of fields, cut at once; None where it holds quotes, empty lines or rows of another width."""
        if not self._width or before < self._dialect.header_line:
            return None
        count = text.count("\n")
        if not text.endswith("\n") or self._width < 2:
            return None
        fields = cut_fields(text.encode(), self._dialect.delimiter, self._width, count)
        if fields is None:
            return None
        return RowBlock([], range(before + 1, before + count + 1), fields), before + count

    def _block(self, text: str, before: int) -> tuple[RowBlock, int]:
        """Rows of a text of whole rows; `before` is how many lines came before it."""
        lines = text.split("\n")
        if not lines[-1]:
            lines.pop()
        skip = max(0, self._dialect.header_line - 1 - before)
        reader = csv.reader([line + "\n" for line in lines[skip:]], delimiter=self._dialect.delimiter, strict=True)
        rows: list[list[str]] = []
        numbers: list[int] = []
        at = start = before + skip
        try:
            for cells in reader:
                if cells and cells != [""]:
                    rows.append(cells)
                    numbers.append(start + 1)
                start = at + reader.line_num
        except csv.Error as error:
            shown = lines[min(start - before, len(lines) - 1)][:_SHOWN]
            raise unreadable(start + 1, shown, "row.quotes", detail=str(error)) from None
        return RowBlock(rows, numbers), before + len(lines)

    def _texts(self, steady: SteadyFile) -> Iterator[str]:
        """Texts of whole rows with LF line ends."""
        decoder = codecs.getincrementaldecoder(self._dialect.encoding)("strict")
        carried, cut, lines = "", False, 0
        with self.path.open("rb") as file:
            while True:
                data = self.read(file, steady)
                try:
                    fresh = decoder.decode(data, final=not data)
                except UnicodeDecodeError as error:
                    raise self._wrong_encoding(error, lines + carried.count("\n")) from None
                if "\x00" in fresh:
                    raise unreadable(lines + 1, "NUL", "file.binary", accepted="a table as text, XLSX or ODS")
                if cut and fresh.startswith("\n"):
                    fresh = fresh[1:]
                cut = fresh.endswith("\r")
                carried += fresh.replace("\r\n", "\n").replace("\r", "\n")
                end = len(carried) if not data else _cut_at(carried)
                if end:
                    _check_lengths(carried[:end], lines)
                    yield carried[:end]
                    lines += carried.count("\n", 0, end)
                    carried = carried[end:]
                if not data:
                    return
                if len(carried) > 2 * MAX_LINE:
                    raise unreadable(lines + 1, carried[:60], "line.too_long", accepted=f"{MAX_LINE} characters")

    def _wrong_encoding(self, error: UnicodeDecodeError, line: int) -> Exception:
        seen = error.object
        before = seen.count(b"\n", 0, error.start) if isinstance(seen, bytes) else 0
        value = f"byte {bytes(seen[error.start : error.start + 1]).hex()}"
        return unreadable(line + before + 1, value, "file.encoding", found=f"not {self._dialect.encoding}",
                          accepted="the encoding that the table is read by")  # fmt: skip


def _begin_and_rest(text: str) -> tuple[str, ...]:
    """The first lines and the rest, where no quoted field can lie across the cut."""
    at = -1
    for _ in range(_FIRST):
        at = text.find("\n", at + 1)
        if at < 0:
            return (text,)
    begin, rest = text[: at + 1], text[at + 1 :]
    return (text,) if '"' in begin or not rest else (begin, rest)


def _cut_at(text: str) -> int:
    """Where to cut so that no quoted field is cut: after the last line end with quotes in pairs before it."""
    last = end = text.rfind("\n") + 1
    odd = text.count('"', 0, end) % 2
    while odd and end:
        before = text.rfind("\n", 0, end - 1) + 1
        odd ^= text.count('"', before, end) % 2
        end = before
        if last - end > MAX_LINE:
            return last
    return end


def _check_lengths(text: str, before: int) -> None:
    start = 0
    while len(text) - start > MAX_LINE:
        end = text.rfind("\n", start, start + MAX_LINE + 1)
        if end < 0:
            line = before + text.count("\n", 0, start) + 1
            raise unreadable(line, text[start : start + 60], "line.too_long", accepted=f"{MAX_LINE} characters")
        start = end + 1
