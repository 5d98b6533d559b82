"""The quick way through plain device rows: a block of lines at once, on arrays.

It takes only rows it is sure of; every other row is handed back to be read one by one, so that errors are
found and worded in one place. A test holds both ways equal.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from math import nan

import numpy as np
from numpy.typing import NDArray

from core.record.channels import CHANNELS, LEAK_DEFINITIONS, Channel
from core.record.instant import Instant, parse
from core.record.message import RecordError
from core.record.reading import read_value
from core.record.samples import Times
from storage.intake.columns import OPTIONAL, Columns
from storage.intake.iso_columns import Bytes, Offsets, read_instants
from storage.intake.sample_spool import SampleSpool
from storage.intake.text_blocks import TextBlock
from storage.rules import is_device_channel

Words = NDArray[np.uint64]
_PAD = 64
_LONGEST = 40
_MANY = 64
_MASKS = np.array([0, *((1 << 8 * k) - 1 for k in range(1, 8)), 2**64 - 1], np.uint64)
_DEVICE = np.uint64(int.from_bytes(b"device", "little"))
_GROUPED = ("episode", "channel", "unit", "leak_definition")
_EMPTY = tuple(n for n in (*OPTIONAL, "note") if n != "leak_definition")
_MIX = np.uint64(0x9E3779B97F4A7C15)


@dataclass(frozen=True, slots=True)
class _Fields:
    """Where every field of a block lies: offsets and lengths of shape (rows, columns)."""

    data: Bytes
    words: Words
    start: Offsets
    length: Offsets

    def word(self, column: int, part: int, rows: Offsets) -> Words:
        """Eight bytes of a field of each row as one number, bytes beyond the field cleared."""
        length = np.clip(self.length[rows, column] - 8 * part, 0, 8)
        found: Words = self.words[self.start[rows, column] + 8 * part] & _MASKS[length]
        return found

    def text(self, row: int, column: int) -> str:
        """One field's text."""
        at = int(self.start[row, column])
        return self.data[at : at + int(self.length[row, column])].tobytes().decode()


def _fields(block: TextBlock, columns: int) -> _Fields | None:
    """Cut a block into fields; None where it is not one plain row per line."""
    data = block.data.replace(b"\r\n", b"\n") if b"\r" in block.data else block.data
    if b'"' in data or b"\r" in data or b"\n\n" in data:
        return None
    padded = data + bytes(_PAD)
    raw = np.frombuffer(padded, np.uint8)
    found = np.flatnonzero((raw == 44) | (raw == 10))
    if found.size != block.lines * columns:
        return None
    cuts: Offsets = found.astype(np.int64).reshape(-1, columns)
    if not (raw[cuts[:, -1]] == 10).all() or (raw[cuts[:, :-1]] == 10).any():
        return None
    start = np.empty_like(cuts)
    start.flat[0] = 0
    start.flat[1:] = cuts.flat[:-1] + 1
    words: Words = np.ndarray((len(padded) - 8,), "<u8", buffer=padded, strides=(1,))
    return _Fields(raw, words, start, cuts - start)


class DeviceRows:
    """Takes plain device rows of blocks into the spool and hands back the lines of all others."""

    def __init__(self, columns: Columns, spool: SampleSpool, latest: Instant) -> None:
        self._columns, self._spool, self._latest = columns, spool, latest
        self._values: dict[tuple[str, str], dict[int, tuple[float, int]]] = {}
        self._instants: dict[str, Instant] = {}

    def take(self, block: TextBlock) -> list[int] | None:
        """Take what is plain; the indices of the rows that are not, or None where the block is not plain."""
        fields = _fields(block, len(self._columns.names))
        if fields is None:
            return None
        rows = self._plain_rows(fields)
        left = np.ones(block.lines, np.bool_)
        if rows.size:
            t, good = self._times(fields, rows)
            for places in self._groups(fields, rows):
                of_group = places[good[places]]
                left[self._take_group(fields, rows[of_group], t[of_group], block.first_line)] = False
        return [int(i) for i in np.flatnonzero(left)]

    def _plain_rows(self, fields: _Fields) -> Offsets:
        index, length = self._columns.names.index, fields.length
        every = np.arange(length.shape[0])
        plain = (length[:, index("by")] == 6) & (fields.word(index("by"), 0, every) == _DEVICE)
        plain &= (length[:, index("value")] <= 8) & (length[:, index("at")] <= 32)
        for name in self._columns.names:
            if name in _EMPTY:
                plain &= length[:, index(name)] == 0
            elif name in _GROUPED:
                plain &= length[:, index(name)] <= _LONGEST
        return np.flatnonzero(plain)

    def _groups(self, fields: _Fields, rows: Offsets) -> Iterable[Offsets]:
        """Places in `rows` that share episode, channel, unit and definition of leak, group by group."""
        mixed = np.zeros(rows.size, np.uint64)
        parts: list[Words] = []
        for name in _GROUPED:
            column = self._columns.index(name)
            if column is None:
                continue
            for part in range((int(fields.length[rows, column].max()) + 7) // 8):
                word = fields.word(column, part, rows)
                parts.append(word)
                mixed = (mixed ^ word) * _MIX
                mixed ^= mixed >> np.uint64(29)
            mixed = (mixed ^ fields.length[rows, column].astype(np.uint64)) * _MIX
        _kinds, first, inverse, counts = np.unique(mixed, return_index=True, return_inverse=True, return_counts=True)
        if first.size > _MANY and first.size * 8 > rows.size:
            return  # nearly every row a group of its own: reading them one by one is quicker
        same = np.ones(rows.size, np.bool_)
        for word in parts:  # equal mixes are not yet equal fields
            same &= word == word[first][inverse]
        order = np.argsort(inverse, kind="stable")
        for places in np.split(order, np.cumsum(counts)[:-1]):
            yield places[same[places]]

    def _take_group(self, fields: _Fields, rows: Offsets, t: Times, first_line: int) -> Offsets:
        """Take the rows of one group that can be read; which ones they were."""
        none = rows[:0]
        if rows.size == 0:
            return none
        texts = {name: self._group_text(fields, int(rows[0]), name) for name in _GROUPED}
        channel = CHANNELS.get(texts["channel"])
        if channel is None or not is_device_channel(channel.key) or not _is_tidy(texts):
            return none
        v, decimals, read = self._read_values(fields, rows, channel, texts["unit"])
        rows, t, v = rows[read], t[read], v[read]
        if rows.size:
            lines = (first_line + rows).astype(np.int32)
            self._spool.add(texts["episode"], channel, texts["unit"], texts["leak_definition"], t, v, lines, decimals)
        return rows

    def _group_text(self, fields: _Fields, row: int, name: str) -> str:
        column = self._columns.index(name)
        return "" if column is None else fields.text(row, column)

    def _times(self, fields: _Fields, rows: Offsets) -> tuple[Times, NDArray[np.bool_]]:
        """The instants of rows and which could be read and may be: rows of one moment follow each other."""
        column = self._columns.names.index("at")
        new = np.ones(rows.size, np.bool_)
        new[1:] = fields.length[rows[1:], column] != fields.length[rows[:-1], column]
        for part in range(4):  # a field of 32 bytes, the longest that gets here
            word = fields.word(column, part, rows)
            new[1:] |= word[1:] != word[:-1]
        once = rows[new]
        t, good = read_instants(fields.data, fields.start[once, column], fields.length[once, column])
        for i in np.flatnonzero(~good):
            at = self._instant(fields.text(int(once[i]), column))
            if at is not None:
                t[i], good[i] = at, True
        good &= t <= self._latest
        which = np.cumsum(new) - 1
        return t[which], good[which]

    def _instant(self, text: str) -> Instant | None:
        """One instant in a less plain form; kept, since rows of one moment follow each other."""
        if text not in self._instants:
            if len(self._instants) > 100_000:
                self._instants.clear()
            try:
                self._instants[text] = parse(text)
            except RecordError:
                return None
        return self._instants[text]

    def _read_values(
        self, fields: _Fields, rows: Offsets, channel: Channel, unit: str
    ) -> tuple[NDArray[np.float64], int, NDArray[np.bool_]]:
        """Values in the canonical unit, decimals as written, and which could be read."""
        words = fields.word(self._columns.names.index("value"), 0, rows)
        kinds, inverse = np.unique(words, return_inverse=True)
        known = self._values.setdefault((channel.key, unit), {})
        read = [known[w] if w in known else _remember(known, w, channel, unit) for w in kinds.tolist()]
        numbers = np.array([n for n, _d in read])
        decimals = np.array([d for _n, d in read])
        return numbers[inverse], int(decimals.max(initial=0)), (decimals >= 0)[inverse]


def _is_tidy(texts: dict[str, str]) -> bool:
    """No space around a field, an episode, and a definition of leak that is known."""
    if not texts["episode"] or any(text != text.strip() for text in texts.values()):
        return False
    return not texts["leak_definition"] or texts["leak_definition"] in LEAK_DEFINITIONS


_UNREAD = (nan, -1)


def _remember(known: dict[int, tuple[float, int]], word: int, channel: Channel, unit: str) -> tuple[float, int]:
    """Read one distinct value as any other value is read; decimals of -1 where it cannot be."""
    text = word.to_bytes(8, "little").rstrip(b"\x00").decode("utf-8", "replace")
    if len(known) > 100_000:
        known.clear()
    known[word] = read_device_value(channel, text, unit) or _UNREAD
    return known[word]


def read_device_value(channel: Channel, text: str, unit: str) -> tuple[float, int] | None:
    """A device's value and its decimals; NaN where it wrote nothing; None where it cannot be read."""
    if not text.strip():
        return (nan, 0)
    try:
        reading = read_value(channel, text, unit)
    except RecordError:
        return None
    if reading.number is None:
        return None
    written = reading.decimals or 0
    return reading.number, written if reading.raw_unit == channel.unit else channel.decimals
