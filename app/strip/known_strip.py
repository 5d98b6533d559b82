"""The strip for looking back: which moment is shown as it was known then, how to move, and what came later.

It stands under the menu for as long as the window is not live, so that nobody takes an old night for this one.
"""

from __future__ import annotations

from PySide6.QtCore import Signal
from PySide6.QtWidgets import QFrame, QHBoxLayout, QLineEdit, QPushButton

from app.look.formats import wall
from app.look.plain_label import plain_label
from app.look.theme import Theme
from app.session.state import Session


class KnownStrip(QFrame):
    """Shows the moment and asks for others; it computes none."""

    step_wanted = Signal(int)
    """So many minutes on, or back."""
    recording_wanted = Signal(int)
    """The next moment at which anything was recorded (1), or the one before (-1)."""
    moment_typed = Signal(str)
    live_wanted = Signal()
    later_wanted = Signal()

    def __init__(self, theme: Theme) -> None:
        super().__init__()
        self._theme = theme
        self.setProperty("banner", True)
        self.said = plain_label()
        self.said.setProperty("role", "emphasis")
        self.note = plain_label()
        self.note.setProperty("role", "quiet")
        minus, plus = "\N{MINUS SIGN}15 min", "+15 min"
        self.entry_back = self._button(self.tr("Recording before"), self.tr("The recording before"), "Alt+Shift+Left")
        self.back = self._button(minus, self.tr("15 minutes back"), "Alt+Left")
        self.forward = self._button(plus, self.tr("15 minutes on"), "Alt+Right")
        self.entry_forward = self._button(
            self.tr("Recording after"), self.tr("The recording after"), "Alt+Shift+Right"
        )
        self.later = self._button("", self.tr("Late entries and later corrections"), "Ctrl+Shift+L")
        self.now = self._button(self.tr("Now"), self.tr("Back to now"), "Alt+Home")
        self.typed = QLineEdit()
        self.typed.setPlaceholderText("02:40")
        self.typed.setAccessibleName(self.tr("Look at this time of day"))
        self._lay_out()
        self._connect()
        self.set_theme(theme)
        self.hide()

    def _button(self, word: str, meaning: str, keys: str) -> QPushButton:
        button = QPushButton(word)
        button.setProperty("role", "small")
        button.setToolTip(f"{meaning} ({keys})")
        button.setAccessibleName(meaning)
        return button

    def _lay_out(self) -> None:
        self._row = QHBoxLayout(self)
        self._row.addWidget(self.said)
        self._row.addWidget(self.note)
        self._row.addStretch(1)
        for button in (self.later, self.entry_back, self.back):
            self._row.addWidget(button)
        self._row.addWidget(self.typed)
        for button in (self.forward, self.entry_forward, self.now):
            self._row.addWidget(button)

    def _connect(self) -> None:
        self.back.clicked.connect(self._back)
        self.forward.clicked.connect(self._forward)
        self.entry_back.clicked.connect(self._entry_back)
        self.entry_forward.clicked.connect(self._entry_forward)
        self.typed.returnPressed.connect(self._typed)
        self.now.clicked.connect(self.live_wanted)
        self.later.clicked.connect(self.later_wanted)

    def set_theme(self, theme: Theme) -> None:
        """Take another look or text size."""
        self._theme = theme
        px = theme.px
        self._row.setContentsMargins(px(16), px(4), px(12), px(4))
        self._row.setSpacing(px(6))
        self.typed.setFixedWidth(px(76))

    def show_session(self, session: Session) -> None:
        """Show the moment that is looked at; out of sight while the window is live."""
        self.setVisible(not session.is_live)
        if session.as_known_at is None:
            at = session.moment()
            text = self.tr("As of {time}, with all that was recorded since").format(time=wall(at, session.zone))
        else:
            text = self.tr("As known at {time}").format(time=wall(session.as_known_at, session.zone))
        self.said.setText(text)
        self.setAccessibleName(text)
        self.typed.clear()
        self.note.clear()

    def show_later(self, count: int) -> None:
        """Say how many values came later."""
        self.later.setText(self.tr("Came later: {count}").format(count=count))
        self.later.setAccessibleName(self.later.text())
        self.later.setEnabled(bool(count))

    def say(self, text: str) -> None:
        """Say why a typed time cannot be looked at."""
        self.note.setText(text)

    def _back(self) -> None:
        self.step_wanted.emit(-15)

    def _forward(self) -> None:
        self.step_wanted.emit(15)

    def _entry_back(self) -> None:
        self.recording_wanted.emit(-1)

    def _entry_forward(self) -> None:
        self.recording_wanted.emit(1)

    def _typed(self) -> None:
        self.moment_typed.emit(self.typed.text())
