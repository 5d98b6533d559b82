"""Intake of any table by a mapping: streamed, whole or not at all, every bad cell reported by line and column."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

from core.record.channels import CHANNELS
from core.record.instant import Instant
from core.record.message import Message, RecordError, Value, refuse
from storage.draft_batch import SourceFacts
from storage.intake.findings import Findings, Intake, UnreadableFileError, unreadable
from storage.intake.held_settings import SettingChanges
from storage.intake.judged import judged_intake
from storage.intake.mapping import Mapping, open_questions
from storage.intake.named_episodes import NamedEpisodes
from storage.intake.sample_spool import SampleSpool
from storage.intake.table import Table, open_table
from storage.intake.table_dialect import column_names
from storage.intake.table_rows import Answers, TableRows
from storage.intake.table_text import RowBlock
from storage.intake.table_times import all_have_offsets
from storage.store import Store

Progress = Callable[[int, int], None]


def read_table(
    table: Table | Path, mapping: Mapping, *, now: Instant, answers: Answers | None = None,
    existing: Store | None = None, progress: Progress | None = None, cancelled: Callable[[], bool] | None = None,
) -> Intake:  # fmt: skip
    """Read a table by a mapping against the clock and what the store already has. Nothing is written.

    Raises:
        RecordError: `mapping.*` where the mapping does not fit or leaves a question open; `intake.cancelled`.
        OSError: the file cannot be read.
    """
    answers = answers or Answers()
    findings, spool, changes = Findings(), SampleSpool(), SettingChanges(existing)
    named = NamedEpisodes(existing, answers.named)
    path = table if isinstance(table, Path) else table.path
    try:
        opened = open_table(table) if isinstance(table, Path) else table
        check_complete(opened, mapping, answers)
        rows = TableRows(opened.header, mapping, answers, now, findings, spool, changes, named)
        blocks = opened.blocks(progress, cancelled)
        for number, block in enumerate(blocks):
            rows.take(_behind_header(block, opened) if number == 0 else block)
    except UnreadableFileError as error:
        return unreadable_table(path, error)
    if not opened.dialect.encoding_is_sure:
        values = {"encoding": opened.dialect.encoding}
        findings.doubt(1, "", opened.dialect.encoding, Message("table.encoding_assumed", values))
    _doubt_precision(opened, mapping, findings)
    source = SourceFacts("table", path.name, blocks.sha, blocks.size, _facts(opened, mapping, answers, spool))
    made = sorted([*rows.entries, *changes.rows()], key=lambda row: row.line)
    intake = judged_intake(source, made, spool, findings, existing, progress=progress)
    return replace(intake, unknown_patients=tuple(named.unknown))


def _doubt_precision(table: Table, mapping: Mapping, findings: Findings) -> None:
    """Say of which columns of a spreadsheet the decimals are not known: without a format 7.40 is kept as 7.4."""
    if table.book is None:
        return
    uses = [(c.column, c.channel, c.unit) for c in mapping.used]
    if mapping.long is not None:
        long = mapping.long
        uses = [(long.value, key, long.units.get(word, "")) for word, key in long.names.items() if key]
    told: set[str] = set()
    for column, key, unit in uses:
        least = table.book.without_format.get(table.header.index(column))
        usual = 1 if unit == "kPa" else CHANNELS[key].decimals
        if least is not None and least < usual and column not in told:
            told.add(column)
            values: dict[str, Value] = {"column": column, "channel": key}
            message = Message("sheet.precision_unknown", values)
            findings.doubt(table.dialect.header_line, column, "", message)


def unreadable_table(path: Path, error: UnreadableFileError) -> Intake:
    """The intake of a table that could not be read: nothing but the reason."""
    findings = Findings()
    findings.refuse(error.line, "", error.value, error.message)
    return judged_intake(SourceFacts("table", path.name), [], SampleSpool(), findings, None, whole=False)


def check_complete(table: Table, mapping: Mapping, answers: Answers) -> None:
    """Refuse a mapping that does not fit the table or leaves a question open.

    Raises:
        RecordError: `mapping.column_gone`, `mapping.incomplete`.
    """
    named = [mapping.time.date, mapping.time.clock, mapping.episode_column, mapping.by_column]
    named += [c.column for c in mapping.used]
    if mapping.long is not None:
        named += [mapping.long.channel, mapping.long.value, mapping.long.unit]
    for column in named:
        if column and column not in table.header:
            raise refuse("mapping.column_gone", column=column, accepted=" | ".join(table.header)[:400])
    offsets = all_have_offsets(table.column(mapping.time.date), mapping.time.order)
    asked = open_questions(mapping, episode_given=bool(answers.episode), has_offsets=offsets)
    if asked:
        raise RecordError(asked[0])


def _behind_header(block: RowBlock, table: Table) -> RowBlock:
    """The first block without the header; it must still be the header that was looked at."""
    header = column_names(block.rows[0][: len(table.header)]) if block.rows else ()
    if header != table.header:
        raise unreadable(table.dialect.header_line, table.path.name, "file.changed",
                         accepted="a file that nothing writes to")  # fmt: skip
    return RowBlock(block.rows[1:], block.lines[1:])


def _facts(
    table: Table, mapping: Mapping, answers: Answers, spool: SampleSpool
) -> dict[str, str | int | float | bool | None]:
    facts: dict[str, str | int | float | bool | None] = {
        "mapping": mapping.name, "zone": mapping.time.zone, "time_order": mapping.time.order,
        "decimal": mapping.decimal, "written_by": mapping.written_by, "header_line": table.dialect.header_line,
    }  # fmt: skip
    if table.book is None:
        facts |= {"encoding": table.dialect.encoding, "delimiter": table.dialect.delimiter}
    else:
        facts["sheet"] = table.dialect.sheet
    if answers.clock_shift_s:
        facts["clock_shift_s"] = answers.clock_shift_s
    facts |= {f"named.{name}": key for name, key in answers.named.items()}
    if mapping.leak_definition:
        facts["leak_definition"] = mapping.leak_definition
    facts |= {f"column.{c.column}": f"{c.channel} {c.unit}".strip() for c in mapping.used}
    facts |= {f"unit.{k}": ", ".join(sorted(u for u in v if u)) for k, v in spool.units.items() if any(v)}
    return facts
