"""A label that shows its text as it is: what people typed and files brought is never read as markup."""

from __future__ import annotations

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QLabel


def plain_label(text: str = "") -> QLabel:
    """A label for text that may hold what somebody typed. Left to itself Qt would look for rich text in it."""
    label = QLabel(text)
    label.setTextFormat(Qt.TextFormat.PlainText)
    return label
