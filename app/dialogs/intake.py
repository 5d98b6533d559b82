"""Taking in a file: what it holds is shown before anything is recorded. Refused rows may be left out."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from pathlib import Path
from typing import TYPE_CHECKING

from PySide6.QtCore import QElapsedTimer, QTimer, Signal
from PySide6.QtWidgets import QCheckBox, QProgressBar, QWidget

from app.dialogs.asking import AskingDialog
from app.intake_window.code_rows import CodeRows
from app.intake_window.found_table import MOST_ROWS, FoundTable
from app.intake_window.patient_rows import PatientRows
from app.look.formats import some_of
from app.look.plain_label import plain_label
from app.look.theme import Theme
from app.operations import intake as intake_operations
from app.operations import mapping as mapping_operations
from app.operations.intake import ReadRequest, TakeRequest
from app.operations.outcome import Outcome
from app.session.failure import Failure
from app.session.model import SessionModel
from app.session.runner import Progress
from app.words import Reader, sentence

if TYPE_CHECKING:
    from storage.intake.findings import Intake
    from storage.reading_sources import TakenSource


class IntakeDialog(AskingDialog):
    """Reads, shows, and takes in when told to; `taken()` when it is in. Leaving stops a reading that still runs."""

    taken = Signal(str, object)
    """What was taken in, in a sentence, and of which episodes."""

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
        self._taking = False
        self.summary = plain_label()
        self.summary.setWordWrap(True)
        self.bar = QProgressBar()
        self.bar.setTextVisible(False)
        self.bar.setAccessibleName(self.tr("Progress"))
        self.table = FoundTable(reader)
        self.table.ticked.connect(self._ticked)
        self.leave_out = QCheckBox()
        self.leave_out.hide()
        self.leave_out.toggled.connect(self._leave_all)
        self.patients = PatientRows(theme)
        self.patients.said.connect(self._patient_said)
        self.patients.nothing_said.connect(self._patient_not_said)
        self.codes = CodeRows(theme)
        self.codes.said.connect(self._codes_said)
        self.left = plain_label()
        self.left.setProperty("role", "quiet")
        self._clock = QElapsedTimer()
        self._lay_out()
        self.resize(theme.px(900), theme.px(560))
        self.go.setEnabled(False)
        self.summary.setText(self.tr("Reading {name}. Nothing is recorded yet.").format(name=path.name))
        self.bar.setRange(0, 0)
        model.runner.progressed.connect(self._progressed)
        self._number = 0
        self._ask()

    def _lay_out(self) -> None:
        self.body.addWidget(self.summary)
        self.body.addWidget(self.bar)
        self.add_body(self.table)
        for part in (self.left, self.patients, self.codes, self.leave_out):
            self.body.addWidget(part)
        self.body.setStretchFactor(self.table, 100)
        self.body.addStretch(1)  # while there is no table, the bar stays under its words
        self.table.hide()

    def _ask(self) -> None:
        """Read the file with all that was said of it."""
        self.bar.show()
        self.bar.setRange(0, 0)
        self._tell_left("")
        self._clock.start()
        self._number = self._model.ask(intake_operations.read, self._request, done=self._read, failed=self._failed)

    @property
    def request(self) -> ReadRequest:
        """The file with all that was said of it."""
        return self._request

    def _patient_said(self, identifier: str, episode: str) -> None:
        """A person says whose an identifier is: the file is read again with it."""
        self.go.setEnabled(False)
        self._request = replace(self._request, patients={**self._request.patients, identifier: episode})
        self._ask()

    def _patient_not_said(self) -> None:
        self.refuse(self.tr("Choose the episode first, or type its key."))

    def _codes_said(self, answers: dict[str, str]) -> None:
        """A person says what codes are: that is kept, and the file is read again with it."""
        self.go.setEnabled(False)
        self.codes.setEnabled(False)
        self._model.ask(mapping_operations.keep_codes, answers, failed=self._failed)
        self._ask()

    def reject(self) -> None:
        """Leave; what still runs is stopped and rolled back. Whether it was in time is looked up, not assumed."""
        self._model.runner.cancel(self._number)
        if not self._taking:
            super().reject()
            return
        self.summary.setText(self.tr("Stopping."))
        self._model.ask(intake_operations.taken, None, done=self._stopped, failed=self._failed)

    def _stopped(self, outcome: Outcome[tuple[TakenSource, ...]]) -> None:
        self._taking = False
        if self.intake is None or self.intake.source.id not in {s.id for s in outcome.value}:
            super().reject()
            return
        self.bar.hide()
        self._tell_left("")
        self.summary.setText(self.words(self.intake))
        self.refuse(
            self.tr("It was taken in before it could be stopped. File, Files taken in... withdraws it whole.")
        )
        self.go.setEnabled(False)

    def submit(self) -> None:
        if self.intake is None:
            return
        self.go.setEnabled(False)
        self.bar.show()
        self.bar.setRange(0, 0)
        self._clock.start()
        request = TakeRequest(self.intake, self.leave_out.isChecked())
        self._taking = True
        self._number = self._model.ask(intake_operations.take, request, done=self._taken, failed=self._not_taken)

    def _progressed(self, progress: Progress) -> None:
        if progress.number == self._number:
            self.bar.setRange(0, progress.total)
            self.bar.setValue(progress.done)
            self._tell_left(self._time_left(progress))

    def _tell_left(self, text: str) -> None:
        self.left.setText(text)
        self.left.setVisible(bool(text))

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
        self._tell_left("")
        self.summary.setText(self.words(outcome.value))
        unknown, of_table = outcome.value.unknown_patients, outcome.value.source.kind == "table"
        self.patients.show_unknown(unknown, self._request.episodes, of_table=of_table)
        self.codes.setEnabled(True)
        self.codes.show_unknown(outcome.value.unknown_codes)
        self.table.show_found(outcome.value)
        count = outcome.value.refused_rows
        self.leave_out.setText(
            self.tr("Leave the refused row out; this is recorded") if count == 1
            else self.tr("Leave all {count} refused rows out; this is recorded").format(count=count)
        )  # fmt: skip
        self.leave_out.setChecked(False)
        self.leave_out.setVisible(bool(outcome.value.refusals) and outcome.value.whole)
        self._allow()
        self.go.setFocus()
        QTimer.singleShot(0, self, self.grow)  # once what was just shown has its height

    def words(self, intake: Intake) -> str:
        """The file in a few sentences."""
        told, brought = self.tr("{name}: {brought} for {episodes}."), (len(intake.entries), intake.sample_count)
        parts = [
            told.format(name=self._path.name, brought=self._brought(*brought), episodes=self._of(intake.episodes))
        ]
        if intake.new_episodes:
            one, many = self.tr("A new episode begins: {keys}."), self.tr("{count} new episodes begin: {keys}.")
            count = len(intake.new_episodes)
            begins = one if count == 1 else many
            parts.append(begins.format(count=f"{count:,}", keys=some_of(intake.new_episodes)))
        counts = (
            (intake.empty_count, self.tr("1 device sample is empty: a gap."),
             self.tr("{count} device samples are empty: gaps.")),
            (intake.repeated_in_store, self.tr("1 row is in the store already and is skipped."),
             self.tr("{count} rows are in the store already and are skipped.")),
            (intake.overlaid, self.tr("1 device sample that was taken in before lies under it and no longer counts."),
             self.tr("{count} device samples that were taken in before lie under it and no longer count.")),
            (len(intake.doubts), self.tr("1 row is in doubt: it is taken and marked."),
             self.tr("{count} rows are in doubt: they are taken and marked.")),
            (intake.aside_count, self.tr("1 value is of no channel here or has no value: it is left aside."),
             self.tr("{count} values are of no channel here or have no value: they are left aside.")),
            (intake.refused_rows, self.tr("1 row is refused: the file is taken whole or not at all."),
             self.tr("{count} rows are refused: the file is taken whole or not at all.")),
        )  # fmt: skip
        parts += [_counted(count, one, many) for count, one, many in counts if count]
        if not intake.whole:
            parts.append(self.tr("It could not be read to its end, so nothing of it can be taken."))
        if not intake.refusals and intake.whole and not intake.entries and not intake.sample_count:
            parts.append(self.tr("There is nothing new in it."))
        return " ".join(parts)

    def _brought(self, entries: int, samples: int) -> str:
        """How many values, in words."""
        brought = []
        if entries or not samples:
            brought.append(_counted(entries, self.tr("1 entry"), self.tr("{count} entries")))
        if samples:
            brought.append(_counted(samples, self.tr("1 device sample"), self.tr("{count} device samples")))
        return self.tr(" and ").join(brought)

    def _of(self, episodes: Sequence[str]) -> str:
        return _counted(len(episodes), self.tr("1 episode"), self.tr("{count} episodes"))

    def _leave_all(self, on: bool) -> None:
        """All refused rows at once, those among them that the table does not show."""
        self.table.tick_all(on)
        self._allow()

    def _ticked(self) -> None:
        """Rows were ticked one by one: when all are, that says as much as all at once."""
        intake = self.intake
        listed = intake is not None and intake.refused_rows <= MOST_ROWS
        self.leave_out.blockSignals(True)
        self.leave_out.setChecked(listed and self.table.open_rows == 0)
        self.leave_out.blockSignals(False)
        self._allow()

    def _allow(self) -> None:
        intake = self.intake
        new = intake is not None and (bool(intake.entries) or bool(intake.sample_count))
        clean = intake is not None and (not intake.refusals or self.leave_out.isChecked())
        self.go.setEnabled(bool(new and clean and intake is not None and intake.whole))

    def _taken(self, outcome: Outcome[intake_operations.Taken]) -> None:
        made = outcome.value
        told = self.tr(
            "{name} is taken in: {brought} for {episodes}. File, Files taken in... withdraws it whole."
        ).format(
            name=self._path.name, brought=self._brought(made.entries, made.samples), episodes=self._of(made.episodes)
        )
        self.accept()
        self.taken.emit(told, made.episodes)

    def _not_taken(self, failure: Failure) -> None:
        """Why it was not taken. Where others have recorded of the same episodes since, it is read again and shown."""
        self._taking = False
        if failure.message.key != "intake.overtaken":
            self._failed(failure)
            return
        self._ask()
        self.refuse(self.tr("Others have recorded for the same episodes meanwhile: the file is read again. Look at "
                            "what is shown now, then take it in."))  # fmt: skip
        self.go.setEnabled(False)

    def _failed(self, failure: Failure) -> None:
        self.bar.hide()
        self.refuse(sentence(failure.message, self._reader))
        self.go.setEnabled(False)


def _counted(count: int, one: str, many: str) -> str:
    return one if count == 1 else many.format(count=f"{count:,}")
