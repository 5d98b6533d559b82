"""A row of answers of which one is pressed, or none yet. Nothing is answered by looking at it."""

from __future__ import annotations

from collections.abc import Sequence

from PySide6.QtCore import Qt, Signal
from PySide6.QtGui import QKeyEvent
from PySide6.QtWidgets import QPushButton, QWidget

from app.look.flow_row import FlowRow
from app.look.theme import Theme

TARGET = 36


class _Answer(QPushButton):
    """One answer. Arrow keys go to its neighbours, Space presses it, Enter is left to the form."""

    stepped = Signal(int)

    def keyPressEvent(self, event: QKeyEvent) -> None:
        ways = {Qt.Key.Key_Left: -1, Qt.Key.Key_Up: -1, Qt.Key.Key_Right: 1, Qt.Key.Key_Down: 1}
        if event.key() in ways:
            self.stepped.emit(ways[Qt.Key(event.key())])
            return
        if event.key() in (Qt.Key.Key_Return, Qt.Key.Key_Enter):
            event.ignore()
            return
        super().keyPressEvent(event)


class AnswerRow(QWidget):
    """`chosen` when the answer changed; `key` is "" while there is none. A pressed answer pressed again is taken
    back. Tab enters the row once; arrow keys move inside it."""

    chosen = Signal()

    def __init__(self, name: str, answers: Sequence[tuple[str, str]], theme: Theme) -> None:
        super().__init__()
        self.buttons: dict[str, _Answer] = {}
        row = FlowRow(self, theme.px(4))
        row.setContentsMargins(0, 0, 0, 0)
        for key, word in answers:
            button = _Answer(word)
            button.setCheckable(True)
            button.setAutoDefault(False)
            button.setProperty("role", "answer")
            button.setMinimumHeight(theme.px(TARGET))
            button.setAccessibleName(f"{name}: {word}")
            button.clicked.connect(self._pressed)
            button.stepped.connect(self._stepped)
            self.buttons[key] = button
            row.addWidget(button)
        self.setAccessibleName(name)
        self._tell_tab()

    @property
    def key(self) -> str:
        """The answer, or ""."""
        return next((key for key, button in self.buttons.items() if button.isChecked()), "")

    def choose(self, key: str) -> None:
        """Press an answer without telling; "" takes any back."""
        for other, button in self.buttons.items():
            button.setChecked(other == key)
        self._tell_tab()

    def _pressed(self) -> None:
        pressed = self.sender()
        for button in self.buttons.values():
            if button is not pressed:
                button.setChecked(False)
        self._tell_tab()
        self.chosen.emit()

    def _stepped(self, by: int) -> None:
        row = list(self.buttons.values())
        here = next((n for n, button in enumerate(row) if button is self.sender()), 0)
        row[(here + by) % len(row)].setFocus(Qt.FocusReason.TabFocusReason)

    def _tell_tab(self) -> None:
        """Tab stops at the pressed answer, else at the first: twenty questions must not be sixty stops."""
        stop = self.buttons[self.key] if self.key else next(iter(self.buttons.values()))
        for button in self.buttons.values():
            button.setFocusPolicy(Qt.FocusPolicy.StrongFocus if button is stop else Qt.FocusPolicy.ClickFocus)
        self.setFocusProxy(stop)
