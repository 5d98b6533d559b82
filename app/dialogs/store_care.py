"""Backups, restoring one, and saving what can be read of a damaged store: forms that work on files, each in words."""

from __future__ import annotations

from pathlib import Path
from typing import Any, cast

from PySide6.QtCore import Qt, Signal
from PySide6.QtWidgets import (
    QAbstractItemView,
    QFileDialog,
    QHBoxLayout,
    QHeaderView,
    QLabel,
    QLineEdit,
    QPlainTextEdit,
    QPushButton,
    QTableWidget,
    QTableWidgetItem,
    QWidget,
)

from app.backups import BackupKeeper
from app.clock import Clock
from app.dialogs.asking import AskingDialog
from app.dialogs.passphrase import SecretDialog
from app.failure import Failure
from app.formats import wall
from app.operations import backup as backups
from app.operations import salvage as salvaging
from app.operations.outcome import Outcome
from app.runner import Opener, Operation, Runner
from app.theme import Theme
from app.words import Reader, sentence
from core.record.instant import Instant
from storage.backup_rotation import backups_in


class _NoStore:
    """Stands where a runner wants a store: this work is on files alone."""

    def close(self) -> None:
        """Nothing is open."""


class FileWork(SecretDialog):
    """A file to read, a store to make, a passphrase; work on a worker of its own, and what came of it in words."""

    made = Signal(object)
    """The path of the store that was made."""

    def __init__(
        self, title: str, word: str, who: str, clock: Clock, reader: Reader, theme: Theme, parent: QWidget | None
    ) -> None:
        super().__init__(title, word, theme, parent)
        self._who, self._clock, self._reader = who, clock, reader
        self._runner: Runner | None = None
        self.source, self.new = QLineEdit(), QLineEdit()
        self.told = QPlainTextEdit()
        self.told.setReadOnly(True)
        self.told.setAccessibleName(self.tr("What came of it"))
        self.told.setMinimumHeight(theme.px(130))
        self.told.hide()
        self.open_new = QPushButton(self.tr("Open the new store"))
        self.open_new.hide()
        self.open_new.clicked.connect(self._open_new)
        self.resize(theme.px(640), theme.px(360))

    def lay_out(self, told: str, source: str, new: str) -> None:
        """The form, with the words for its two files."""
        label = QLabel(told)
        label.setWordWrap(True)
        label.setTextFormat(Qt.TextFormat.PlainText)
        self.body.addWidget(label)
        self._path_row(source, self.source, self._choose_source)
        self._path_row(new, self.new, self._choose_new)
        self.secret_line = self.secret(self.tr("Passphrase, if it has one"))
        self.form.addRow("", self.show_typed)
        self._column.insertWidget(3, self.told)
        self._column.insertWidget(4, self.open_new, 0, Qt.AlignmentFlag.AlignLeft)

    def _path_row(self, label: str, line: QLineEdit, choose: Any) -> None:
        button = QPushButton(self.tr("Choose..."))
        button.setProperty("role", "small")
        button.clicked.connect(choose)
        row = QWidget()
        layout = QHBoxLayout(row)
        layout.setContentsMargins(0, 0, 0, 0)
        layout.addWidget(line, 1)
        layout.addWidget(button)
        line.setAccessibleName(label)
        self.form.addRow(label, row)

    def _choose_source(self) -> None:
        chosen, _ = QFileDialog.getOpenFileName(self, self.windowTitle(), self.source.text())
        if chosen:
            self.source.setText(chosen)

    def _choose_new(self) -> None:
        chosen, _ = QFileDialog.getSaveFileName(self, self.windowTitle(), self.new.text())
        if chosen:
            self.new.setText(chosen)

    def paths(self) -> tuple[Path, Path] | None:
        """Both files; None, and a word of it, where one is not named."""
        if self.source.text().strip() and self.new.text().strip():
            return Path(self.source.text().strip()), Path(self.new.text().strip())
        self.refuse(self.tr("Name both files."))
        return None

    @property
    def passphrase(self) -> str | None:
        """What was typed; None for nothing."""
        return self.secret_line.text() or None

    def work(self, operation: Operation, request: object, done: Any) -> None:
        """Do it; the form waits."""
        self.go.setEnabled(False)
        self.wrong.setText(self.tr("Working..."))
        self._end_work()
        self._runner = Runner(cast(Opener, _NoStore), self)
        self._runner.submit(operation, request, who=self._who, now=self._clock.now(), done=done, failed=self.failed)

    def _end_work(self) -> None:
        if self._runner is not None:
            self._runner.close()
            self._runner = None

    def failed(self, failure: Failure) -> None:
        """Say why it was refused."""
        self._end_work()
        self.refuse(sentence(failure.message, self._reader))

    def show_told(self, lines: list[str]) -> None:
        """Say what came of it."""
        self._end_work()
        self.wrong.clear()
        self.told.setPlainText("\n".join(lines))
        self.told.show()
        self.open_new.show()
        self.go.setEnabled(False)
        self._grow()

    def _open_new(self) -> None:
        path = Path(self.new.text().strip())
        self.accept()
        self.made.emit(path)

    def done(self, result: int) -> None:
        """The worker ends with the form."""
        self._end_work()
        super().done(result)


class RestoreDialog(FileWork):
    """A new store of a backup, with what the old store holds beyond it."""

    def __init__(
        self, backup: Path | None, against: Path | None, who: str, clock: Clock, reader: Reader, theme: Theme,
        parent: QWidget | None = None,
    ) -> None:  # fmt: skip
        super().__init__("", "", who, clock, reader, theme, parent)
        self.setWindowTitle(self.tr("Restore a backup"))
        self.go.setText(self.tr("Restore"))
        self._against = against
        told = self.tr(
            "A backup is checked and made a new store beside the old one; nothing is overwritten. What the old store "
            "holds beyond it is listed, to be entered again."
        )
        self.lay_out(told, self.tr("Backup"), self.tr("New store"))
        if backup is not None:
            self.source.setText(str(backup))
        if against is not None:
            self.new.setText(str(against.with_name(f"{against.stem}-restored{against.suffix}")))

    def submit(self) -> None:
        if (found := self.paths()) is not None:
            request = backups.RestoreRequest(*found, self.passphrase, self._against)
            self.work(backups.restore, request, self._restored)

    def _restored(self, outcome: Outcome[backups.Restored]) -> None:
        self.show_told(restored_words(outcome.value, self._reader))


class SalvageDialog(FileWork):
    """What can be read of a damaged store, in a new one."""

    def __init__(
        self, old: Path | None, who: str, clock: Clock, reader: Reader, theme: Theme, parent: QWidget | None = None
    ) -> None:
        super().__init__("", "", who, clock, reader, theme, parent)
        self.setWindowTitle(self.tr("Save from a damaged store"))
        self.go.setText(self.tr("Save what can be read"))
        self.recovery_code = ""
        self.lay_out(
            self.tr("First think of the newest backup: it is whole. This reads what is left of a damaged file into a "
                    "new store and says what was lost. The damaged file is not changed."),
            self.tr("Damaged store"), self.tr("New store"),
        )  # fmt: skip
        if old is not None:
            self.source.setText(str(old))
            self.new.setText(str(old.with_name(f"{old.stem}-salvaged{old.suffix}")))

    def submit(self) -> None:
        if (found := self.paths()) is not None:
            self.work(salvaging.salvage, salvaging.SalvageRequest(*found, self.passphrase), self._salvaged)

    def _salvaged(self, outcome: Outcome[Any]) -> None:
        found = outcome.value
        lines = [sentence(m, self._reader) for m in salvaging.told(found)]
        if salvaging.lost_nothing(found):
            lines.append(self.tr("Nothing was lost."))
        if found.recovery_code:
            lines.append(self.tr("Recovery code of the new store, shown this once: {code}").format(
                code=found.recovery_code))  # fmt: skip
        self.recovery_code = found.recovery_code
        self.show_told(lines)


def restored_words(made: backups.Restored, reader: Reader) -> list[str]:
    """What came of a restore, line by line."""
    from PySide6.QtCore import QCoreApplication

    def tr(text: str) -> str:
        return QCoreApplication.translate("restore", text)

    lines = [tr("{store} was made and checked.").format(store=made.new.name)]
    if made.not_compared is not None:
        return [*lines, tr("The old store could not be compared:"), sentence(made.not_compared, reader)]
    if made.newer is None:
        return lines
    if not made.same:
        lines.append(tr("The old store does not continue this backup: their chains differ."))
    if not made.newer.batches:
        return [*lines, tr("The old store holds nothing beyond this backup.")]
    lines.append(tr("The old store holds more, which is to be entered again:"))
    row = tr("{episode}: {entries} entries, {samples} device samples, last recorded {time}")
    lines += [row.format(episode=e.episode, entries=e.entries, samples=e.samples,
                         time=wall(e.last_recorded, reader.zone)) for e in made.newer.episodes]  # fmt: skip
    if made.newer.others:
        lines.append(tr("and {count} documents, policies or sign-ins").format(count=made.newer.others))
    return lines


class BackupsDialog(AskingDialog):
    """The rotating backups of the open store: when, where, and what can be done with them."""

    restore_wanted = Signal(object)
    """The path of a backup."""
    folder_wanted = Signal(object)
    """Another folder for the backups."""
    witness_wanted = Signal(object)
    """A witness file; an empty path for none."""

    def __init__(
        self, keeper: BackupKeeper, store: Path, reader: Reader, theme: Theme, parent: QWidget | None = None
    ) -> None:
        super().__init__("", "", theme, parent)
        self.setWindowTitle(self.tr("Backups"))
        self.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
        self.go.setText(self.tr("Back up now"))
        self._keeper, self._store, self._reader = keeper, store, reader
        self.told, self.table = QLabel(), QTableWidget(0, 3)
        self.told.setWordWrap(True)
        self.told.setTextFormat(Qt.TextFormat.PlainText)
        heads = [self.tr("Taken"), self.tr("File"), self.tr("Size")]
        self.table.setHorizontalHeaderLabels(heads)
        self.table.setAccessibleName(self.tr("Backups"))
        self.table.horizontalHeader().setDefaultAlignment(Qt.AlignmentFlag.AlignLeft)
        self.table.horizontalHeader().setSectionResizeMode(QHeaderView.ResizeMode.ResizeToContents)
        self.table.horizontalHeader().setSectionResizeMode(1, QHeaderView.ResizeMode.Stretch)
        self.table.setEditTriggers(QAbstractItemView.EditTrigger.NoEditTriggers)
        self.table.setSelectionBehavior(QAbstractItemView.SelectionBehavior.SelectRows)
        self.table.setSelectionMode(QAbstractItemView.SelectionMode.SingleSelection)
        self.table.verticalHeader().hide()
        self.restore, self.folder = QPushButton(self.tr("Restore this one...")), QPushButton(self.tr("Folder..."))
        self.witness = QPushButton(self.tr("Witness file..."))
        row = QHBoxLayout()
        for button in (self.restore, self.folder, self.witness):
            row.addWidget(button)
        row.addStretch(1)
        self.body.addWidget(self.told)
        self.add_body(self.table)
        self.body.addLayout(row)
        self.restore.clicked.connect(self._restore)
        self.folder.clicked.connect(self._folder)
        self.witness.clicked.connect(self._witness)
        keeper.stands.connect(self._stands)
        keeper.failed.connect(self._not_taken)
        self.resize(theme.px(680), theme.px(440))
        self.fill()

    def fill(self) -> None:
        """List what lies in the folder, the newest first."""
        folder = self._keeper.folder
        told = self.tr(
            "One backup an hour for a shift, one a day for two weeks, one a month for a year, in {folder}. Each is "
            "opened before an old one goes. Choose a folder on another disk if there is one."
        )
        self.told.setText(told.format(folder=folder))
        self.paths = backups_in(folder, self._store) if folder.is_dir() else {}
        rows: list[tuple[Instant, Path]] = sorted(self.paths.items(), reverse=True)
        self._rows = [path for _, path in rows]
        self.table.setRowCount(len(rows))
        for r, (at, path) in enumerate(rows):
            size = f"{path.stat().st_size / 1e6:,.1f} MB"
            for c, text in enumerate((wall(at, self._reader.zone), path.name, size)):
                self.table.setItem(r, c, QTableWidgetItem(text))
        if rows:
            self.table.selectRow(0)
        self.restore.setEnabled(bool(rows))

    def submit(self) -> None:
        self.go.setEnabled(False)
        self._keeper.take_now()

    def _stands(self, found: backups.Rotated) -> None:
        if found.taken:
            self.refuse(self.tr("A backup was taken and opened."))
        self.fill()

    def _not_taken(self, failure: Failure) -> None:
        self.refuse(sentence(failure.message, self._reader))

    def _restore(self) -> None:
        row = self.table.currentRow()
        if 0 <= row < len(self._rows):
            self.accept()
            self.restore_wanted.emit(self._rows[row])

    def _folder(self) -> None:
        chosen = QFileDialog.getExistingDirectory(self, self.tr("Folder for backups"), str(self._keeper.folder))
        if chosen:
            self.folder_wanted.emit(Path(chosen))
            self.fill()

    def _witness(self) -> None:
        chosen, _ = QFileDialog.getSaveFileName(
            self, self.tr("Witness file"), self._keeper.witness, options=QFileDialog.Option.DontConfirmOverwrite
        )
        if chosen:
            self.witness_wanted.emit(Path(chosen))
