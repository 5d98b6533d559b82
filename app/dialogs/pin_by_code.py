"""The way in when nobody here has a PIN that fits: the store's recovery code gives somebody a new one."""

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
from storage.people import LEAST_PIN, MOST_INITIALS, MOST_PIN


class PinByCodeDialog(AskingDialog):
    """`signed_in` carries the initials of who has a PIN now. That the code was used stands in the ledger."""

    signed_in = Signal(str)

    def __init__(
        self, model: SessionModel, initials: str, reader: Reader, theme: Theme, parent: QWidget | None = None
    ) -> None:
        super().__init__("", "", theme, parent)
        self.setWindowTitle(self.tr("In by the recovery code"))
        self.go.setText(self.tr("Set the PIN and sign in"))
        self._model, self._reader = model, reader
        told = QLabel(
            self.tr("The recovery code was shown when the store was made and lies where the ward keeps its keys. It "
                    "gives a new PIN to somebody who forgot theirs, and a first PIN, as staff, to somebody who has "
                    "none. The ledger keeps that it was used. The passphrase does not serve here.")
        )  # fmt: skip
        told.setWordWrap(True)
        told.setTextFormat(Qt.TextFormat.PlainText)
        self.body.addWidget(told)
        self.code, self.initials, self.pin, self.again = QLineEdit(), QLineEdit(initials), QLineEdit(), QLineEdit()
        self.initials.setMaxLength(MOST_INITIALS)
        for line in (self.pin, self.again):
            line.setEchoMode(QLineEdit.EchoMode.Password)
            line.setMaxLength(MOST_PIN)
        self.pin.setPlaceholderText(self.tr("{least} to {most} digits").format(least=LEAST_PIN, most=MOST_PIN))
        self.field(self.tr("Recovery code"), self.code)
        self.field(self.tr("Initials"), self.initials)
        self.field(self.tr("New PIN"), self.pin)
        self.field(self.tr("Once more"), self.again)
        self.resize(theme.px(560), theme.px(320))

    def submit(self) -> None:
        if not self.code.text().strip() or not self.initials.text().strip():
            self.refuse(self.tr("Type the recovery code and your initials."))
        elif self.pin.text() != self.again.text():
            self.refuse(self.tr("The two PINs are not the same."))
        else:
            self.go.setEnabled(False)
            self.say(self.tr("One moment..."))
            request = operations.NewPin(self.initials.text(), self.pin.text(), self.code.text())
            self._model.ask(operations.pin_by_code, request, done=self._set, failed=self.failed)

    def _set(self, outcome: Outcome[str]) -> None:
        self.signed_in.emit(outcome.value)
        self.accept()

    def failed(self, failure: Failure) -> None:
        """Say why it was refused."""
        self.refuse(sentence(failure.message, self._reader))
