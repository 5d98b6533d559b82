"""A row of buttons of which exactly one is pressed, with a quiet word before them."""

from __future__ import annotations

from collections.abc import Sequence

from PySide6.QtCore import Qt, Signal
from PySide6.QtWidgets import (
    QAbstractButton,
    QButtonGroup,
    QHBoxLayout,
    QLabel,
    QSizePolicy,
    QToolButton,
    QWidget,
)


class ChoiceRow(QWidget):
    """`chosen(key)` when a person presses another button. Keys are plain texts, in the order given. `tight`: for
    the top line, where every pixel counts."""

    chosen = Signal(str)

    def __init__(self, heading: str, choices: Sequence[tuple[str, str]], *, tight: bool = False) -> None:
        super().__init__()
        self._group = QButtonGroup(self)
        self._group.setExclusive(True)
        self._keys: list[str] = []
        row = QHBoxLayout(self)
        row.setContentsMargins(0, 0, 0, 0)
        row.setSpacing(0 if tight else 4)
        if heading:
            label = QLabel(heading)
            label.setProperty("role", "quiet")
            row.addWidget(label)
        for number, (key, word) in enumerate(choices):
            button = QToolButton()
            button.setText(word)
            button.setCheckable(True)
            button.setProperty("role", "tab" if tight else "choice")
            button.setAccessibleName(f"{heading} {word}".strip())
            button.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
            self._group.addButton(button, number)
            self._keys.append(key)
            row.addWidget(button)
        self._group.button(0).setChecked(True)
        self._group.idClicked.connect(self._clicked)
        self.setSizePolicy(QSizePolicy.Policy.Maximum, QSizePolicy.Policy.Fixed)

    @property
    def key(self) -> str:
        """The key of the pressed button."""
        return self._keys[self._group.checkedId()]

    def choose(self, key: str) -> None:
        """Press the button of that key, without telling."""
        self._group.button(self._keys.index(key)).setChecked(True)

    def button(self, key: str) -> QAbstractButton:
        """The button of a key."""
        return self._group.button(self._keys.index(key))

    def _clicked(self, number: int) -> None:
        self.chosen.emit(self._keys[number])
