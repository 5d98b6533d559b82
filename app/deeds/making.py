"""Making a new store, step by step: where, which passphrase, the recovery code, who looks after it, what goes in."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QDialog, QFileDialog

from app.deeds.doer import Doer
from app.operations.outcome import Outcome

if TYPE_CHECKING:
    from app.dialogs.first_lead import FirstLeadDialog
    from app.dialogs.passphrase import NewStoreDialog


class MakingDeeds(Doer):
    """Makes stores; the menu File builds on it."""

    _then_take_in = False
    _making: Path | None = None
    _new_store: NewStoreDialog | None = None
    lead_dialog: FirstLeadDialog | None = None

    def do_new_store(self) -> None:
        """Ask where and with which passphrase, make an empty store, open it."""
        chosen, _ = QFileDialog.getSaveFileName(
            self.window,
            self.tr("New store"),
            str(usual_folder() / "ward.luffmark"),
            self.tr("Stores (*.luffmark)"),
            options=QFileDialog.Option.DontConfirmOverwrite,  # nothing is ever overwritten
        )
        if chosen:
            path = Path(chosen)
            self.make_store(path if path.suffix else path.with_suffix(".luffmark"))
        else:
            self._then_take_in = False

    def make_store(self, path: Path) -> QDialog:
        """Ask for the passphrase of a new store, or for the word that it goes without; make it and open it."""
        from app.dialogs.passphrase import NewStoreDialog

        dialog = NewStoreDialog(path.name, self.window.theme, self.window)
        dialog.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
        self._making = path
        dialog.accepted.connect(self._make)
        dialog.rejected.connect(self._not_made)
        self._new_store = dialog
        dialog.open()
        return dialog

    def _make(self) -> None:
        from app.operations import passphrase as operations

        if self._making is None or self._new_store is None:
            return
        path, passphrase = self._making, self._new_store.passphrase
        self._making, self._new_store = None, None
        self.window.doers.file.open_path(path, passphrase=passphrase, create=True)
        self.model.ask(operations.code_once, None, done=self._code_told)

    def _not_made(self) -> None:
        self._making, self._new_store, self._then_take_in = None, None, False

    def _code_told(self, outcome: Outcome[str]) -> None:
        """The store is there: its recovery code is shown, this once."""
        if outcome.value:
            self.window.doers.store.show_code(outcome.value).finished.connect(self._ask_lead)
        else:
            self._ask_lead()

    def _ask_lead(self, _result: int = 0) -> None:
        """Who looks after the store; nobody has to say so now."""
        from app.dialogs.first_lead import FirstLeadDialog

        if self.window.model is None:
            return
        dialog = self.lead_dialog = FirstLeadDialog(
            self.model, self.window.preferences.person, self.window.reader, self.window.theme, self.window
        )
        dialog.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
        dialog.signed_in.connect(self.window.keeping.take_proof)
        dialog.named.connect(self.window.doers.file.become)
        dialog.finished.connect(self._lead_told)
        dialog.open()

    def _lead_told(self, _result: int) -> None:
        self.lead_dialog = None
        if self._then_take_in and self.window.model is not None:
            self._then_take_in = False
            self.window.doers.file.do_take_in()


def usual_folder() -> Path:
    """Where stores lie unless another place is chosen."""
    from platformdirs import user_data_path

    folder = user_data_path("luffmark", appauthor=False)
    folder.mkdir(parents=True, exist_ok=True)
    return folder
