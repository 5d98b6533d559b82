"""Several files taken in one step: shown and taken one after the other, so that each is judged against those before.

What a person answered for one table is proposed for the next of the same columns: trends of one night come in parts.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import replace
from pathlib import Path
from typing import TYPE_CHECKING

from PySide6.QtCore import QObject
from PySide6.QtWidgets import QDialog

from app.operations.intake import ReadRequest
from app.session.model import SessionModel

if TYPE_CHECKING:
    from app.window.shell import Shell


class FilesInTurn(QObject):
    """Lives until the last file's dialog is closed. Leaving one file goes on to the next."""

    def __init__(
        self, model: SessionModel, paths: Sequence[Path], episodes: Mapping[str, str], window: Shell
    ) -> None:
        super().__init__(window)
        self._model, self._window, self._episodes = model, window, episodes
        self._waiting, self._count = list(paths), len(paths)
        self._given: ReadRequest | None = None
        self._named: Mapping[str, str] = {}
        """What was said of names in a table's own column: the next file of the same night names them too."""

    def begin(self) -> QDialog:
        """Show the first file."""
        return self._show(self._waiting.pop(0))

    def _show(self, path: Path) -> QDialog:
        from storage.intake.file_kinds import FileKind, kind_of

        try:
            kind = kind_of(path)
        except OSError:
            kind = FileKind.LOG_CSV  # the dialog says what is wrong with it
        if kind is not FileKind.TABLE:
            return self._read(ReadRequest(path, zone=self._model.session.zone, episodes=self._episodes))
        from app.intake_window.mapping_dialog import MappingDialog

        asking = MappingDialog(self._model, path, self._window.reader, self._window.theme, self._window, self._given)
        asking.ready.connect(self._answered)
        asking.rejected.connect(self._go_on)
        return self._opened(asking, path)

    def _answered(self, request: ReadRequest) -> None:
        self._given = request
        request = replace(request, episodes=self._episodes, patients=self._named)
        self._read(request)

    def _read(self, request: ReadRequest) -> QDialog:
        from app.dialogs.intake import IntakeDialog

        dialog = IntakeDialog(self._model, request, self._window.reader, self._window.theme, self._window)
        dialog.taken.connect(self._taken)
        dialog.rejected.connect(self._go_on)
        return self._opened(dialog, request.path)

    def _taken(self, told: str, episodes: Sequence[str]) -> None:
        from app.dialogs.intake import IntakeDialog

        dialog = self.sender()
        if isinstance(dialog, IntakeDialog):
            self._named = {**self._named, **dialog.request.patients}
        strip = self._window.strip
        if strip is not None and strip.patient is None and episodes:
            strip.say_of(episodes[0], told, *episodes[1:])
        self._window.say(told)
        self._go_on()

    def _opened(self, dialog: QDialog, path: Path) -> QDialog:
        if self._count > 1:
            number = self._count - len(self._waiting)
            title = self.tr("Take in {name} ({number} of {count})")
            dialog.setWindowTitle(title.format(name=path.name, number=number, count=self._count))
        dialog.open()
        return dialog

    def _go_on(self) -> None:
        if not self._waiting or self._window.model is not self._model:  # the store may have been closed meanwhile
            self.deleteLater()
            return
        self._show(self._waiting.pop(0))
