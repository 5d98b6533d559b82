"""Taking in a file: what it holds is shown before anything is recorded. Refused rows may be left out."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

from PySide6.QtWidgets import (
    QAbstractItemView,
    QCheckBox,
    QHeaderView,
    QLabel,
    QProgressBar,
    QTableWidget,
    QTableWidgetItem,
    QWidget,
)

from app.dialogs.asking import AskingDialog
from app.failure import Failure
from app.operations import intake as intake_operations
from app.operations.intake import TakeRequest
from app.operations.outcome import Outcome
from app.runner import Progress
from app.session import SessionModel
from app.theme import Theme
from app.words import Reader, sentence

if TYPE_CHECKING:
    from storage.intake.findings import Intake

MOST_ROWS = 500
"""Rows of the table; a file with more faults is not repaired by reading on."""


class IntakeDialog(AskingDialog):
    """Reads, shows, and takes in when told to. Leaving stops a reading that still runs."""

    def __init__(
        self, model: SessionModel, path: Path, reader: Reader, theme: Theme, parent: QWidget | None = None
    ) -> None:
        super().__init__("", "", theme, parent)
        self.setWindowTitle(self.tr("Take in {name}").format(name=path.name))
        self.go.setText(self.tr("Take it in"))
        self._model, self._path, self._reader = model, path, reader
        self.intake: Intake | None = None
        self.summary = QLabel()
        self.summary.setWordWrap(True)
        self.bar = QProgressBar()
        self.bar.setTextVisible(False)
        self.bar.setAccessibleName(self.tr("Progress"))
        self.table = QTableWidget(0, 4)
        self.table.setAccessibleName(self.tr("Rows refused and rows in doubt"))
        self.table.setHorizontalHeaderLabels(
            [self.tr("Line"), self.tr("What"), self.tr("Value"), self.tr("Why, and what is accepted")]
        )
        self.table.setEditTriggers(QAbstractItemView.EditTrigger.NoEditTriggers)
        self.table.setWordWrap(True)
        self.table.verticalHeader().hide()
        self.table.horizontalHeader().setSectionResizeMode(3, QHeaderView.ResizeMode.Stretch)
        self.leave_out = QCheckBox(self.tr("Leave the refused rows out; this is recorded"))
        self.leave_out.hide()
        self.leave_out.toggled.connect(self._allow)
        self.body.addWidget(self.summary)
        self.body.addWidget(self.bar)
        self.add_body(self.table)
        self.body.addWidget(self.leave_out)
        self.table.hide()
        self.resize(theme.px(820), theme.px(520))
        self.go.setEnabled(False)
        self.summary.setText(self.tr("Reading {name}. Nothing is recorded yet.").format(name=path.name))
        self.bar.setRange(0, 0)
        model.runner.progressed.connect(self._progressed)
        self._number = model.ask(intake_operations.read, path, done=self._read, failed=self._failed)

    def reject(self) -> None:
        """Leave; what still runs is stopped and rolled back."""
        self._model.runner.cancel(self._number)
        super().reject()

    def submit(self) -> None:
        if self.intake is None:
            return
        self.go.setEnabled(False)
        self.bar.show()
        self.bar.setRange(0, 0)
        request = TakeRequest(self.intake, self.leave_out.isChecked())
        self._number = self._model.ask(intake_operations.take, request, done=self._taken, failed=self._failed)

    def _progressed(self, progress: Progress) -> None:
        if progress.number == self._number:
            self.bar.setRange(0, progress.total)
            self.bar.setValue(progress.done)

    def _read(self, outcome: Outcome[Intake]) -> None:
        self.intake = outcome.value
        self.bar.hide()
        self.summary.setText(self.words(outcome.value))
        self._fill(outcome.value)
        self.leave_out.setVisible(bool(outcome.value.refusals) and outcome.value.whole)
        self._allow()
        self.go.setFocus()

    def words(self, intake: Intake) -> str:
        """The file in a few sentences."""
        parts = [
            self.tr("{name}: {entries} entries and {samples} device samples for {episodes} episodes.").format(
                name=self._path.name,
                entries=len(intake.entries),
                samples=intake.sample_count,
                episodes=len(intake.episodes),
            )
        ]
        if intake.repeated_in_store:
            parts.append(
                self.tr("{count} rows are in the store already and are skipped.").format(
                    count=intake.repeated_in_store
                )
            )
        if intake.doubts:
            parts.append(
                self.tr("{count} rows are in doubt: they are taken and marked.").format(
                    count=len(intake.doubts)
                )
            )
        if intake.refusals:
            parts.append(
                self.tr("{count} rows are refused: the file is taken whole or not at all.").format(
                    count=intake.refused_rows
                )
            )
        if not intake.whole:
            parts.append(self.tr("It could not be read to its end, so nothing of it can be taken."))
        if not intake.refusals and intake.whole and not intake.entries and not intake.sample_count:
            parts.append(self.tr("There is nothing new in it."))
        return " ".join(parts)

    def _fill(self, intake: Intake) -> None:
        found = [(r, self.tr("refused")) for r in intake.refusals] + [
            (d, self.tr("in doubt")) for d in intake.doubts
        ]
        self.table.setVisible(bool(found))
        self.table.setRowCount(min(len(found), MOST_ROWS))
        for n, (row, word) in enumerate(found[:MOST_ROWS]):
            what = f"{word}, {row.column}" if row.column else word
            for column, text in enumerate(
                (str(row.line or ""), what, row.value, sentence(row.message, self._reader))
            ):
                self.table.setItem(n, column, QTableWidgetItem(text))
        self.table.resizeColumnsToContents()
        self.table.resizeRowsToContents()

    def _allow(self) -> None:
        intake = self.intake
        new = intake is not None and (bool(intake.entries) or bool(intake.sample_count))
        clean = intake is not None and (not intake.refusals or self.leave_out.isChecked())
        self.go.setEnabled(bool(new and clean and intake is not None and intake.whole))

    def _taken(self, outcome: Outcome[intake_operations.Taken]) -> None:  # noqa: ARG002
        self.accept()

    def _failed(self, failure: Failure) -> None:
        self.bar.hide()
        self.refuse(sentence(failure.message, self._reader))
        self.go.setEnabled(False)
