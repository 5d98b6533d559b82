"""The page that stands before everything while the window is locked. It names no patient and no store."""

from __future__ import annotations

from enum import StrEnum

from PySide6.QtCore import Qt, Signal
from PySide6.QtWidgets import (
    QFormLayout,
    QFrame,
    QHBoxLayout,
    QLabel,
    QLineEdit,
    QPushButton,
    QVBoxLayout,
    QWidget,
)

from app.theme import Theme
from storage.people import MOST_INITIALS, MOST_PIN


class Way(StrEnum):
    """What opens the window again."""

    PIN = "pin"
    PASSPHRASE = "passphrase"
    NOTHING = "nothing"


class LockPage(QWidget):
    """Asks for what the store has: initials and PIN, else its passphrase, else for a press of a button."""

    pin_given = Signal(str, str)
    passphrase_given = Signal(str)
    opened = Signal()

    def __init__(self, theme: Theme) -> None:
        super().__init__()
        self.way = Way.NOTHING
        self._card = QFrame()
        self._card.setProperty("card", True)
        self.title = QLabel()
        self.title.setProperty("role", "title")
        self.told = QLabel()
        self.told.setWordWrap(True)
        self.told.setTextFormat(Qt.TextFormat.PlainText)
        self.initials, self.secret = QLineEdit(), QLineEdit()
        self.initials.setMaxLength(MOST_INITIALS)
        self.secret.setEchoMode(QLineEdit.EchoMode.Password)
        self.wrong = QLabel()
        self.wrong.setProperty("role", "strong")
        self.wrong.setWordWrap(True)
        self.wrong.setTextFormat(Qt.TextFormat.PlainText)
        self.go = QPushButton(self.tr("Open"))
        self.go.setProperty("role", "primary")
        self._form = QFormLayout()
        self._form.addRow(self.tr("Initials"), self.initials)
        self._form.addRow(self.tr("PIN"), self.secret)
        self.initials.setAccessibleName(self.tr("Initials"))
        self.secret.setAccessibleName(self.tr("PIN"))
        self._column = QVBoxLayout(self._card)
        for part in (self.title, self.told):
            self._column.addWidget(part)
        self._column.addLayout(self._form)
        self._column.addWidget(self.wrong)
        self._column.addWidget(self.go, 0, Qt.AlignmentFlag.AlignRight)
        middle = QHBoxLayout()
        middle.addStretch(1)
        middle.addWidget(self._card)
        middle.addStretch(1)
        outer = QVBoxLayout(self)
        outer.addStretch(1)
        outer.addLayout(middle)
        outer.addStretch(1)
        self.go.clicked.connect(self._given)
        self.secret.returnPressed.connect(self._given)
        self.initials.returnPressed.connect(self.secret.setFocus)
        self.set_theme(theme)

    def set_theme(self, theme: Theme) -> None:
        """Take another look or text size."""
        px = theme.px
        self._column.setContentsMargins(px(28), px(24), px(28), px(24))
        self._column.setSpacing(px(12))
        self._card.setFixedWidth(px(440))

    def begin(self, way: Way, person: str) -> None:
        """Ask anew."""
        self.way = way
        self._form.setRowVisible(self.initials, way is Way.PIN)
        self._form.setRowVisible(self.secret, way is not Way.NOTHING)
        word = self.tr("PIN") if way is Way.PIN else self.tr("Passphrase")
        label = self._form.labelForField(self.secret)
        if isinstance(label, QLabel):
            label.setText(word)
        self.secret.setAccessibleName(word)
        self.secret.setMaxLength(MOST_PIN if way is Way.PIN else 1_000)
        self.title.setText(self.tr("Sign in") if way is Way.PIN else self.tr("Locked"))
        self.told.setText(self._told(way))
        self.initials.setText(person if way is Way.PIN else "")
        self.secret.clear()
        self.wrong.clear()
        self.go.setEnabled(True)
        first = self.go if way is Way.NOTHING else self.secret if person or way is Way.PASSPHRASE else self.initials
        first.setFocus()

    def _told(self, way: Way) -> str:
        kept = self.tr("What was typed is kept.")
        if way is Way.PIN:
            return kept + " " + self.tr("Whoever signs in logs from now on.")
        if way is Way.PASSPHRASE:
            return kept + " " + self.tr("The store's passphrase or recovery code opens it again.")
        return kept + " " + self.tr("This store has neither people nor a passphrase: whoever is here can open it.")

    def end(self) -> None:
        """Forget what was typed here."""
        self.secret.clear()
        self.wrong.clear()

    def refuse(self, text: str) -> None:
        """Say why it does not open."""
        self.wrong.setText(text)
        self.secret.clear()
        self.go.setEnabled(True)
        self.secret.setFocus()

    def _given(self) -> None:
        if not self.go.isEnabled():
            return
        if self.way is Way.NOTHING:
            self.opened.emit()
        elif not self.secret.text() or (self.way is Way.PIN and not self.initials.text().strip()):
            self.refuse(self.tr("Fill in both.") if self.way is Way.PIN else self.tr("Type the passphrase."))
        else:
            self.go.setEnabled(False)
            if self.way is Way.PIN:
                self.pin_given.emit(self.initials.text().strip().upper(), self.secret.text())
            else:
                self.passphrase_given.emit(self.secret.text())
