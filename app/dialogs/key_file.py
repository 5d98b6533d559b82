"""A key file that was altered or lost is put back from a backup: it wraps the same key."""

from __future__ import annotations

from pathlib import Path

from PySide6.QtWidgets import QWidget

from app.dialogs.file_work import FileWork
from app.look.formats import wall
from app.look.theme import Theme
from app.operations import key_file
from app.operations.outcome import Outcome
from app.session.clock import Clock
from app.words import Reader
from storage.backup_rotation import taken_at


class KeyFileDialog(FileWork):
    """Asks for a backup, or its key file, and the passphrase of that time; tries it before anything is changed."""

    def __init__(
        self, store: Path | None, backup: Path | None, who: str, clock: Clock, reader: Reader, theme: Theme,
        parent: QWidget | None = None,
    ) -> None:  # fmt: skip
        super().__init__("", "", who, clock, reader, theme, parent)
        self.setWindowTitle(self.tr("Put a key file back"))
        self.go.setText(self.tr("Try it and put it back"))
        self.open_new.setText(self.tr("Open the store"))
        if backup is not None:
            self.source.setText(str(key_file.key_file_of(backup)))
        if store is not None:
            self.new.setText(str(store))
        told = self.tr(
            "The store itself may be whole: only the file that holds its key, wrapped by the passphrase, is altered "
            "or gone. Each backup has a copy of it. The copy is tried first; the altered file is set aside, not "
            "deleted."
        )
        self.lay_out(told, self.tr("Key file of a backup"), self.tr("Store"))

    def needs_passphrase(self, path: Path) -> bool:
        del path
        return True

    def note_of(self, path: Path) -> str:
        at = taken_at(path.with_name(path.name.removesuffix(".key")))
        if at is None:
            return ""
        told = self.tr("Of {time}: it opens with the passphrase that the store had then.")
        return told.format(time=wall(at, self._reader.zone))

    def submit(self) -> None:
        if (found := self.paths()) is not None and not self.lacks_passphrase() and not self.lacks_name():
            self.work(key_file.put_back, key_file.PutBack(*found, self.passphrase or ""), self._put_back)

    def _put_back(self, outcome: Outcome[Path]) -> None:
        lines = [self.tr("The key file fits the store and was put back.")]
        if outcome.value.exists():
            lines.append(self.tr("The one that was there is kept as {name}.").format(name=outcome.value.name))
        self.show_told(lines)
