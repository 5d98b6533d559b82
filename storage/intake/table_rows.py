"""A block of a table's rows becomes samples and entries by its mapping; every cell that is wrong is named."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from core.record import instant
from core.record.channels import CHANNELS, Channel, Kind
from core.record.entries import from_reading
from core.record.instant import Instant
from core.record.message import Message, RecordError, Value, refuse
from core.record.samples import Flags, Times
from storage.draft_batch import DraftEntry
from storage.intake.coded_value import SELF_EVIDENT
from storage.intake.findings import CLOCK_LEAD, Findings
from storage.intake.held_settings import SettingChanges
from storage.intake.mapping import Mapping, is_sampled
from storage.intake.row_reading import EntryRow
from storage.intake.sample_spool import SampleSpool
from storage.intake.table import fitted
from storage.intake.table_cells import DeviceCells, is_absent, read_cell
from storage.intake.table_text import RowBlock
from storage.intake.table_times import read_time, read_times

_MOST_KEY = 200


@dataclass(frozen=True, slots=True)
class Answers:
    """What a person says of one file beside its mapping: whose it is, and by how much the device's clock was off.

    `clock_shift_s` is added to every time.
    """

    episode: str = ""
    clock_shift_s: float = 0.0


@dataclass(frozen=True, slots=True)
class _Rows:
    """Rows of a block by column, with their instants. `good` tells which instants could be read."""

    lines: NDArray[np.int32]
    columns: list[list[str]]
    t: Times
    good: Flags


class TableRows:
    """Reads blocks of rows. Device channels go to the spool, everything else becomes entries."""

    def __init__(
        self, header: tuple[str, ...], mapping: Mapping, answers: Answers, now: Instant, findings: Findings,
        spool: SampleSpool, changes: SettingChanges,
    ) -> None:  # fmt: skip
        self._header, self._mapping, self._answers = header, mapping, answers
        self._now, self._findings, self._spool, self._changes = now, findings, spool, changes
        self._shift = round(answers.clock_shift_s * 1_000_000)
        self._place = {name: i for i, name in enumerate(header)}
        self._cells: dict[tuple[str, str], DeviceCells] = {}
        self.entries: list[EntryRow] = []
        self.rows = 0

    def take(self, block: RowBlock) -> None:
        """Take a block of rows."""
        rows = self._timed(block)
        if rows is None:
            return
        episodes = self._episodes(rows)
        if self._mapping.long is not None:
            self._take_long(rows, episodes)
        else:
            for use in self._mapping.used:
                texts = rows.columns[self._place[use.column]]
                self._take_column(rows, episodes, use.column, CHANNELS[use.channel], use.unit, texts)

    def _timed(self, block: RowBlock) -> _Rows | None:
        columns, dates = block.columns, self._place[self._mapping.time.date]
        if columns is None or len(columns) != len(self._header) or "" in columns[dates]:
            block = _by_rows(block)
            found = self._fitted(block)
            if found is None:
                return None
            columns, lines = found
        else:
            lines = list(block.lines)
        self.rows += len(lines)
        t, good = self._times(columns, lines)
        return _Rows(np.array(lines, np.int32), columns, t, good)

    def _fitted(self, block: RowBlock) -> tuple[list[list[str]], list[int]] | None:
        """The columns of rows that are as wide as the header; others are refused, empty ones passed over."""
        width = len(self._header)
        kept, lines = [], []
        for cells, line in zip(block.rows, block.lines, strict=True):
            row = fitted(cells, width)
            if len(row) != width:
                message = Message("row.columns", {"found": len(row), "accepted": width})
                self._findings.refuse(line, "", ",".join(cells)[:80], message)
            elif any(row):
                kept.append(row)
                lines.append(line)
        return (list(map(list, zip(*kept, strict=True))), lines) if kept else None

    def _times(self, columns: list[list[str]], lines: list[int]) -> tuple[Times, Flags]:
        use = self._mapping.time
        texts = list(columns[self._place[use.date]])
        if use.clock:
            clocks = columns[self._place[use.clock]]
            texts = [f"{d.split(' ')[0]} {c}" for d, c in zip(texts, clocks, strict=True)]
        t, good = read_times(texts, use)
        for i in np.flatnonzero(~good).tolist():
            try:
                t[i], good[i] = read_time(texts[i], use), True
            except RecordError as error:
                self._findings.refuse(lines[i], use.date, texts[i], error.message)
        t += self._shift
        latest = self._now + CLOCK_LEAD
        for i in np.flatnonzero(good & (t > latest)).tolist():
            values: dict[str, Value] = {"value": texts[i][:80], "now": instant.iso_second(self._now),
                                        "accepted": "at most 5 min ahead of the clock"}  # fmt: skip
            message = Message("instant.in_future", values)
            self._findings.refuse(lines[i], use.date, texts[i], message)
            good[i] = False
        return t, good

    def _episodes(self, rows: _Rows) -> Sequence[str]:
        """The episode of each row; an empty one is refused."""
        if not self._mapping.episode_column:
            return (self._answers.episode,) * len(rows.lines)
        texts = [x.strip() for x in rows.columns[self._place[self._mapping.episode_column]]]
        for i, text in enumerate(texts):
            if not text or len(text) > _MOST_KEY:
                values: dict[str, Value] = {
                    "value": text[:80],
                    "accepted": f"a key of 1 to {_MOST_KEY} letters",
                }
                message = Message("entry.no_episode", values)
                self._findings.refuse(int(rows.lines[i]), self._mapping.episode_column, text, message)
                rows.good[i] = False
        return texts

    def _take_long(self, rows: _Rows, episodes: Sequence[str]) -> None:
        long = self._mapping.long
        if long is None:
            return
        words = [x.strip() for x in rows.columns[self._place[long.channel]]]
        values = rows.columns[self._place[long.value]]
        units = [x.strip() for x in rows.columns[self._place[long.unit]]] if long.unit else None
        groups: dict[tuple[str, str], list[int]] = {}
        for i, word in enumerate(words):
            groups.setdefault((word, units[i] if units else long.units.get(word, "")), []).append(i)
        for (word, unit), places in groups.items():
            key = long.names.get(word)
            if key is None:
                error = refuse("mapping.word_unknown", value=word[:80], accepted="a word that the mapping names")
                for i in places:
                    self._findings.refuse(int(rows.lines[i]), long.channel, word, error.message)
            elif key:
                some = np.array(places)
                columns = [[c[i] for i in places] for c in rows.columns]
                part = _Rows(rows.lines[some], columns, rows.t[some], rows.good[some])
                texts = tuple(values[i] for i in places)
                of = tuple(episodes[i] for i in places)
                self._take_unit(part, of, long.value, CHANNELS[key], unit, texts)

    def _take_unit(
        self,
        rows: _Rows,
        episodes: Sequence[str],
        column: str,
        known: Channel,
        unit: str,
        texts: Sequence[str],
    ) -> None:
        """A column whose unit the table itself names: it must be one of the channel's, and must be there."""
        if known.kind is Kind.NUMBER:
            try:
                given = unit or (known.unit if len(known.units) == 1 or known.unit in SELF_EVIDENT else "")
                unit = known.unit_named(given).name if given else _no_unit(known)
            except RecordError as error:
                for line, text in zip(rows.lines.tolist(), texts, strict=True):
                    if not is_absent(text):
                        self._findings.refuse(line, column, f"{text} {unit}".strip(), error.message)
                return
        self._take_column(rows, episodes, column, known, unit if known.kind is Kind.NUMBER else "", texts)

    def _take_column(
        self,
        rows: _Rows,
        episodes: Sequence[str],
        column: str,
        known: Channel,
        unit: str,
        texts: Sequence[str],
    ) -> None:
        if is_sampled(self._mapping, known.key):
            self._take_samples(rows, episodes, column, known, unit, texts)
            return
        texts = [x.strip() for x in texts]
        if self._mapping.written_by == "device":
            self._take_changes(rows, episodes, column, known, unit, texts)
        else:
            for i, text in enumerate(texts):
                if rows.good[i] and not is_absent(text):
                    made = self._entry(rows, i, episodes[i], column, known, unit, text)
                    self.entries += [made] if made is not None else []

    def _take_samples(
        self,
        rows: _Rows,
        episodes: Sequence[str],
        column: str,
        known: Channel,
        unit: str,
        texts: Sequence[str],
    ) -> None:
        cells = self._cells.setdefault((known.key, unit), DeviceCells(known, unit, self._mapping.decimal))
        distinct = {text: cells.read(text) for text in set(texts)}
        good = rows.good
        if None in distinct.values():
            good = good.copy()
            for i, text in enumerate(texts):
                if distinct[text] is None:
                    if good[i]:
                        self._findings.refuse(int(rows.lines[i]), column, text, cells.fault(text).message)
                    good[i] = False
        values = {text: 0.0 if found is None else found[0] for text, found in distinct.items()}
        numbers = np.fromiter(map(values.__getitem__, texts), np.float64, len(texts))
        decimals = max((r[1] for r in distinct.values() if r is not None), default=0)
        definition = self._mapping.leak_definition if known.key == "leak" else ""
        whose = dict.fromkeys(episodes)
        for episode in whose:
            mine = good if len(whose) == 1 else good & np.array([e == episode for e in episodes])
            if mine.any():
                self._spool.add(episode, known, unit, definition, rows.t[mine], numbers[mine], rows.lines[mine],
                                decimals)  # fmt: skip

    def _take_changes(
        self,
        rows: _Rows,
        episodes: Sequence[str],
        column: str,
        known: Channel,
        unit: str,
        texts: Sequence[str],
    ) -> None:
        """What a device writes in every row and a person sets now and then: only its changes are entries."""
        before: tuple[str, str] | None = None
        for i, text in enumerate(texts):
            if not rows.good[i] or is_absent(text) or (episodes[i], text) == before:
                continue
            made = self._entry(rows, i, episodes[i], column, known, unit, text)
            if made is not None:
                before = (episodes[i], text)
                self._changes.note(made)

    def _entry(
        self, rows: _Rows, i: int, episode: str, column: str, known: Channel, unit: str, text: str
    ) -> EntryRow | None:
        line = int(rows.lines[i])
        try:
            reading = read_cell(known, text, unit, self._mapping.decimal, self._mapping.time)
        except RecordError as error:
            self._findings.refuse(line, column, text, error.message)
            return None
        column_of_by = self._mapping.by_column
        by = rows.columns[self._place[column_of_by]][i].strip() if column_of_by else ""
        by = "device" if self._mapping.written_by == "device" else by or "table"
        zone = self._mapping.time.zone or "UTC"
        entry = from_reading(episode, int(rows.t[i]), reading, by=by, zone=zone)
        definition = self._mapping.leak_definition if known.key == "leak" else ""
        if definition:
            self._spool.note_leak(episode, definition, entry.at, entry.at, line)
        return EntryRow(line, DraftEntry(entry), definition, reading.doubts)


def _by_rows(block: RowBlock) -> RowBlock:
    """A block by rows, whichever way it was cut."""
    if block.columns is None:
        return block
    return RowBlock([list(row) for row in zip(*block.columns, strict=True)], block.lines)


def _no_unit(known: Channel) -> str:
    accepted = ", ".join(u.name for u in known.units)
    raise refuse("unit.missing", channel=known.key, value="", accepted=accepted)
