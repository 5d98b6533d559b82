"""Recovery codes, each shown once."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import Qt

from app.deeds.doer import Doer

if TYPE_CHECKING:
    from app.dialogs.passphrase import RecoveryCodeDialog


class RecoveryCodes(Doer):
    """Shows one code at a time."""

    dialog: RecoveryCodeDialog | None = None
    """The one that shows a code now."""

    def show(self, code: str, *, opens: bool = True) -> RecoveryCodeDialog:
        """Show a recovery code, this once: one that opens the store, or only gives a PIN to who has none."""
        from app.dialogs.passphrase import RecoveryCodeDialog

        name = self.model.session.store_path.name
        dialog = self.dialog = RecoveryCodeDialog(name, code, self.window.theme, self.window, opens=opens)
        dialog.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
        dialog.finished.connect(self._kept)
        dialog.open()
        return dialog

    def show_of_people(self, code: str) -> None:
        """Show a code that opens no store and only gives a PIN."""
        self.show(code, opens=False)

    def _kept(self, _result: int) -> None:
        self.dialog = None
