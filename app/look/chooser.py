"""A field that offers choices."""

from __future__ import annotations

from PySide6.QtWidgets import QComboBox, QSizePolicy


class Chooser(QComboBox):
    """A combo box as wide as its row."""

    def __init__(self) -> None:
        super().__init__()
        self.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Fixed)
