"""Where an episode is searched: Enter takes the first that is found, Esc shows all again."""

from __future__ import annotations

from PySide6.QtCore import Qt, Signal
from PySide6.QtGui import QKeyEvent
from PySide6.QtWidgets import QLineEdit


class SearchField(QLineEdit):
    """`left` when Esc emptied it."""

    left = Signal()

    def __init__(self) -> None:
        super().__init__()
        self.setPlaceholderText(self.tr("Find a bed"))
        self.setAccessibleName(self.tr("Find an episode by bed, place or indication"))
        self.setClearButtonEnabled(True)

    def keyPressEvent(self, event: QKeyEvent) -> None:
        if event.key() == Qt.Key.Key_Escape:
            self.clear()
            self.left.emit()
            return
        super().keyPressEvent(event)
