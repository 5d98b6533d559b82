"""Reads a text file in bounded blocks of whole lines, however long a hostile line may be."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from typing import BinaryIO

from storage.intake.findings import unreadable
from storage.intake.steady_file import SteadyFile
from storage.intake.watched_file import WatchedFile

MAX_LINE = 128 * 1024
_BOMS = ((b"\xff\xfe", "UTF-16"), (b"\xfe\xff", "UTF-16"))
_UTF8_BOM = b"\xef\xbb\xbf"


@dataclass(frozen=True, slots=True)
class TextBlock:
    """Whole lines, each ended by LF: the bytes, the number of the first line, how many lines."""

    data: bytes
    first_line: int
    lines: int


class BlockReader(WatchedFile):
    """Iterates over a file's blocks, hashing as it goes.

    Raises:
        UnreadableFileError: a line over 128 KB, NUL bytes, bytes that are not UTF-8, a file that changed.
        RecordError: `intake.cancelled`.
    """

    def __iter__(self) -> Iterator[TextBlock]:
        steady = SteadyFile.begin(self.path)
        with self.path.open("rb") as file:
            yield from self._whole_lines(file, steady)
        steady.check()

    def _whole_lines(self, file: BinaryIO, steady: SteadyFile) -> Iterator[TextBlock]:
        carried = self._start(file, steady)
        line = 1
        while True:
            fresh = self.read(file, steady)
            data = carried + fresh
            if not fresh:
                if data:
                    yield _last_lines(data, line)
                return
            end = cut_at(data)
            if end == 0 and len(data) > MAX_LINE:
                raise _too_long(data, line)
            carried = data[end:]
            if end:
                whole = TextBlock(data[:end], line, data.count(b"\n", 0, end))
                _check_text(whole)
                yield whole
                line += whole.lines
            if len(carried) > MAX_LINE and b"\n" not in carried:
                raise _too_long(carried, line)

    def _start(self, file: BinaryIO, steady: SteadyFile) -> bytes:
        """The first bytes, without a UTF-8 mark."""
        first = self.read(file, steady, 3)
        for mark, name in _BOMS:
            if first.startswith(mark):
                raise unreadable(1, name, "file.encoding", found=name, accepted="UTF-8")
        return first.removeprefix(_UTF8_BOM)


def _last_lines(data: bytes, line: int) -> TextBlock:
    """The end of the file, with the line end that it may lack."""
    tail = data[data.rfind(b"\n") + 1 :]
    if len(tail) > MAX_LINE:
        raise _too_long(tail, line + data.count(b"\n"))
    whole = data if data.endswith(b"\n") else data + b"\n"
    block = TextBlock(whole, line, whole.count(b"\n"))
    _check_text(block)
    return block


def cut_at(data: bytes) -> int:
    """Where to cut so that no quoted field is cut: after the last line end with quotes in pairs before it.

    A lone quotation mark inside a field would move the pairs for good, so beyond `MAX_LINE` the last line end
    serves, and the parser judges.
    """
    last = end = data.rfind(b"\n") + 1
    if b'"' not in data:
        return end
    odd = data.count(b'"', 0, end) % 2
    while odd and end:
        before = data.rfind(b"\n", 0, end - 1) + 1
        odd ^= data.count(b'"', before, end) % 2
        end = before
        if last - end > MAX_LINE:
            return last
    return end


def _check_text(block: TextBlock) -> None:
    data = block.data
    at = data.find(b"\x00")
    if at >= 0:
        line = block.first_line + data.count(b"\n", 0, at)
        raise unreadable(line, "NUL", "file.binary", accepted="text in UTF-8")
    if data.isascii():
        _check_line_lengths(block)
        return
    try:
        data.decode("utf-8")
    except UnicodeDecodeError as error:
        line = block.first_line + data.count(b"\n", 0, error.start)
        value = f"byte {data[error.start : error.start + 1].hex()}"
        key = "file.binary" if line == 1 else "file.encoding"  # a header that is no text is no log at all
        raise unreadable(line, value, key, found="not UTF-8", accepted="text in UTF-8") from None
    _check_line_lengths(block)


def _check_line_lengths(block: TextBlock) -> None:
    data, start = block.data, 0
    # a line over the limit spans a whole window without a line end: look only at windows' last line ends
    while len(data) - start > MAX_LINE:
        end = data.rfind(b"\n", start, start + MAX_LINE + 1)
        if end < 0:
            raise _too_long(data[start:], block.first_line + data.count(b"\n", 0, start))
        start = end + 1


def _too_long(data: bytes, line: int) -> Exception:
    shown = data[:60].decode("utf-8", "replace")
    return unreadable(line, shown, "line.too_long", accepted=f"{MAX_LINE} bytes")
