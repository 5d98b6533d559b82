"""The page that stands before everything while the window is locked. It names no patient and no store."""

from __future__ import annotations

import math
import time
from enum import StrEnum

from PySide6.QtCore import Qt, QTimer, Signal
from PySide6.QtGui import QKeyEvent, QMouseEvent
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

from app.dialogs.asking import label_beside
from app.look.theme import Theme
from storage.people import MOST_INITIALS, MOST_PIN


class Way(StrEnum):
    """What opens the window again."""

    PIN = "pin"
    PASSPHRASE = "passphrase"
    NOTHING = "nothing"


class Why(StrEnum):
    """Why the page stands there."""

    BEGIN = "begin"
    ASKED = "asked"
    IDLE = "idle"
    CHANGE = "change"


class LockPage(QWidget):
    """Asks for what the store has: initials and PIN, else its passphrase, else for a press of a button."""

    pin_given = Signal(str, str)
    passphrase_given = Signal(str)
    opened = Signal()
    code_wanted = Signal()
    """Nobody here has a PIN that fits: the recovery code shall do."""

    def __init__(self, theme: Theme) -> None:
        super().__init__()
        self.way = Way.NOTHING
        self._card = QFrame()
        self._card.setProperty("card", True)
        self.title = QLabel()
        self.title.setProperty("role", "title")
        self.told = _wrapped()
        self.wrong = _wrapped()
        self.wrong.setProperty("role", "strong")
        self.initials, self.secret = QLineEdit(), QLineEdit()
        self.go = QPushButton(self.tr("Open"))
        self.go.setProperty("role", "primary")
        self.by_code = QPushButton(self.tr("No PIN, or forgotten..."))
        self.by_code.setProperty("role", "plain")
        self._wait = QTimer(self)
        self._wait.setInterval(1_000)
        self._wait.timeout.connect(self._count_down)
        self._until, self._wait_words = 0.0, ""
        self._form, self._column = self._made_form(), QVBoxLayout(self._card)
        self._lay_out()
        self.go.clicked.connect(self._given)
        self.by_code.clicked.connect(self.code_wanted)
        self.secret.returnPressed.connect(self._given)
        self.initials.returnPressed.connect(self.secret.setFocus)
        self.set_theme(theme)

    def _made_form(self) -> QFormLayout:
        self.initials.setMaxLength(MOST_INITIALS)
        self.secret.setEchoMode(QLineEdit.EchoMode.Password)
        form = QFormLayout()
        form.setLabelAlignment(Qt.AlignmentFlag.AlignLeft | Qt.AlignmentFlag.AlignVCenter)
        for word, line in ((self.tr("Initials"), self.initials), (self.tr("PIN"), self.secret)):
            form.addRow(label_beside(word, line), line)
            line.setAccessibleName(word)
        return form

    def _lay_out(self) -> None:
        """A card in the middle of the page."""
        for part in (self.title, self.told):
            self._column.addWidget(part)
        self._column.addLayout(self._form)
        self._column.addWidget(self.wrong)
        foot = QHBoxLayout()
        foot.addWidget(self.by_code)
        foot.addStretch(1)
        foot.addWidget(self.go)
        self._column.addLayout(foot)
        middle = QHBoxLayout()
        middle.addStretch(1)
        middle.addWidget(self._card)
        middle.addStretch(1)
        outer = QVBoxLayout(self)
        outer.addStretch(1)
        outer.addLayout(middle)
        outer.addStretch(1)

    def set_theme(self, theme: Theme) -> None:
        """Take another look or text size."""
        px = theme.px
        self._column.setContentsMargins(px(28), px(24), px(28), px(24))
        self._column.setSpacing(px(12))
        self._card.setFixedWidth(px(440))

    def begin(
        self, way: Way, person: str, why: Why = Why.ASKED, *, minutes: int = 0, has_code: bool = False, more: str = ""
    ) -> None:
        """Ask anew. `minutes` without a key or the mouse locked it; `has_code`: the recovery code gives a PIN; `more`
        is told beside."""
        self.way = way
        self._wait.stop()
        self._form.setRowVisible(self.initials, way is Way.PIN)
        self._form.setRowVisible(self.secret, way is not Way.NOTHING)
        word = self.tr("PIN") if way is Way.PIN else self.tr("Passphrase")
        label = self._form.labelForField(self.secret)
        if isinstance(label, QLabel):
            label.setText(word)
        self.secret.setAccessibleName(word)
        self.secret.setMaxLength(MOST_PIN if way is Way.PIN else 1_000)
        signs_in = way is Way.PIN and why in (Why.BEGIN, Why.CHANGE)
        hidden = self.tr("Screen hidden") if way is Way.NOTHING else self.tr("Locked")
        self.title.setText(self.tr("Sign in") if signs_in else hidden)
        self.told.setText(" ".join(t for t in (self._why_words(why, minutes), self._way_words(way), more) if t))
        self.by_code.setVisible(way is Way.PIN and has_code)
        self.initials.setText(person if way is Way.PIN else "")
        self.secret.clear()
        self.wrong.clear()
        self._allow(True)
        first = self.go if way is Way.NOTHING else self.secret if person or way is Way.PASSPHRASE else self.initials
        first.setFocus()

    def _why_words(self, why: Why, minutes: int) -> str:
        if why is Why.IDLE:
            told = self.tr("Nobody touched key or mouse for {minutes} min. What was typed is kept.")
            return told.format(minutes=minutes)
        return "" if why is Why.BEGIN else self.tr("What was typed is kept.")

    def _way_words(self, way: Way) -> str:
        if way is Way.PIN:
            return self.tr("Whoever signs in logs from now on.")
        if way is Way.PASSPHRASE:
            return self.tr("The store's passphrase or recovery code opens it again.")
        return self.tr(
            "No sign-in is set up (this store has neither people nor a passphrase): any key or a click shows the "
            "screen again, to whoever is here."
        )

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Where nobody signs in, any key shows the screen again; it does nothing else."""
        if self.way is Way.NOTHING:
            self.opened.emit()
        else:
            super().keyPressEvent(event)

    def mousePressEvent(self, event: QMouseEvent) -> None:
        """The same for a click anywhere."""
        if self.way is Way.NOTHING:
            self.opened.emit()
        else:
            super().mousePressEvent(event)

    def end(self) -> None:
        """Forget what was typed here."""
        self._wait.stop()
        self.secret.clear()
        self.wrong.clear()

    def refuse(self, text: str) -> None:
        """Say why it does not open."""
        self.wrong.setText(text)
        self.secret.clear()
        self._allow(True)
        self.secret.setFocus()

    def refuse_for(self, text: str, seconds: int) -> None:
        """Say why it does not open yet, and count the seconds down; `text` has a place for them."""
        self.refuse(text.format(seconds=seconds))
        self._until, self._wait_words = time.monotonic() + seconds, text
        self._allow(False)
        self._wait.start()

    def _count_down(self) -> None:
        left = math.ceil(self._until - time.monotonic())
        if left > 0:
            self.wrong.setText(self._wait_words.format(seconds=left))
        else:
            self._wait.stop()
            self.refuse("")

    def _allow(self, allowed: bool) -> None:
        self.go.setEnabled(allowed)
        self.secret.setEnabled(allowed)

    def _given(self) -> None:
        if not self.go.isEnabled():
            return
        if self.way is Way.NOTHING:
            self.opened.emit()
        elif not self.secret.text() or (self.way is Way.PIN and not self.initials.text().strip()):
            self.refuse(self.tr("Fill in both.") if self.way is Way.PIN else self.tr("Type the passphrase."))
        else:
            self.go.setEnabled(False)
            self.wrong.setText(self.tr("One moment..."))
            if self.way is Way.PIN:
                self.pin_given.emit(self.initials.text().strip().upper(), self.secret.text())
            else:
                self.passphrase_given.emit(self.secret.text())


def _wrapped() -> QLabel:
    """A text of one or more lines, never markup."""
    label = QLabel()
    label.setWordWrap(True)
    label.setTextFormat(Qt.TextFormat.PlainText)
    return label
