"""What was found in a file, row by row: refused rows with a tick to leave them out, doubts, what is left aside, what
will be recorded."""

from __future__ import annotations

from itertools import islice
from typing import TYPE_CHECKING

from PySide6.QtCore import Qt, Signal
from PySide6.QtGui import QResizeEvent
from PySide6.QtWidgets import QAbstractItemView, QHeaderView, QTableWidget, QTableWidgetItem, QWidget

from app.intake_window.new_rows import new_rows
from app.look.copying import can_be_copied
from app.look.formats import inert
from app.look.wrapped_rows import fit_rows
from app.words import Reader, sentence

if TYPE_CHECKING:
    from storage.intake.findings import Doubt, Intake, Refusal

MOST_ROWS = 500
"""Rows of the table; a file with more faults is not repaired by reading on."""
_MOST_SHARE = 27
"""Per cent of the width for what a row is, and for its value."""
MOST_LETTERS = 40
"""Letters of a value: the sentence beside it needs the room."""


class FoundTable(QTableWidget):
    """`ticked()` when a person ticks a refused row, or takes the tick away."""

    ticked = Signal()

    def __init__(self, reader: Reader, parent: QWidget | None = None) -> None:
        super().__init__(0, 4, parent)
        can_be_copied(self)
        self._reader = reader
        self._refused = 0
        self._filling = False
        self.setAccessibleName(self.tr("Rows refused, in doubt, left aside, and what will be recorded"))
        why = self.tr("Why and what is accepted; whose and when")
        self.setHorizontalHeaderLabels([self.tr("Line"), self.tr("What"), self.tr("Value"), why])
        self.setEditTriggers(QAbstractItemView.EditTrigger.NoEditTriggers)
        self.setWordWrap(True)
        self.verticalHeader().hide()
        self.horizontalHeader().setSectionResizeMode(3, QHeaderView.ResizeMode.Stretch)
        self.horizontalHeader().setDefaultAlignment(Qt.AlignmentFlag.AlignLeft | Qt.AlignmentFlag.AlignVCenter)
        self.horizontalHeader().sectionResized.connect(self._fit_rows)
        self.itemChanged.connect(self._changed)

    def show_found(self, intake: Intake) -> None:
        """Show what a file holds: what is wrong first."""
        refused = [(r, self.tr("refused")) for r in intake.refusals[:MOST_ROWS]]
        found: list[tuple[Refusal | Doubt, str]] = [*refused]
        found += [(d, self.tr("in doubt")) for d in intake.doubts]
        found += [(r, self.tr("left aside")) for r in intake.aside]
        rows = [self._found_row(row, word) for row, word in found[:MOST_ROWS]]
        words = {"new": self.tr("new"), "corrects": self.tr("corrects"), "withdraws": self.tr("withdraws"),
                 "samples": self.tr("samples"), "empty": self.tr("empty"),
                 "over": self.tr("over {count} that were taken in before")}  # fmt: skip
        rows += islice(new_rows(intake, self._reader, words), MOST_ROWS - len(rows))
        wrong = (
            max(intake.refused_rows, len(refused)) + len(intake.doubts) + max(intake.aside_count, len(intake.aside))
        )
        left = wrong + len(intake.entries) + len(intake.spans) - len(rows)
        if left > 0:
            told = self.tr("rows that are not listed here; they are counted above")
            rows.append(("", self.tr("more"), f"{left:,}", told))
        self._filling = True
        self._refused = len(refused) if intake.whole else 0
        self.setVisible(bool(rows))
        self.setRowCount(len(rows))
        for n, texts in enumerate(rows):
            for column, text in enumerate(texts):
                item = QTableWidgetItem(text[:MOST_LETTERS] if column == 2 else text)
                item.setToolTip(inert(text))
                self.setItem(n, column, item)
            if n < self._refused:
                self._add_tick(n)
        self._fit_columns()
        fit_rows(self, 3)
        self._filling = False

    def resizeEvent(self, event: QResizeEvent) -> None:
        super().resizeEvent(event)
        self._fit_columns()

    def _fit_columns(self) -> None:
        """Columns as wide as they need, the reasons the most of it: what and value wrap where text is large.

        Beside a tick the line's number needs room that the style does not ask for.
        """
        for column in (1, 2):
            wanted = max(self.sizeHintForColumn(column), self.horizontalHeader().sectionSizeHint(column))
            self.setColumnWidth(column, min(wanted, self.viewport().width() * _MOST_SHARE // 100))
        texts = [item.text() for row in range(self.rowCount()) if (item := self.item(row, 0)) is not None]
        metrics = self.fontMetrics()
        widest = max((metrics.horizontalAdvance(text) for text in texts), default=0)
        tick = metrics.height() * 2 if self._refused else 0
        self.setColumnWidth(0, max(self.horizontalHeader().sectionSizeHint(0), widest + tick + metrics.height() * 2))

    def _add_tick(self, row: int) -> None:
        item = self.item(row, 0)
        if item is not None:
            item.setFlags(item.flags() | Qt.ItemFlag.ItemIsUserCheckable)
            item.setCheckState(Qt.CheckState.Unchecked)
            item.setToolTip(self.tr("Tick to leave this row out; that it was left out is recorded"))

    def _found_row(self, row: Refusal | Doubt, word: str) -> tuple[str, str, str, str]:
        what = f"{word}, {row.column}" if row.column else word
        return str(row.line or ""), what, row.value, sentence(row.message, self._reader)

    def tick_all(self, on: bool) -> None:
        """Tick every refused row, or none."""
        self._filling = True
        for row in range(self._refused):
            item = self.item(row, 0)
            if item is not None:
                item.setCheckState(Qt.CheckState.Checked if on else Qt.CheckState.Unchecked)
        self._filling = False

    @property
    def open_rows(self) -> int:
        """How many refused rows that are shown have no tick."""
        items = [self.item(row, 0) for row in range(self._refused)]
        return sum(item is not None and item.checkState() != Qt.CheckState.Checked for item in items)

    def _changed(self, _item: QTableWidgetItem) -> None:
        if not self._filling:
            self.ticked.emit()

    def _fit_rows(self, column: int, *_: int) -> None:
        """Sentences wrap: rows follow the width that the last column gets."""
        if column == self.columnCount() - 1:
            fit_rows(self, column)
