"""The rotating backups of the open store: when, where, one more now, and what can be done with them."""

from __future__ import annotations

from pathlib import Path

from PySide6.QtCore import Qt, Signal
from PySide6.QtWidgets import (
    QFileDialog,
    QHBoxLayout,
    QLabel,
    QPushButton,
    QTableWidget,
    QTableWidgetItem,
    QWidget,
)

from app.dialogs.asking import AskingDialog
from app.keeping.backups import BackupKeeper
from app.look.formats import wall
from app.look.read_table import read_table
from app.look.theme import Theme
from app.operations import backup as backups
from app.session.failure import Failure
from app.words import Reader, sentence
from core.record.instant import Instant
from storage.backup_rotation import backups_in


class BackupsDialog(AskingDialog):
    """Lists them, the newest first."""

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
        self.told, self.table = QLabel(), self._made_table()
        self.told.setWordWrap(True)
        self.told.setTextFormat(Qt.TextFormat.PlainText)
        self.restore, self.folder = QPushButton(self.tr("Restore this one...")), QPushButton(self.tr("Folder..."))
        self.witness = QPushButton(self.tr("Witness file..."))
        self.witness.setToolTip(
            self.tr("After each backup the ledger's head is added to this file. Kept elsewhere, it shows if the "
                    "newest entries are ever cut off.")
        )  # fmt: skip
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
        self.resize(theme.px(720), theme.px(440))
        self.fill()

    def _made_table(self) -> QTableWidget:
        heads = [self.tr("Taken"), self.tr("File"), self.tr("Size")]
        return read_table(self.tr("Backups"), heads, wide=1)

    def fill(self) -> None:
        """List what lies in the folder, the newest first."""
        folder = self._keeper.folder
        told = self.tr(
            "Taken by itself while the store is open: one an hour for a shift, one a day for two weeks, one a month "
            "for a year. Each is opened before an old one goes. They lie in {folder}. Choose a folder on another "
            "disk if there is one."
        )
        self.paths = backups_in(folder, self._store) if folder.is_dir() else {}
        more = "" if self.paths else " " + self.tr("None lies there yet.")
        if any(backups.key_file_of(path) for path in self.paths.values()):
            more += " " + self.tr("An encrypted one opens only with its key file: copy both.")
        self.told.setText(told.format(folder=folder) + more)
        rows: list[tuple[Instant, Path]] = sorted(self.paths.items(), reverse=True)
        self._rows = [path for _, path in rows]
        self.table.setRowCount(len(rows))
        for r, (at, path) in enumerate(rows):
            size = f"{path.stat().st_size / 1e6:,.1f} MB"
            with_key = self.tr("{name} and its .key") if backups.key_file_of(path) else "{name}"
            files = with_key.format(name=path.name)
            for c, text in enumerate((wall(at, self._reader.zone), files, size)):
                self.table.setItem(r, c, QTableWidgetItem(text))
        if rows:
            self.table.selectRow(0)
        self.restore.setEnabled(bool(rows))

    def submit(self) -> None:
        self.go.setEnabled(False)
        self.say(self.tr("Working..."))
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
            left, before = len(self._rows), self._keeper.folder
            self.folder_wanted.emit(Path(chosen))
            self.fill()
            if left and self._keeper.folder != before:
                told = self.tr("The {count} backups in {folder} stay there: they are not listed and do not expire "
                               "any more. Remove them by hand when their time is over.")  # fmt: skip
                self.refuse(told.format(count=left, folder=before))

    def _witness(self) -> None:
        chosen, _ = QFileDialog.getSaveFileName(
            self, self.tr("Witness file"), self._keeper.witness, options=QFileDialog.Option.DontConfirmOverwrite
        )
        if chosen:
            self.witness_wanted.emit(Path(chosen))
            self.refuse(
                self.tr("After each backup the ledger's head is added to {name}.").format(name=Path(chosen).name)
            )
