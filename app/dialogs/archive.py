"""Ended episodes: copy them into an archive, say how long they are kept, remove those whose time is over."""

from __future__ import annotations

from pathlib import Path

from PySide6.QtCore import Qt
from PySide6.QtWidgets import (
    QFileDialog,
    QHBoxLayout,
    QLabel,
    QMessageBox,
    QPushButton,
    QSpinBox,
    QTableWidget,
    QTableWidgetItem,
    QWidget,
)

from app.dialogs.asking import AskingDialog
from app.look.formats import counted, day
from app.look.read_table import read_table
from app.look.theme import Theme
from app.operations import archive as operations
from app.operations.outcome import Outcome
from app.session.failure import Failure
from app.session.model import SessionModel
from app.words import Reader, sentence
from storage.archive import MOST_DAYS, Archived, Ended, Removed
from storage.backup_rotation import YEAR


class ArchiveDialog(AskingDialog):
    """Lists the ended episodes of an open store. Removing cannot be undone, so it is asked about."""

    def __init__(self, model: SessionModel, reader: Reader, theme: Theme, parent: QWidget | None = None) -> None:
        super().__init__("", "", theme, parent)
        self.setWindowTitle(self.tr("Ended episodes"))
        self.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
        self.go.setText(self.tr("Archive the chosen..."))
        self._model, self._reader = model, reader
        self.ended: tuple[Ended, ...] = ()
        self._old = 0
        self.told = QLabel()
        self.told.setWordWrap(True)
        self.told.setTextFormat(Qt.TextFormat.PlainText)
        self.table = self._make_table()
        self.days = QSpinBox()
        self.days.setRange(1, MOST_DAYS)
        self.days.setButtonSymbols(QSpinBox.ButtonSymbols.NoButtons)
        self.days.setValue(3650)
        self.keep, self.remove = QPushButton(self.tr("Keep so long")), QPushButton(self.tr("Remove the chosen..."))
        self.remove.setEnabled(False)
        self.body.addWidget(self.told)
        self.add_body(self.table)
        row = QHBoxLayout()
        row.addWidget(self.days)
        row.addWidget(self.keep)
        row.addStretch(1)
        row.addWidget(self.remove)
        self.days.setAccessibleName(self.tr("Days to keep"))
        self.days.setSuffix(self.tr(" days"))
        self.body.addLayout(row)
        self.keep.clicked.connect(self._keep)
        self.remove.clicked.connect(self._ask_remove)
        self.table.itemSelectionChanged.connect(self._chosen_changed)
        self.resize(theme.px(660), theme.px(460))
        self._ask_list()

    def _make_table(self) -> QTableWidget:
        heads = [self.tr("Episode"), self.tr("Ended"), self.tr("May be removed from")]
        return read_table(self.tr("Ended episodes"), heads, many=True)

    # the list

    def _ask_list(self) -> None:
        self._model.ask(operations.listed, None, done=self._listed, failed=self.failed)

    def _listed(self, outcome: Outcome[operations.EndedEpisodes]) -> None:
        self.ended, days = outcome.value.episodes, outcome.value.days
        self._old = outcome.value.old_documents
        if days is None:
            told = self.tr("The ward has not said how long it keeps ended episodes: nothing can be removed.")
        else:
            self.days.setValue(days)
            told = self.tr("Ended episodes are kept for {days} days. Then a ward lead may remove them for good.")
            told = told.format(days=days)
        told += " " + self.tr("An archive is a copy that opens in this window, with the same passphrase.")
        if not self.ended:
            told += " " + self.tr("No episode has ended yet.")
        self.told.setText(told)
        self.grow()
        zone = self._reader.zone
        self.table.setRowCount(len(self.ended))
        for r, e in enumerate(self.ended):
            until = day(e.removable_from, zone) if e.removable_from is not None else self.tr("not said")
            for c, text in enumerate((e.episode, day(e.ended_at, zone), until)):
                self.table.setItem(r, c, QTableWidgetItem(text))
        self._chosen_changed()

    def chosen(self) -> tuple[str, ...]:
        """The keys of the chosen episodes."""
        rows = sorted(i.row() for i in self.table.selectionModel().selectedRows())
        return tuple(self.ended[r].episode for r in rows)

    def _chosen_changed(self) -> None:
        chosen, now = set(self.chosen()), self._model.session.now()
        free = all(e.removable_from is not None and e.removable_from <= now
                   for e in self.ended if e.episode in chosen)  # fmt: skip
        self.go.setEnabled(bool(chosen))
        self.remove.setEnabled(free if chosen else self._old > 0)
        of_handovers = self._old and not chosen
        self.remove.setText(self.tr("Remove old handovers...") if of_handovers else self.tr("Remove the chosen..."))

    # deeds

    def submit(self) -> None:
        path = self._model.session.store_path
        start = str(path.with_name(f"{path.stem}-archive{path.suffix}"))
        chosen, _ = QFileDialog.getSaveFileName(self, self.windowTitle(), start, self.tr("Stores (*.luffmark)"))
        if chosen:
            self.archive(Path(chosen))

    def archive(self, path: Path) -> None:
        """Copy the chosen ones into an archive."""
        self.go.setEnabled(False)
        request = operations.ArchiveRequest(path, self.chosen())
        self._model.ask(operations.write, request, done=self._archived, failed=self.failed)

    def _archived(self, outcome: Outcome[Archived]) -> None:
        made = outcome.value
        told = self.tr("{file} was made and checked: {episodes}, {entries}.")
        episodes = counted(len(made.episodes), self.tr("episode"), self.tr("episodes"))
        entries = counted(made.entries, self.tr("entry"), self.tr("entries"))
        self.refuse(told.format(file=made.path.name, episodes=episodes, entries=entries))

    def _keep(self) -> None:
        self._model.ask(operations.set_retention, self.days.value(), done=self._kept, failed=self.failed)

    def _kept(self, _outcome: Outcome[None]) -> None:
        self._ask_list()

    def _ask_remove(self) -> None:
        if not self.chosen():
            told = self.tr("Remove {count} closed handovers for good? They are older than the ward's retention time.")
            asked = QMessageBox.question(self, self.windowTitle(), told.format(count=self._old))
            if asked is QMessageBox.StandardButton.Yes:
                self.remove_chosen()
            return
        gone = day(self._model.session.now() + YEAR, self._reader.zone)
        told = self.tr(
            "Remove {count} episodes for good? This cannot be undone. Closed handovers as old as the ward's "
            "retention time go with them. Their digests stay in the ledger.\n\nThe backups that the program takes "
            "by itself and that hold them expire by {day}, while the store is in use. Archives, copies made by hand "
            "and backups in a folder used before stay until somebody removes them."
        )
        asked = QMessageBox.question(self, self.windowTitle(), told.format(count=len(self.chosen()), day=gone))
        if asked is QMessageBox.StandardButton.Yes:
            self.remove_chosen()

    def remove_chosen(self) -> None:
        """Remove the chosen ones for good; where none is chosen, closed handovers past their time."""
        self._model.ask(operations.remove, self.chosen(), done=self._removed, failed=self.failed)

    def _removed(self, outcome: Outcome[tuple[Removed, ...]]) -> None:
        self.refuse("\n".join(sentence(m, self._reader) for m in operations.told(outcome.value)))
        self._ask_list()

    def failed(self, failure: Failure) -> None:
        """Say why it was refused."""
        self.refuse(sentence(failure.message, self._reader))
        self._chosen_changed()
