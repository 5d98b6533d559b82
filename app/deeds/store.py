"""The store's own keeping: passphrase, lock, people, backups, damage, archive."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QInputDialog

from app.deeds.doer import Doer
from app.failure import Failure
from app.operations.outcome import Outcome
from app.preferences import MOST_LOCK_MINUTES

if TYPE_CHECKING:
    from app.dialogs.passphrase import ChangePassphraseDialog, RecoveryCodeDialog


class StoreDeeds(Doer):
    """Serves the menu Store."""

    _changing: ChangePassphraseDialog | None = None
    code_dialog: RecoveryCodeDialog | None = None

    # the lock

    def do_lock(self) -> None:
        """Hide every screen."""
        self.window.keeping.lock_now(self.model.session.person)

    def do_lock_after(self) -> None:
        """Ask after how many minutes."""
        minutes, given = QInputDialog.getInt(
            self.window, self.tr("Lock after"), self.tr("Minutes without key or mouse"),
            self.window.preferences.lock_minutes, 1, MOST_LOCK_MINUTES,
        )  # fmt: skip
        if given:
            self.lock_after(minutes)

    def lock_after(self, minutes: int) -> None:
        """Lock after so many minutes from now on."""
        self.window.prefer(lock_minutes=minutes)
        self.window.keeping.set_lock_minutes(minutes)

    # people

    def do_people(self) -> None:
        """List the people; the dialog adds, retires and gives PINs."""
        from app.dialogs.people import PeopleDialog

        PeopleDialog(self.model, self.window.reader, self.window.theme, self.window).open()

    # passphrase

    def show_code_once(self) -> None:
        """The store was made just now: show its recovery code, this once."""
        from app.operations import passphrase

        self.model.ask(passphrase.code_once, None, done=self._code_told)

    def _code_told(self, outcome: Outcome[str]) -> None:
        if outcome.value:
            self._show_code(outcome.value)

    def _show_code(self, code: str) -> None:
        from app.dialogs.passphrase import RecoveryCodeDialog

        name = self.model.session.store_path.name
        self.code_dialog = RecoveryCodeDialog(name, code, self.window.theme, self.window)
        self.code_dialog.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
        self.code_dialog.finished.connect(self._code_kept)
        self.code_dialog.open()

    def _code_kept(self, _result: int) -> None:
        self.code_dialog = None

    def do_change_passphrase(self) -> None:
        """Ask for the old and the new one, change it."""
        from app.dialogs.passphrase import ChangePassphraseDialog

        if not self.model.session.encrypted:
            self.window.say(self.tr("This store is not encrypted: it has no passphrase to change."))
            return
        self._changing = ChangePassphraseDialog(self.change_passphrase, self.window.theme, self.window)
        self._changing.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
        self._changing.open()

    def change_passphrase(self, secret: str, new: str, new_code: bool) -> None:
        """Change it; the dialog stays until that is done."""
        from app.operations import passphrase

        request = passphrase.ChangeRequest(secret, new, new_code)
        self.model.ask(passphrase.change, request, done=self._changed, failed=self._not_changed)

    def _changed(self, outcome: Outcome[str]) -> None:
        if self._changing is not None:
            self._changing.accept()
            self._changing = None
        self.window.say(self.tr("The passphrase was changed. Backups made before keep the old one."))
        if outcome.value:
            self._show_code(outcome.value)

    def _not_changed(self, failure: Failure) -> None:
        if self._changing is not None:
            self._changing.failed(failure)
