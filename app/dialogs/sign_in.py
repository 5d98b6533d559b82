"""Who logs from now on, by initials. Proving it is another matter than saying it."""

from __future__ import annotations

from PySide6.QtWidgets import QLineEdit, QWidget

from app.dialogs.asking import AskingDialog
from app.theme import Theme

MOST = 12


class SignInDialog(AskingDialog):
    """Asks for initials; two keys and Enter are enough."""

    def __init__(self, person: str, theme: Theme, parent: QWidget | None = None) -> None:
        super().__init__(self.tr("Change person"), self.tr("Log as this person"), theme, parent)
        self.initials = QLineEdit(person)
        self.initials.setMaxLength(MOST)
        self.initials.selectAll()
        self.field(self.tr("Initials"), self.initials)
        self.resize(theme.px(380), theme.px(160))

    @property
    def person(self) -> str:
        """What was typed, in capitals."""
        return self.initials.text().strip().upper()

    def submit(self) -> None:
        if not self.person:
            self.refuse(self.tr("Type your initials: one to {most} letters.").format(most=MOST))
            return
        self.accept()
