"""A block of a table's rows becomes samples and entries by its mapping; every cell that is wrong is named."""

from __future__ import annotations

from collections.abc import Iterator
from collections.abc import Mapping as Map
from dataclasses import dataclass, field, replace
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

from core.record import instant
from core.record.channels import CHANNELS, Channel, Kind
from core.record.entries import from_reading
from core.record.instant import Instant
from core.record.message import Message, RecordError, Value, refuse
from core.record.samples import Flags, Times
from storage.draft_batch import DraftEntry
from storage.intake.byte_fields import ByteFields, Offsets, fields_of
from storage.intake.coded_value import SELF_EVIDENT
from storage.intake.distinct import groups
from storage.intake.findings import CLOCK_LEAD, Findings, check_entry_count
from storage.intake.held_settings import SettingChanges
from storage.intake.mapping import Mapping, is_sampled
from storage.intake.named_episodes import NamedEpisodes
from storage.intake.number_columns import NumberColumn
from storage.intake.row_reading import EntryRow
from storage.intake.sample_spool import SampleSpool
from storage.intake.table import fitted
from storage.intake.table_cells import device_cell, fault_of, is_absent, read_cell
from storage.intake.table_text import RowBlock
from storage.intake.table_times import read_time
from storage.intake.time_columns import read_times

_FAR = 1 << 62


@dataclass(frozen=True, slots=True)
class Answers:
    """What a person says of one file beside its mapping: whose it is, and by how much the device's clock was off.

    `clock_shift_s` is added to every time. `named` says which episode a name in the table's own column means.
    """

    episode: str = ""
    clock_shift_s: float = 0.0
    named: Map[str, str] = field(default_factory=dict)


@dataclass(frozen=True, slots=True)
class _Rows:
    """Rows of a block of one episode: their places in its fields, their lines and instants."""

    fields: ByteFields
    at: Offsets
    lines: NDArray[np.int32]
    t: Times
    episode: str = ""

    def some(self, places: Offsets | Flags, episode: str | None = None) -> _Rows:
        """Some of the rows."""
        of = self.episode if episode is None else episode
        return _Rows(self.fields, self.at[places], self.lines[places], self.t[places], of)


@dataclass(frozen=True, slots=True)
class _Target:
    """What a column's values are."""

    column: str
    channel: Channel
    unit: str


class TableRows:
    """Reads blocks of rows. Device channels go to the spool, everything else becomes entries."""

    def __init__(
        self, header: tuple[str, ...], mapping: Mapping, answers: Answers, now: Instant, findings: Findings,
        spool: SampleSpool, changes: SettingChanges, named: NamedEpisodes,
    ) -> None:  # fmt: skip
        self._named, self._late = named, set[str]()
        self._header, self._mapping, self._answers = header, mapping, answers
        self._now, self._findings, self._spool, self._changes = now, findings, spool, changes
        self._shift = round(answers.clock_shift_s * 1_000_000)
        self._place = {name: i for i, name in enumerate(header)}
        self._numbers: dict[tuple[str, str], NumberColumn] = {}
        self._before: dict[tuple[str, str], tuple[str, int]] = {}
        self.entries: list[EntryRow] = []
        self.rows = 0

    def take(self, block: RowBlock) -> None:
        """Take a block of rows."""
        fields, lines = self._fields(block)
        rows = np.flatnonzero(fields.length.any(axis=0)) if fields.rows else np.empty(0, np.int64)
        rows = self._as_wide_as_the_header(fields, rows, lines)
        self.rows += rows.size
        if rows.size == 0:
            return
        t, good = self._times(fields, rows, lines)
        timed = _Rows(fields, rows, lines[rows], t).some(good)
        for of_one in self._by_episode(timed):
            if self._mapping.long is not None:
                self._take_long(of_one)
            else:
                for use in self._mapping.used:
                    self._take_column(of_one, _Target(use.column, CHANNELS[use.channel], use.unit))
        check_entry_count(self.entries, int(lines[-1]))

    # rows and their times

    def _fields(self, block: RowBlock) -> tuple[ByteFields, NDArray[np.int32]]:
        """The fields of a block; rows that are wider than the header are refused."""
        if block.fields is not None:
            lines = block.lines
            if isinstance(lines, range):
                return block.fields, np.arange(lines.start, lines.stop, dtype=np.int32)
            return block.fields, np.asarray(lines, np.int32)
        width = len(self._header)
        kept, of_kept = [], []
        for cells, line in zip(block.rows, block.lines, strict=True):
            row = fitted(cells, width)
            if len(row) != width:
                self._refuse_width(line, ",".join(cells), len(row))
            else:
                kept.append(row)
                of_kept.append(line)
        return fields_of(kept), np.array(of_kept, np.int32)

    def _as_wide_as_the_header(self, fields: ByteFields, rows: Offsets, lines: NDArray[np.int32]) -> Offsets:
        """The rows with nothing behind the header's last column; others are refused."""
        width = len(self._header)
        if fields.start.shape[0] <= width:
            return rows
        beyond = fields.length[width:, rows].any(axis=0)
        for row in rows[beyond].tolist():
            cells = [fields.text(row, c).strip() for c in range(fields.start.shape[0])]
            found = len(fitted(cells, width))
            if found != width:
                self._refuse_width(int(lines[row]), ",".join(cells), found)
        return rows[~beyond]

    def _refuse_width(self, line: int, shown: str, found: int) -> None:
        message = Message("row.columns", {"found": found, "accepted": len(self._header)})
        self._findings.refuse(line, "", shown[:80], message)

    def _times(self, fields: ByteFields, rows: Offsets, lines: NDArray[np.int32]) -> tuple[Times, Flags]:
        use = self._mapping.time
        date, clock = self._place[use.date], self._place[use.clock] if use.clock else None
        t, good = read_times(fields, date, clock, rows, use)
        for i in np.flatnonzero(~good).tolist():
            text = self._time_text(fields, int(rows[i]))
            try:
                t[i], good[i] = read_time(text, use), True
            except RecordError as error:
                self._findings.refuse(int(lines[rows[i]]), use.date, text, error.message)
        t += self._shift
        for i in np.flatnonzero(good & (t > self._now + CLOCK_LEAD)).tolist():
            text = self._time_text(fields, int(rows[i]))
            values: dict[str, Value] = {"value": text[:80], "now": instant.iso_second(self._now),
                                        "accepted": "at most 5 min ahead of the clock"}  # fmt: skip
            self._findings.refuse(int(lines[rows[i]]), use.date, text, Message("instant.in_future", values))
            good[i] = False
        return t, good

    def _time_text(self, fields: ByteFields, row: int) -> str:
        use = self._mapping.time
        text = fields.text(row, self._place[use.date]).strip()
        return f"{text.split(' ')[0]} {fields.text(row, self._place[use.clock]).strip()}" if use.clock else text

    def _by_episode(self, rows: _Rows) -> Iterator[_Rows]:
        """The rows of each episode; those of which it is not known whose they are, are refused."""
        if not self._mapping.episode_column:
            yield replace(rows, episode=self._answers.episode)
            return
        column = self._place[self._mapping.episode_column]
        of: dict[str, list[Offsets]] = {}
        for places in groups(rows.fields, (column,), rows.at):
            name = rows.fields.text(int(rows.at[places[0]]), column).strip()
            try:
                of.setdefault(self._named.episode(name), []).append(places)
            except RecordError as error:
                for line in rows.some(places).lines.tolist():
                    self._findings.refuse(line, self._mapping.episode_column, name, error.message)
        for key, found in of.items():
            some = rows.some(np.sort(np.concatenate(found)), key)
            self._doubt_late(some, column)
            yield some

    def _doubt_late(self, rows: _Rows, column: int) -> None:
        """Say once of an episode that its support ended before a row: another patient may have that bed now."""
        ended = self._named.ended_at(rows.episode) if rows.episode not in self._late else None
        if ended is None:
            return
        late = np.flatnonzero(rows.t > ended)
        if late.size:
            self._late.add(rows.episode)
            first = int(late[0])
            name = rows.fields.text(int(rows.at[first]), column).strip()
            values: dict[str, Value] = {"value": rows.episode, "ended_at": ended, "at": int(rows.t[first])}
            self._findings.doubt(int(rows.lines[first]), self._mapping.episode_column, name,
                                 Message("table.after_end", values))  # fmt: skip

    # values

    def _take_long(self, rows: _Rows) -> None:
        long = self._mapping.long
        if long is None:
            return
        columns = [self._place[c] for c in (long.channel, long.unit) if c]
        for places in groups(rows.fields, columns, rows.at):
            some = rows.some(places)
            word, *unit = (some.fields.text(int(some.at[0]), c).strip() for c in columns)
            key = long.names.get(word)
            if key is None:
                error = refuse("mapping.word_unknown", value=word[:80], accepted="a word that the mapping names")
                for line in some.lines.tolist():
                    self._findings.refuse(line, long.channel, word, error.message)
            elif key:
                given = unit[0] if unit else long.units.get(word, "")
                self._take_unit(some, _Target(long.value, CHANNELS[key], given))

    def _take_unit(self, rows: _Rows, target: _Target) -> None:
        """A column whose unit the table itself names: it must be one of the channel's, and must be there."""
        known, unit = target.channel, target.unit
        if known.kind is not Kind.NUMBER:
            self._take_column(rows, replace(target, unit=""))
            return
        try:
            given = unit or (known.unit if len(known.units) == 1 or known.unit in SELF_EVIDENT else "")
            unit = known.unit_named(given).name if given else _no_unit(known)
        except RecordError as error:
            column = self._place[target.column]
            for row, line in zip(rows.at.tolist(), rows.lines.tolist(), strict=True):
                text = rows.fields.text(row, column).strip()
                if not is_absent(text):
                    self._findings.refuse(line, target.column, f"{text} {unit}".strip(), error.message)
            return
        self._take_column(rows, replace(target, unit=unit))

    def _take_column(self, rows: _Rows, target: _Target) -> None:
        if is_sampled(self._mapping, target.channel.key):
            self._take_samples(rows, target)
        elif self._mapping.written_by == "device":
            self._take_changes(rows, target)
        else:
            column = self._place[target.column]
            for i, row in enumerate(rows.at.tolist()):
                text = rows.fields.text(row, column).strip()
                if not is_absent(text):
                    made = self._entry(rows, i, target, text)
                    self.entries += [made] if made is not None else []

    def _take_samples(self, rows: _Rows, target: _Target) -> None:
        known, unit, column = target.channel, target.unit, self._place[target.column]
        numbers = self._numbers_of(known, unit).read(rows.fields, column, rows.at)
        good = numbers.good
        if not good.all():
            for i in np.flatnonzero(~good).tolist():
                text = rows.fields.text(int(rows.at[i]), column).strip()
                fault = fault_of(known, text, unit, self._mapping.decimal)
                self._findings.refuse(int(rows.lines[i]), target.column, text, fault.message)
            rows = rows.some(good)
        if rows.at.size:
            definition = self._mapping.leak_definition if known.key == "leak" else ""
            self._spool.add(rows.episode, known, unit, definition, rows.t, numbers.values[good], rows.lines,
                            int(numbers.decimals[good].max()))  # fmt: skip

    def _numbers_of(self, known: Channel, unit: str) -> NumberColumn:
        key, mark = (known.key, unit), self._mapping.decimal
        if key not in self._numbers:
            self._numbers[key] = NumberColumn(known, unit, lambda text: device_cell(known, text, unit, mark), mark)
        return self._numbers[key]

    def _take_changes(self, rows: _Rows, target: _Target) -> None:
        """What a device writes in every row and a person sets now and then: only its changes are entries."""
        column, key = self._place[target.column], (rows.episode, target.channel.key)
        starts = np.append(_runs(rows, column), rows.at.size)
        for i, end in pairwise(starts.tolist()):
            text = rows.fields.text(int(rows.at[i]), column).strip()
            before, since = self._before.get(key, ("", -_FAR))
            if is_absent(text) or (text == before and rows.t[i] >= since):
                continue
            made = self._entry(rows, i, target, text)
            if made is None:
                for k in range(i + 1, end):  # each row is named, not the first alone
                    self._entry(rows, k, target, text)
                continue
            self._before[key] = (text, int(rows.t[end - 1]))
            self._changes.note(made)

    def _entry(self, rows: _Rows, i: int, target: _Target, text: str) -> EntryRow | None:
        line, row = int(rows.lines[i]), int(rows.at[i])
        try:
            reading = read_cell(target.channel, text, target.unit, self._mapping.decimal, self._mapping.time)
        except RecordError as error:
            self._findings.refuse(line, target.column, text, error.message)
            return None
        column = self._mapping.by_column
        by = rows.fields.text(row, self._place[column]).strip() if column else ""
        by = "device" if self._mapping.written_by == "device" else by or "table"
        zone = self._mapping.time.zone or "UTC"
        entry = from_reading(rows.episode, int(rows.t[i]), reading, by=by, zone=zone)
        definition = self._mapping.leak_definition if target.channel.key == "leak" else ""
        if definition:
            self._spool.note_leak(rows.episode, definition, entry.at, entry.at, line)
        return EntryRow(line, DraftEntry(entry), definition, reading.doubts)


def _runs(rows: _Rows, column: int) -> Offsets:
    """Where a column's text begins to be another than in the row before, or the time steps back."""
    new = np.ones(rows.at.size, np.bool_)
    new[1:] = rows.t[1:] < rows.t[:-1]
    for part in range(rows.fields.parts(column, rows.at)):
        word = rows.fields.word(column, part, rows.at)
        new[1:] |= word[1:] != word[:-1]
    return np.flatnonzero(new)


def _no_unit(known: Channel) -> str:
    accepted = ", ".join(u.name for u in known.units)
    raise refuse("unit.missing", channel=known.key, value="", accepted=accepted)
