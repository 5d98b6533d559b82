"""One line that is cut with an ellipsis where it does not fit, and whole in its tool tip and for screen readers."""

from __future__ import annotations

from PySide6.QtCore import Qt
from PySide6.QtGui import QFontMetrics, QResizeEvent
from PySide6.QtWidgets import QLabel, QSizePolicy

from app.look.formats import inert


class ElidedLine(QLabel):
    """Use `say` and `whole` in place of `setText` and `text`."""

    def __init__(self) -> None:
        super().__init__()
        self._whole = ""
        self.setTextFormat(Qt.TextFormat.PlainText)  # what is said holds labels and notes
        self.setSizePolicy(QSizePolicy.Policy.Ignored, QSizePolicy.Policy.Preferred)

    def say(self, text: str) -> None:
        """Say a text."""
        self._whole = text
        self.setToolTip(inert(text))
        self.setAccessibleName(text)
        self._fit()

    def whole(self) -> str:
        """The text without the cut."""
        return self._whole

    def resizeEvent(self, event: QResizeEvent) -> None:
        super().resizeEvent(event)
        self._fit()

    def _fit(self) -> None:
        self.setText(QFontMetrics(self.font()).elidedText(self._whole, Qt.TextElideMode.ElideRight, self.width()))
