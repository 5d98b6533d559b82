"""Taking in a file: what it holds is shown before anything is recorded. Refused rows may be left out."""

from __future__ import annotations

from dataclasses import replace
from itertools import islice
from pathlib import Path
from typing import TYPE_CHECKING

from PySide6.QtCore import QElapsedTimer
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

from app.copying import can_be_copied
from app.dialogs.asking import AskingDialog
from app.failure import Failure
from app.formats import inert
from app.intake_window.new_rows import new_rows
from app.intake_window.patient_rows import PatientRows
from app.operations import intake as intake_operations
from app.operations.intake import ReadRequest, TakeRequest
from app.operations.outcome import Outcome
from app.runner import Progress
from app.session import SessionModel
from app.theme import Theme
from app.words import Reader, sentence

if TYPE_CHECKING:
    from storage.intake.findings import Doubt, Intake, Refusal

MOST_ROWS = 500
"""Rows of the table; a file with more faults is not repaired by reading on."""
MOST_LETTERS = 40
"""Letters of a value: the sentence beside it needs the room."""


class IntakeDialog(AskingDialog):
    """Reads, shows, and takes in when told to. Leaving stops a reading that still runs."""

    def __init__(
        self, model: SessionModel, file: Path | ReadRequest, reader: Reader, theme: Theme,
        parent: QWidget | None = None,
    ) -> None:  # fmt: skip
        super().__init__("", "", theme, parent)
        self._request = ReadRequest(file) if isinstance(file, Path) else file
        path = self._request.path
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
        can_be_copied(self.table)
        self.table.setAccessibleName(self.tr("Rows refused, in doubt, left aside, and what will be recorded"))
        self.table.setHorizontalHeaderLabels(
            [
                self.tr("Line"),
                self.tr("What"),
                self.tr("Value"),
                self.tr("Why and what is accepted; whose and when"),
            ]
        )
        self.table.setEditTriggers(QAbstractItemView.EditTrigger.NoEditTriggers)
        self.table.setWordWrap(True)
        self.table.verticalHeader().hide()
        for column in range(3):
            self.table.horizontalHeader().setSectionResizeMode(column, QHeaderView.ResizeMode.ResizeToContents)
        self.table.horizontalHeader().setSectionResizeMode(3, QHeaderView.ResizeMode.Stretch)
        self.table.horizontalHeader().sectionResized.connect(self._fit_rows)
        self.leave_out = QCheckBox(self.tr("Leave the refused rows out; this is recorded"))
        self.leave_out.hide()
        self.leave_out.toggled.connect(self._allow)
        self.body.addWidget(self.summary)
        self.body.addWidget(self.bar)
        self.add_body(self.table)
        self.patients = PatientRows(theme)
        self.patients.said.connect(self._patient_said)
        self.left = QLabel()
        self.left.setProperty("role", "quiet")
        self._clock = QElapsedTimer()
        self.body.addWidget(self.left)
        self.body.addWidget(self.patients)
        self.body.addWidget(self.leave_out)
        self.table.hide()
        self.resize(theme.px(900), theme.px(560))
        self.go.setEnabled(False)
        self.summary.setText(self.tr("Reading {name}. Nothing is recorded yet.").format(name=path.name))
        self.bar.setRange(0, 0)
        model.runner.progressed.connect(self._progressed)
        self._number = 0
        self._ask()

    def _ask(self) -> None:
        """Read the file with all that was said of it."""
        self.bar.show()
        self.bar.setRange(0, 0)
        self.left.clear()
        self._clock.start()
        self._number = self._model.ask(intake_operations.read, self._request, done=self._read, failed=self._failed)

    def _patient_said(self, identifier: str, episode: str) -> None:
        """A person says whose an identifier is: the file is read again with it."""
        self.go.setEnabled(False)
        self._request = replace(self._request, patients={**self._request.patients, identifier: episode})
        self._ask()

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
            self.left.setText(self._time_left(progress))

    def _time_left(self, progress: Progress) -> str:
        """How long it will still take, once that can be told."""
        spent = self._clock.elapsed() / 1000
        if spent < 1 or not 0 < progress.done < progress.total:
            return ""
        seconds = spent * (progress.total - progress.done) / progress.done
        return self.tr("about {seconds} s left").format(seconds=max(1, round(seconds)))

    def _read(self, outcome: Outcome[Intake]) -> None:
        self.intake = outcome.value
        self.bar.hide()
        self.left.clear()
        self.summary.setText(self.words(outcome.value))
        self.patients.show_unknown(outcome.value.unknown_patients, self._request.episodes)
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
                self.tr("{count} rows are in doubt: they are taken and marked.").format(count=len(intake.doubts))
            )
        if intake.aside_count:
            text = self.tr("{count} values are of no channel here or have no value: they are left aside.")
            parts.append(text.format(count=intake.aside_count))
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
        found: list[tuple[Refusal | Doubt, str]] = [(r, self.tr("refused")) for r in intake.refusals]
        found += [(d, self.tr("in doubt")) for d in intake.doubts]
        found += [(r, self.tr("left aside")) for r in intake.aside]
        rows = [self._found_row(row, word) for row, word in found[:MOST_ROWS]]
        new = {
            "new": self.tr("new"),
            "corrects": self.tr("corrects"),
            "withdraws": self.tr("withdraws"),
            "samples": self.tr("samples"),
        }
        rows += islice(new_rows(intake, self._reader, new), MOST_ROWS - len(rows))
        self.table.setVisible(bool(rows))
        self.table.setRowCount(len(rows))
        for n, texts in enumerate(rows):
            for column, text in enumerate(texts):
                item = QTableWidgetItem(text[:MOST_LETTERS] if column == 2 else text)
                item.setToolTip(inert(text))
                self.table.setItem(n, column, item)
        self.table.resizeRowsToContents()

    def _fit_rows(self, column: int, *_: int) -> None:
        """Sentences wrap: rows follow the width that the last column gets."""
        if column == self.table.columnCount() - 1:
            self.table.resizeRowsToContents()

    def _found_row(self, row: Refusal | Doubt, word: str) -> tuple[str, str, str, str]:
        what = f"{word}, {row.column}" if row.column else word
        return str(row.line or ""), what, row.value, sentence(row.message, self._reader)

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
