"""A block of plain lines cut into fields at once: where each field lies, its bytes as numbers, its text."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Bytes = NDArray[np.uint8]
Offsets = NDArray[np.int64]
Words = NDArray[np.uint64]
_PAD = 64
_NEWLINE, _SPACE = 10, 32
_MOST_SPACES = 32
_MASKS = np.array([0, *((1 << 8 * k) - 1 for k in range(1, 8)), 2**64 - 1], np.uint64)


@dataclass(frozen=True, slots=True)
class ByteFields:
    """Where every field of a block lies: offsets and lengths of shape (columns, rows).

    `data` goes on for 64 bytes behind the last field; `words` is each eight bytes of it as one number.
    """

    data: Bytes
    words: Words
    start: Offsets
    length: Offsets

    @property
    def rows(self) -> int:
        """How many rows there are."""
        return int(self.start.shape[1])

    def word(self, column: int, part: int = 0, rows: Offsets | None = None) -> Words:
        """Eight bytes of a field of each row as one number (the first byte the lowest), those behind it cleared."""
        start, length = self._of(column, rows)
        if part:
            start, length = start + 8 * part, np.maximum(length - 8 * part, 0)
        found: Words = self.words[start] & _MASKS[np.minimum(length, 8)]
        return found

    def parts(self, column: int, rows: Offsets | None = None) -> int:
        """How many words hold the longest field of a column."""
        length = self._of(column, rows)[1]
        return (int(length.max(initial=0)) + 7) // 8

    def table(self, column: int, parts: int, rows: Offsets | None = None) -> Bytes:
        """The fields of a column as bytes, shape (rows, 8 x parts), with zeros behind each."""
        made = np.empty((self.rows if rows is None else rows.size, parts), "<u8")
        for part in range(parts):
            made[:, part] = self.word(column, part, rows)
        return made.view(np.uint8).reshape(made.shape[0], 8 * parts)

    def text(self, row: int, column: int) -> str:
        """One field's text."""
        at = int(self.start[column, row])
        return self.data[at : at + int(self.length[column, row])].tobytes().decode()

    def texts(self, column: int) -> list[str]:
        """All texts of a column."""
        whole, starts = self.data.tobytes(), self.start[column].tolist()
        return [whole[a : a + n].decode() for a, n in zip(starts, self.length[column].tolist(), strict=True)]

    def _of(self, column: int, rows: Offsets | None) -> tuple[Offsets, Offsets]:
        start, length = self.start[column], self.length[column]
        return (start, length) if rows is None else (start[rows], length[rows])


def cut_fields(data: bytes, delimiter: str, columns: int, lines: int) -> ByteFields | None:
    """Cut lines that end with LF into fields; None where it is not one plain row of `columns` fields per line.

    >>> fields = cut_fields(b"a,12\\nb,7\\n", ",", 2, 2)
    >>> fields.texts(1), fields.text(1, 0)
    (['12', '7'], 'b')
    """
    if not data or b'"' in data or b"\r" in data or not delimiter.isascii():
        return None
    padded = data + bytes(_PAD)
    raw = np.frombuffer(padded, np.uint8)
    found = np.flatnonzero((raw == ord(delimiter)) | (raw == _NEWLINE))
    if found.size != lines * columns:
        return None
    cuts = np.ascontiguousarray(found.astype(np.int64, copy=False).reshape(lines, columns).T)
    if not (raw[cuts[-1]] == _NEWLINE).all() or (raw[cuts[:-1]] == _NEWLINE).any():
        return None
    start = np.empty_like(cuts)
    start[0, 0] = 0
    start[0, 1:] = cuts[-1, :-1] + 1
    start[1:] = cuts[:-1] + 1
    start, cuts = _stripped(raw, start, cuts)
    words: Words = np.ndarray((len(padded) - 8,), "<u8", buffer=padded, strides=(1,))
    return ByteFields(raw, words, start, cuts - start)


def _stripped(raw: Bytes, start: Offsets, end: Offsets) -> tuple[Offsets, Offsets]:
    """Fields without the spaces around them, as far as there are few: a reader strips what is left."""
    for _ in range(_MOST_SPACES):
        before, behind = raw[start] == _SPACE, raw[end - 1] == _SPACE
        if not (before.any() or behind.any()):
            break
        start = start + ((start < end) & before)
        end = end - ((start < end) & behind)
    return start, end


def fields_of(rows: Sequence[Sequence[str]]) -> ByteFields:
    """Rows of cells, all of one width, as fields.

    >>> fields_of([["a", "12"], ["", "7"]]).texts(1)
    ['12', '7']
    """
    cells = [cell.encode() for row in rows for cell in row]
    data = b"".join(cells) + bytes(_PAD)
    length = np.fromiter(map(len, cells), np.int64, len(cells))
    start = np.cumsum(length) - length
    width = len(rows[0]) if rows else 0
    raw = np.frombuffer(data, np.uint8)
    words: Words = np.ndarray((len(data) - 8,), "<u8", buffer=data, strides=(1,))
    shape = (len(rows), width)
    return ByteFields(raw, words, *(np.ascontiguousarray(x.reshape(shape).T) for x in (start, length)))
