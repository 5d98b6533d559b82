"""The first rows of a table as they would be recorded: cell by cell the value, or why it is refused."""

from __future__ import annotations

from dataclasses import dataclass

from core.record.channels import CHANNELS, Kind
from core.record.instant import Instant
from core.record.message import Message, RecordError
from core.record.reading import Reading
from storage.intake.mapping import Mapping
from storage.intake.table import Table
from storage.intake.table_cells import is_absent, read_cell
from storage.intake.table_rows import Answers
from storage.intake.table_times import read_time


@dataclass(frozen=True, slots=True)
class PreviewCell:
    """One value as it would be recorded; `problem` says why not, or what is doubtful about it."""

    column: str
    channel: str
    reading: Reading | None
    raw: str
    problem: Message | None = None


@dataclass(frozen=True, slots=True)
class PreviewRow:
    """One row as it would be recorded. `at` is None, with the reason, where its time cannot be read."""

    line: int
    at: Instant | None
    at_raw: str
    at_problem: Message | None
    episode: str
    cells: tuple[PreviewCell, ...]


def preview(table: Table, mapping: Mapping, answers: Answers, rows: int = 12) -> tuple[PreviewRow, ...]:
    """The first rows by a mapping that need not be complete: what is not answered yet stays unread."""
    place = {name: i for i, name in enumerate(table.header)}
    return tuple(_row(line, cells, place, mapping, answers) for line, cells in table.first[:rows])


def _row(line: int, cells: tuple[str, ...], place: dict[str, int], mapping: Mapping, answers: Answers) -> PreviewRow:
    def cell(column: str) -> str:
        return cells[place[column]] if column in place and place[column] < len(cells) else ""

    use = mapping.time
    shown = f"{cell(use.date).split(' ')[0]} {cell(use.clock)}" if use.clock else cell(use.date)
    at, why = None, None
    if use.date and use.order:
        try:
            at = read_time(shown, use) + round(answers.clock_shift_s * 1_000_000)
        except RecordError as error:
            why = error.message
    episode = cell(mapping.episode_column) if mapping.episode_column else answers.episode
    if mapping.long is not None:
        long = mapping.long
        key = long.names.get(cell(long.channel), "")
        unit = cell(long.unit) if long.unit else long.units.get(cell(long.channel), "")
        parts = [(long.value, key, unit)]
    else:
        parts = [(c.column, c.channel, c.unit) for c in mapping.used]
    read = tuple(_cell(column, key, cell(column), unit, mapping) for column, key, unit in parts if key in CHANNELS)
    return PreviewRow(line, at, shown, why, episode, read)


def _cell(column: str, key: str, text: str, unit: str, mapping: Mapping) -> PreviewCell:
    known = CHANNELS[key]
    if is_absent(text):
        return PreviewCell(column, key, None, text)
    if known.kind is Kind.NUMBER and len(known.units) > 1 and not unit:
        accepted = " | ".join(u.name for u in known.units)
        return PreviewCell(column, key, None, text, Message("mapping.unit", {
            "column": column, "channel": key, "accepted": accepted}))  # fmt: skip
    try:
        reading = read_cell(known, text, unit, mapping.decimal or ("," if "," in text else "."), mapping.time)
    except RecordError as error:
        return PreviewCell(column, key, None, text, error.message)
    return PreviewCell(column, key, reading, text, reading.doubts[0] if reading.doubts else None)
