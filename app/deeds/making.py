"""Making a new store, step by step: where, which passphrase, the recovery code, who looks after it, what goes in."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

from PySide6.QtCore import Qt, Signal
from PySide6.QtWidgets import QDialog, QFileDialog

from app.deeds.opening import OpeningDeeds, usual_folder
from app.deeds.recovery_codes import RecoveryCodes
from app.keeping.keeper import Keeping
from app.operations.outcome import Outcome
from app.window.shell import Shell

if TYPE_CHECKING:
    from app.dialogs.first_lead import FirstLeadDialog
    from app.dialogs.passphrase import NewStoreDialog


class MakingDeeds(OpeningDeeds):
    """Makes stores; the menu File builds on it."""

    take_in_wanted = Signal()
    """The new store is there, and a file was to go into it."""

    _then_take_in = False
    _making: Path | None = None
    _new_store: NewStoreDialog | None = None
    lead_dialog: FirstLeadDialog | None = None

    def __init__(self, window: Shell, keeping: Keeping, codes: RecoveryCodes) -> None:
        super().__init__(window)
        self._keeping, self._codes = keeping, codes

    def make_then_take_in(self) -> None:
        """A file is to be taken in, and there is no store yet."""
        self._then_take_in = True
        self.do_new_store()

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
        self.open_path(path, passphrase=passphrase, create=True)
        self.model.ask(operations.code_once, None, done=self._code_told)

    def _not_made(self) -> None:
        self._making, self._new_store, self._then_take_in = None, None, False

    def _code_told(self, outcome: Outcome[str]) -> None:
        """The store is there: its recovery code is shown, this once."""
        if outcome.value:
            self._codes.show(outcome.value).finished.connect(self._ask_lead)
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
        dialog.signed_in.connect(self._keeping.take_proof)
        dialog.named.connect(self.become)
        dialog.finished.connect(self._lead_told)
        dialog.open()

    def _lead_told(self, _result: int) -> None:
        self.lead_dialog = None
        wanted, self._then_take_in = self._then_take_in, False
        if wanted and self.window.model is not None:
            self.take_in_wanted.emit()
