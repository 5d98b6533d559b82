"""Who looks after a new store: the first ward lead, by initials and a PIN; or initials alone for now."""

from __future__ import annotations

from PySide6.QtCore import Qt, Signal
from PySide6.QtWidgets import QLabel, QLineEdit, QWidget

from app.dialogs.asking import AskingDialog
from app.look.theme import Theme
from app.operations import people as operations
from app.operations.outcome import Outcome
from app.session.failure import Failure
from app.session.model import SessionModel
from app.words import Reader, sentence
from storage.people import LEAD, LEAST_PIN, MOST_INITIALS, MOST_PIN


class FirstLeadDialog(AskingDialog):
    """`signed_in` carries the initials once the PIN is kept. Left without one, the store asks for initials alone."""

    signed_in = Signal(str)
    named = Signal(str)
    """Initials without a PIN."""

    def __init__(
        self, model: SessionModel, person: str, reader: Reader, theme: Theme, parent: QWidget | None = None
    ) -> None:
        super().__init__(self.tr("Who looks after this store?"), self.tr("Sign in"), theme, parent)
        self._model, self._reader = model, reader
        title = QLabel(self.tr("The first person is the ward lead"))
        title.setProperty("role", "emphasis")
        self.body.addWidget(title)
        for text in (
            self.tr("A ward lead adds the others (Store, People), changes the policy, restores and removes. Initials "
                    "and PIN are asked for when the store opens and after a lock, not for each entry."),
            self.tr("Without a PIN the store asks for initials alone: anybody may log as anybody. A PIN can be given "
                    "at any time later."),
        ):  # fmt: skip
            label = QLabel(text)
            label.setWordWrap(True)
            label.setTextFormat(Qt.TextFormat.PlainText)
            self.body.addWidget(label)
        self.initials, self.pin, self.again = QLineEdit(person), QLineEdit(), QLineEdit()
        self.initials.setMaxLength(MOST_INITIALS)
        for line in (self.pin, self.again):
            line.setEchoMode(QLineEdit.EchoMode.Password)
            line.setMaxLength(MOST_PIN)
        self.pin.setPlaceholderText(self.tr("{least} to {most} digits").format(least=LEAST_PIN, most=MOST_PIN))
        self.field(self.tr("Initials"), self.initials)
        self.field(self.tr("PIN"), self.pin)
        self.field(self.tr("Once more"), self.again)
        self.leave.setText(self.tr("Later: initials alone"))
        self.resize(theme.px(560), theme.px(340))
        (self.pin if person else self.initials).setFocus()

    def submit(self) -> None:
        if self.pin.text() != self.again.text():
            self.refuse(self.tr("The two PINs are not the same."))
            return
        self.go.setEnabled(False)
        request = operations.NewPerson(self.initials.text(), self.pin.text(), LEAD)
        self._model.ask(operations.add, request, done=self._added, failed=self.failed)

    def _added(self, outcome: Outcome[str]) -> None:
        """They have just typed their PIN: the ledger keeps that they signed in, and nobody asks once more."""
        self.signed_in.emit(outcome.value)
        self._model.ask(operations.sign_in, operations.SignIn(outcome.value, self.pin.text()))
        self.accept()

    def reject(self) -> None:
        """No PIN now. Initials that were typed log from now on."""
        person = self.initials.text().strip().upper()
        if person and not self._model.session.has_people:
            self.named.emit(person)
        super().reject()

    def failed(self, failure: Failure) -> None:
        """Say why it was refused."""
        self.refuse(sentence(failure.message, self._reader))
