"""Intake of the log file (CSV): streamed in bounded memory, whole or not at all, every bad row reported."""

from __future__ import annotations

import csv
from collections.abc import Callable, Iterable, Iterator
from pathlib import Path

import numpy as np

from core.record.instant import Instant
from core.record.message import Message
from storage.draft_batch import SourceFacts
from storage.intake.columns import ACCEPTED, Columns, read_header
from storage.intake.device_rows import DeviceRows
from storage.intake.findings import (
    CLOCK_LEAD,
    Findings,
    Intake,
    UnreadableFileError,
    check_entry_count,
    unreadable,
)
from storage.intake.judged import judged_intake
from storage.intake.row_reading import EntryRow, RowReader
from storage.intake.sample_spool import SampleSpool
from storage.intake.text_blocks import BlockReader, TextBlock
from storage.store import Store

Progress = Callable[[int, int], None]


def read_log_csv(
    path: Path | str, *, now: Instant, existing: Store | None = None, progress: Progress | None = None,
    cancelled: Callable[[], bool] | None = None,
) -> Intake:  # fmt: skip
    """Read a log file against the clock and what the store already has. Nothing is written.

    `progress(done, total)` is told bytes; reading stops when `cancelled()` is true.

    Raises:
        RecordError: `intake.cancelled`.
        OSError: the file cannot be read.
    """
    reading = _Reading(Path(path), now, progress, cancelled)
    whole = reading.run()
    return reading.result(existing, whole)


class _Reading:
    """One file while it is read."""

    def __init__(
        self, path: Path, now: Instant, progress: Progress | None, cancelled: Callable[[], bool] | None
    ) -> None:
        self._path, self._now, self._progress = path, now, progress
        self._reader = BlockReader(path, progress, cancelled)
        self._findings, self._spool = Findings(), SampleSpool()
        self._rows = RowReader(now, self._findings)
        self._entries: list[EntryRow] = []

    def run(self) -> bool:
        """Read to the end; False where reading had to stop, with the reason among the refusals."""
        try:
            blocks = iter(self._reader)
            columns, rest = _after_header(next(blocks, None))
            fast = DeviceRows(columns, self._spool, self._now + CLOCK_LEAD)
            for block in _chained(rest, blocks):
                self._take(block, columns, fast)
        except UnreadableFileError as error:
            self._findings.refuse(error.line, "", error.value, error.message)
            return False
        return True

    def _take(self, block: TextBlock, columns: Columns, fast: DeviceRows) -> None:
        left = fast.take(block)
        if left is None:
            self._take_slowly(block, columns)
        elif left:
            lines = block.data.split(b"\n")
            for i in left:
                cells = lines[i].decode().split(",")  # a plain block has no quotes
                self._take_row(columns.row(cells), block.first_line + i)

    def _take_slowly(self, block: TextBlock, columns: Columns) -> None:
        texts = [line + "\n" for line in block.data.decode().split("\n")[:-1]]
        reader = csv.reader(texts, strict=True)
        before = 0
        try:
            for cells in reader:
                line, before = block.first_line + before, reader.line_num
                if not cells or cells == [""]:
                    continue
                if len(cells) != len(columns.names):
                    message = Message("row.columns", {"found": len(cells), "accepted": len(columns.names)})
                    self._findings.refuse(line, "", ",".join(cells), message)
                    continue
                self._take_row(columns.row(cells), line)
        except csv.Error as error:
            line = block.first_line + before
            raise unreadable(line, texts[before][:80].strip(), "row.quotes", detail=str(error)) from None

    def _take_row(self, row: dict[str, str], line: int) -> None:
        made = self._rows.read(row, line)
        if made is None:
            return
        if isinstance(made, EntryRow):
            self._entries.append(made)
            check_entry_count(self._entries, line)
            if made.definition:
                at = made.draft.entry.at
                self._spool.note_leak(made.draft.entry.episode, made.definition, at, at, line)
            return
        t, v = np.array([made.at], np.int64), np.array([made.value])
        lines = np.array([line], np.int32)
        self._spool.add(made.episode, made.channel, made.unit, made.definition, t, v, lines, made.decimals)
        if made.remark is not None:
            self._entries.append(EntryRow(line, made.remark))

    def result(self, existing: Store | None, whole: bool) -> Intake:
        """What the file would add, judged against the store."""
        units = {f"unit.{k}": ", ".join(sorted(u for u in v if u)) for k, v in self._spool.units.items()}
        source = SourceFacts(
            "log_csv",
            self._path.name,
            self._reader.sha,
            self._reader.size,
            {k: v for k, v in units.items() if v},
        )
        return judged_intake(source, self._entries, self._spool, self._findings, existing, whole=whole,
                             progress=self._progress)  # fmt: skip


def _after_header(block: TextBlock | None) -> tuple[Columns, TextBlock | None]:
    if block is None or not block.data.strip():
        raise unreadable(1, "", "file.empty", accepted=ACCEPTED)
    end = block.data.index(b"\n") + 1
    columns = read_header(block.data[: end - 1].decode().rstrip("\r"))
    rest = TextBlock(block.data[end:], block.first_line + 1, block.lines - 1)
    return columns, rest if rest.lines else None


def _chained(first: TextBlock | None, others: Iterator[TextBlock]) -> Iterable[TextBlock]:
    if first is not None:
        yield first
    yield from others
