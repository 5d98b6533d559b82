"""The caution that never leaves the window: it stands quietly beside what the strip says, on every page."""

from __future__ import annotations

from PySide6.QtCore import QSize, Qt
from PySide6.QtWidgets import QHBoxLayout, QLabel, QSizePolicy, QWidget

from app.telling.cautions import caution_in_sight

_SHARE = 0.3
"""Of the window's width: with large text it takes two lines rather than the room of what the strip says."""


class _Caution(QLabel):
    def __init__(self) -> None:
        super().__init__(caution_in_sight())
        self.setObjectName("caution")
        self.setProperty("role", "caption")
        self.setWordWrap(True)
        self.setAlignment(Qt.AlignmentFlag.AlignRight | Qt.AlignmentFlag.AlignBottom)
        self.setSizePolicy(QSizePolicy.Policy.Fixed, QSizePolicy.Policy.Ignored)

    def sizeHint(self) -> QSize:
        line = self.fontMetrics().horizontalAdvance(self.text()) + 2
        return QSize(min(line, round(self.window().width() * _SHARE)), self.fontMetrics().height())

    def minimumSizeHint(self) -> QSize:
        return QSize(self.sizeHint().width(), 0)


def with_caution(said: QWidget) -> QHBoxLayout:
    """What the strip says, and at its right the caution in small print."""
    row = QHBoxLayout()
    row.addWidget(said, 1)
    row.addWidget(_Caution())
    return row
