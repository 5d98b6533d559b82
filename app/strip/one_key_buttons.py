"""The buttons beside the log strip: what is said by one key, each with its key written on it."""

from __future__ import annotations

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QHBoxLayout, QPushButton, QWidget

GAS_SENT, MASK, CHECKED, TOLD = "gas sent", "mask", "checked no change", "told"


class OneKeyButtons(QWidget):
    """`by_key` holds them; the one of the mask says what it would do."""

    def __init__(self) -> None:
        super().__init__()
        self.by_key: dict[str, QPushButton] = {}
        self._row = QHBoxLayout(self)
        self._row.setContentsMargins(0, 0, 0, 0)
        for key, word, shortcut in (
            (GAS_SENT, self.tr("Gas sent"), "F6"),
            (MASK, self.tr("Mask off"), "F7"),
            (CHECKED, self.tr("Checked, no change"), "F8"),
            (TOLD, self.tr("Told"), "F9"),
        ):
            button = QPushButton(f"{word}  {shortcut}")
            button.setAccessibleName(word)
            button.setProperty("role", "small")
            button.setFocusPolicy(Qt.FocusPolicy.TabFocus)
            self.by_key[key] = button
            self._row.addWidget(button)
        self._row.addStretch(0)

    def say_mask(self, *, off: bool) -> None:
        """The mask is off, or on: the button says what comes next."""
        word = self.tr("Mask on") if off else self.tr("Mask off")
        self.by_key[MASK].setText(f"{word}  F7")
        self.by_key[MASK].setAccessibleName(word)

    def needed(self) -> int:
        """The width in pixels that all of them need side by side."""
        buttons = self.by_key.values()
        return sum(b.sizeHint().width() for b in buttons) + self._row.spacing() * (len(self.by_key) - 1)
