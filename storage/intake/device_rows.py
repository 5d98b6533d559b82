"""The quick way through plain device rows: a block of lines at once, on arrays.

It takes only rows it is sure of; every other row is handed back to be read one by one, so that errors are
found and worded in one place. A test holds both ways equal.
"""

from __future__ import annotations

from math import nan

import numpy as np
from numpy.typing import NDArray

from core.record.channels import CHANNELS, LEAK_DEFINITIONS, Channel
from core.record.instant import Instant, parse
from core.record.message import RecordError
from core.record.reading import read_value
from core.record.samples import Times
from storage.intake.byte_fields import ByteFields, Offsets, cut_fields
from storage.intake.columns import OPTIONAL, Columns
from storage.intake.distinct import groups
from storage.intake.iso_columns import read_instants
from storage.intake.number_columns import NumberColumn
from storage.intake.sample_spool import SampleSpool
from storage.intake.text_blocks import TextBlock
from storage.rules import is_device_channel

_LONGEST = 40
_LONGEST_TIME = 32
_MANY = 64
_DEVICE = np.uint64(int.from_bytes(b"device", "little"))
_GROUPED = ("episode", "channel", "unit", "leak_definition")
_EMPTY = tuple(n for n in (*OPTIONAL, "note") if n != "leak_definition")


class DeviceRows:
    """Takes plain device rows of blocks into the spool and hands back the lines of all others."""

    def __init__(self, columns: Columns, spool: SampleSpool, latest: Instant) -> None:
        self._columns, self._spool, self._latest = columns, spool, latest
        self._grouped = [i for i in map(columns.index, _GROUPED) if i is not None]
        self._numbers: dict[tuple[str, str], NumberColumn] = {}
        self._instants: dict[str, Instant] = {}

    def take(self, block: TextBlock) -> list[int] | None:
        """Take what is plain; the indices of the rows that are not, or None where the block is not plain."""
        data = block.data.replace(b"\r\n", b"\n") if b"\r" in block.data else block.data
        fields = cut_fields(data, ",", len(self._columns.names), block.lines)
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

    def _plain_rows(self, fields: ByteFields) -> Offsets:
        index, length = self._columns.names.index, fields.length
        plain = (length[index("by")] == 6) & (fields.word(index("by")) == _DEVICE)
        plain &= (length[index("value")] <= _LONGEST) & (length[index("at")] <= _LONGEST_TIME)
        for name in self._columns.names:
            if name in _EMPTY:
                plain &= length[index(name)] == 0
            elif name in _GROUPED:
                plain &= length[index(name)] <= _LONGEST
        return np.flatnonzero(plain)

    def _groups(self, fields: ByteFields, rows: Offsets) -> list[Offsets]:
        """Places in `rows` that share episode, channel, unit and definition of leak, group by group."""
        found = groups(fields, self._grouped, rows)
        # where nearly every row is a group of its own, reading them one by one is quicker
        return [] if len(found) > _MANY and len(found) * 8 > rows.size else found

    def _take_group(self, fields: ByteFields, rows: Offsets, t: Times, first_line: int) -> Offsets:
        """Take the rows of one group that can be read; which ones they were."""
        none = rows[:0]
        if rows.size == 0:
            return none
        texts = {name: self._group_text(fields, int(rows[0]), name) for name in _GROUPED}
        channel = CHANNELS.get(texts["channel"])
        if channel is None or not is_device_channel(channel.key) or not _is_tidy(texts):
            return none
        column = self._numbers_of(channel, texts["unit"])
        if column is None:
            return none
        numbers = column.read(fields, self._columns.names.index("value"), rows)
        read = numbers.good
        rows, t, v = rows[read], t[read], numbers.values[read]
        if rows.size:
            lines, decimals = (first_line + rows).astype(np.int32), int(numbers.decimals[read].max())
            self._spool.add(texts["episode"], channel, texts["unit"], texts["leak_definition"], t, v, lines, decimals)
        return rows

    def _numbers_of(self, channel: Channel, unit: str) -> NumberColumn | None:
        """What reads a channel's values in a unit; None where the unit is not the channel's."""
        try:
            key = (channel.key, channel.unit_named(unit).name if unit else "")
        except RecordError:
            return None
        if key not in self._numbers:
            self._numbers[key] = NumberColumn(channel, unit, lambda text: read_device_value(channel, text, key[1]))
        return self._numbers[key]

    def _group_text(self, fields: ByteFields, row: int, name: str) -> str:
        column = self._columns.index(name)
        return "" if column is None else fields.text(row, column)

    def _times(self, fields: ByteFields, rows: Offsets) -> tuple[Times, NDArray[np.bool_]]:
        """The instants of rows and which could be read and may be: rows of one moment follow each other."""
        column = self._columns.names.index("at")
        new = np.ones(rows.size, np.bool_)
        new[1:] = fields.length[column, rows[1:]] != fields.length[column, rows[:-1]]
        for part in range(fields.parts(column, rows)):
            word = fields.word(column, part, rows)
            new[1:] |= word[1:] != word[:-1]
        once = rows[new]
        t, good = read_instants(fields.data, fields.start[column, once], fields.length[column, once])
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


def _is_tidy(texts: dict[str, str]) -> bool:
    """No space around a field, an episode, and a definition of leak that is known."""
    if not texts["episode"] or any(text != text.strip() for text in texts.values()):
        return False
    return not texts["leak_definition"] or texts["leak_definition"] in LEAK_DEFINITIONS


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
