"""A second passphrase that opens the store too: the ward lead holds it, for the night when nobody knows the first."""

from __future__ import annotations

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QCheckBox, QLabel, QWidget

from app.dialogs.passphrase import SecretDialog
from app.look.theme import Theme
from app.operations import passphrase as operations
from app.operations.outcome import Outcome
from app.session.failure import Failure
from app.session.model import SessionModel
from app.words import Reader, sentence


class SecondPassphraseDialog(SecretDialog):
    """Sets it, changes it, or takes it away; the passphrase and the recovery code stay as they are."""

    def __init__(self, model: SessionModel, reader: Reader, theme: Theme, parent: QWidget | None = None) -> None:
        super().__init__("", "", theme, parent)
        self.setWindowTitle(self.tr("Second passphrase"))
        self.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
        self.go.setText(self.tr("Keep it"))
        self._model, self._reader = model, reader
        told = QLabel(
            self.tr("A second passphrase opens this store as the first does, and is known to the ward lead alone. It "
                    "serves when nobody on duty knows the first, and stays when that is changed.")
        )  # fmt: skip
        told.setWordWrap(True)
        told.setTextFormat(Qt.TextFormat.PlainText)
        self.stands = QLabel()
        self.stands.setProperty("role", "quiet")
        self.body.addWidget(told)
        self.body.addWidget(self.stands)
        self.old = self.secret(self.tr("Passphrase now, or recovery code"))
        self.second = self.secret(self.tr("Second passphrase"))
        self.again = self.secret(self.tr("Once more"))
        self.form.addRow("", self.show_typed)
        self.none = QCheckBox(self.tr("Take the second passphrase away"))
        self.form.addRow("", self.none)
        self.none.toggled.connect(self._none_toggled)
        self.resize(theme.px(580), theme.px(320))
        model.ask(operations.has_second, None, done=self._known, failed=self.failed)

    def _known(self, outcome: Outcome[bool]) -> None:
        self.stands.setText(self.tr("There is one now.") if outcome.value else self.tr("There is none now."))
        self.form.setRowVisible(self.none, outcome.value)
        self.grow()

    def _none_toggled(self, none: bool) -> None:
        for line in (self.second, self.again):
            line.setEnabled(not none)
            line.clear()

    def submit(self) -> None:
        none = self.none.isChecked()
        if not none and self.refuse_new(self.second.text(), self.again.text()):
            return
        self.go.setEnabled(False)
        self.say(self.tr("One moment..."))
        request = operations.SecondRequest(self.old.text(), "" if none else self.second.text())
        self._model.ask(operations.set_second, request, done=self._set, failed=self.failed)

    def _set(self, outcome: Outcome[bool]) -> None:
        for line in (self.old, self.second, self.again):
            line.clear()
        self.none.setChecked(False)
        opens = self.tr("The second passphrase opens the store from now on.")
        self.refuse(opens if outcome.value else self.tr("The second passphrase was taken away."))
        self._known(outcome)

    def failed(self, failure: Failure) -> None:
        """Say why it was refused."""
        self.refuse(sentence(failure.message, self._reader))
