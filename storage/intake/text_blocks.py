"""Reads a text file in bounded blocks of whole lines, however long a hostile line may be."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass
from hashlib import sha256
from pathlib import Path
from typing import BinaryIO

from core.record.message import refuse
from storage.intake.findings import unreadable

BLOCK = 1 << 20
MAX_LINE = 128 * 1024
_BOMS = ((b"\xff\xfe", "UTF-16"), (b"\xfe\xff", "UTF-16"))
_UTF8_BOM = b"\xef\xbb\xbf"


@dataclass(frozen=True, slots=True)
class TextBlock:
    """Whole lines, each ended by LF: the bytes, the number of the first line, how many lines."""

    data: bytes
    first_line: int
    lines: int


class BlockReader:
    """Iterates over a file's blocks, hashing as it goes.

    Raises:
        UnreadableFileError: a line over 128 KB, NUL bytes, or bytes that are not UTF-8.
        RecordError: `intake.cancelled`.
    """

    def __init__(
        self, path: Path, progress: Callable[[int, int], None] | None = None,
        cancelled: Callable[[], bool] | None = None,
    ) -> None:  # fmt: skip
        self._path, self._progress, self._cancelled = path, progress, cancelled
        self._hash = sha256()
        self.size = 0

    @property
    def sha(self) -> str:
        """SHA-256 of what was read so far, as hex."""
        return self._hash.hexdigest()

    def __iter__(self) -> Iterator[TextBlock]:
        total = self._path.stat().st_size
        with self._path.open("rb") as file:
            yield from self._whole_lines(file, total)

    def _whole_lines(self, file: BinaryIO, total: int) -> Iterator[TextBlock]:
        carried = self._start(file)
        line = 1
        while True:
            if self._cancelled is not None and self._cancelled():
                raise refuse("intake.cancelled", path=self._path.name)
            fresh = self._read(file)
            if self._progress is not None:
                self._progress(self.size, total)
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

    def _start(self, file: BinaryIO) -> bytes:
        """The first bytes, without a UTF-8 mark."""
        first = self._read(file, 3)
        for mark, name in _BOMS:
            if first.startswith(mark):
                raise unreadable(1, name, "file.encoding", found=name, accepted="UTF-8")
        return first.removeprefix(_UTF8_BOM)

    def _read(self, file: BinaryIO, size: int = BLOCK) -> bytes:
        data = file.read(size)
        self._hash.update(data)
        self.size += len(data)
        return data


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
