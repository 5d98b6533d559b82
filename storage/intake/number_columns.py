"""A column of numbers read at once: each distinct text once, plain ones by their digits.

What a text means is told by one function, `read`; the quick ways give just what it would: a test holds them equal.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from math import nan

import numpy as np
from numpy.typing import NDArray

from core.record.channels import Channel
from core.record.message import RecordError
from core.record.samples import Flags, Values
from storage.intake.byte_fields import ByteFields, Bytes, Offsets, Words
from storage.intake.distinct import slots

Decimals = NDArray[np.int8]
Found = tuple[float, int] | None
_BITS = 15
_FEW = 400
_KEPT = 4_000
"""New texts of a block that are had at hand for the next: where there are more, few of them come again."""
_MOST_KNOWN = 100_000
_LONGEST = 16
_MOST_DECIMALS = 100
_MOST_DIGITS = 15
"""Digits that a float64 holds exactly: their number over a power of ten is then the nearest to what is written."""
_TENS = 10.0 ** np.arange(_MOST_DIGITS + 1)


@dataclass(frozen=True, slots=True)
class Numbers:
    """Values of rows and their decimals as written; decimals of -1 where a text was refused, then NaN."""

    values: Values
    decimals: Decimals

    @property
    def good(self) -> Flags:
        """Which rows could be read."""
        found: Flags = self.decimals >= 0
        return found


class NumberColumn:
    """Reads the fields of one channel and unit, block after block."""

    def __init__(self, channel: Channel, unit: str, read: Callable[[str], Found], mark: str = ".") -> None:
        self._read, self._mark = read, ord(mark)
        self._limits = _plain_limits(channel, unit)
        self._known: dict[int | str, Found] = {}
        self._words = np.zeros(1 << _BITS, np.uint64)
        self._values = np.zeros(1 << _BITS)
        self._decimals = np.full(1 << _BITS, -1, np.int8)
        value, decimals = read("") or (nan, -1)  # no slot is empty: an empty field is the word 0
        self._keep(np.zeros(1, np.uint64), np.array([value]), np.array([decimals], np.int8))

    def read(self, fields: ByteFields, column: int, rows: Offsets | None = None) -> Numbers:
        """The values of a column's fields."""
        words = fields.word(column, 0, rows)
        slot = slots(words, _BITS)
        made = Numbers(self._values[slot], self._decimals[slot])
        missing = self._words[slot] != words
        length = fields.length[column] if rows is None else fields.length[column, rows]
        if length.max(initial=0) > 8:
            missing |= length > 8
        found = np.flatnonzero(missing)
        if found.size:
            self._read_new(fields, column, found if rows is None else rows[found], found, made)
        return made

    def _read_new(self, fields: ByteFields, column: int, rows: Offsets, places: Offsets, made: Numbers) -> None:
        """Fields that are not at hand: plain digits at once where there are many, others one by one."""
        if rows.size > _FEW and self._limits is not None:
            values, decimals = _digits(fields, column, rows, self._mark)
            low, high = self._limits
            plain = (decimals >= 0) & (values >= low) & (values <= high)
            made.values[places[plain]], made.decimals[places[plain]] = values[plain], decimals[plain]
            keep = np.flatnonzero(plain & (fields.length[column, rows] <= 8))[:_KEPT]
            self._keep(fields.word(column, 0, rows[keep]), values[keep], decimals[keep])
            rows, places = rows[~plain], places[~plain]
        short = fields.length[column, rows] <= 8
        self._read_words(fields.word(column, 0, rows[short]), places[short], made)
        for row, place in zip(rows[~short].tolist(), places[~short].tolist(), strict=True):
            text = fields.text(row, column)
            value, written = self._one(text, text) or (nan, -1)
            made.values[place], made.decimals[place] = value, min(written, _MOST_DECIMALS)

    def _read_words(self, words: Words, places: Offsets, made: Numbers) -> None:
        if words.size == 0:
            return
        kinds, which = np.unique(words, return_inverse=True)
        read = [self._one(w, _text(w)) for w in kinds.tolist()]
        values = np.array([nan if r is None else r[0] for r in read])
        decimals = np.array([-1 if r is None else min(r[1], _MOST_DECIMALS) for r in read], np.int8)
        self._keep(kinds, values, decimals)
        made.values[places], made.decimals[places] = values[which], decimals[which]

    def _one(self, key: int | str, text: str) -> Found:
        """One distinct text, read once."""
        if key not in self._known:
            if len(self._known) > _MOST_KNOWN:
                self._known.clear()
            self._known[key] = self._read(text)
        return self._known[key]

    def _keep(self, words: Words, values: Values, decimals: Decimals) -> None:
        """Have words at hand for the next block; of two in one slot the later stays."""
        slot = slots(words, _BITS)
        self._words[slot], self._values[slot], self._decimals[slot] = words, values, decimals


def _text(word: int) -> str:
    return word.to_bytes(8, "little").rstrip(b"\x00").decode("utf-8", "replace")


def _plain_limits(channel: Channel, unit: str) -> tuple[float, float] | None:
    """The limits within which a written number is the value itself; None where it has to be converted."""
    try:
        own = channel.unit_named(unit or channel.unit) is channel.units[0]
    except RecordError:
        own = False
    if not own or channel.unit in ("fraction", "pH") or channel.hard is None:
        return None
    return channel.hard


def _digits(fields: ByteFields, column: int, rows: Offsets, mark: int) -> tuple[Values, Decimals]:
    """Numbers of plain digits, shape (n,), and their decimals; -1 where it is anything else."""
    length = fields.length[column, rows]
    parts = min(fields.parts(column, rows), _LONGEST // 8)
    if parts == 1:
        total, behind = _short_digits(fields.word(column, 0, rows), length, mark)
    else:
        total, behind = plain_digits(fields.table(column, parts, rows), length, mark)
    return total / _TENS[np.maximum(behind, 0)], behind.astype(np.int8)


def _short_digits(words: Words, length: Offsets, mark: int) -> tuple[NDArray[np.int64], Offsets]:
    """As `plain_digits`, for texts of up to eight bytes that are one word each: all digits of a word in one go."""
    ones, highs = np.uint64(0x0101010101010101), np.uint64(0x8080808080808080)
    zero, eight = np.uint64(0), np.uint64(8)
    differs = words ^ (ones * np.uint64(mark))
    found = (differs - ones) & ~differs & highs  # the lowest bit set is that of the first mark
    marked = found != zero
    below = np.where(marked, (found & (~found + np.uint64(1))) - np.uint64(1), ~zero) >> np.uint64(7)
    below = np.where(marked, below, ~zero)  # the bytes before the mark
    place = np.where(marked, np.bitwise_count(below) // eight, 0).astype(np.int64)
    joined = (words & below) | ((words >> eight) & ~below)
    digits = np.clip(length - marked, 0, 8)
    shift = ((8 - digits) * 8).astype(np.uint64)
    full = np.where(digits > 0, (joined << shift) | (ones * np.uint64(48)) & ~(~zero << shift), zero)
    is_plain = ((full + ones * np.uint64(70)) | (full - ones * np.uint64(48))) & highs == zero
    behind = np.where(marked, length - 1 - place, 0)
    good = is_plain & (length <= 8) & (digits > 0) & (~marked | ((place > 0) & (behind > 0)))
    value = full - ones * np.uint64(48)
    value = (value * np.uint64(10) + (value >> eight)) & np.uint64(0x00FF00FF00FF00FF)
    value = (value * np.uint64(100) + (value >> np.uint64(16))) & np.uint64(0x0000FFFF0000FFFF)
    value = (value * np.uint64(10_000) + (value >> np.uint64(32))) & np.uint64(0xFFFFFFFF)
    return np.where(good, value, zero).astype(np.int64), np.where(good, behind, -1)


def plain_digits(table: Bytes, length: Offsets, mark: int) -> tuple[NDArray[np.int64], Offsets]:
    """Digits with at most one decimal mark: as one whole number, and how many stand behind the mark.

    `table` holds the texts, shape (n, width), zeros behind each. Anything else has -1 behind the mark.
    """
    rows, width = table.shape
    total, digits, behind = (np.zeros(rows, np.int64) for _ in range(3))
    marked = np.zeros(rows, np.bool_)
    good = (length > 0) & (length <= width)
    for place in range(min(width, int(length.max(initial=0)))):
        char, inside = table[:, place], length > place
        is_digit = (char >= 48) & (char <= 57) & inside
        is_mark = (char == mark) & inside & ~marked & (digits > 0)
        good &= is_digit | is_mark | ~inside
        total = np.where(is_digit & (digits < _MOST_DIGITS), total * 10 + (char.astype(np.int64) - 48), total)
        digits += is_digit
        behind += is_digit & marked
        marked |= is_mark
    good &= (digits > 0) & (digits <= _MOST_DIGITS) & (~marked | (behind > 0))
    return total, np.where(good, behind, -1)
