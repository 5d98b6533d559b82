"""Identifiers of patients, and names in a table's own column, whose episode is not known: a person says each once."""

from __future__ import annotations

from collections.abc import Mapping, Sequence

from PySide6.QtCore import Signal
from PySide6.QtWidgets import QComboBox, QGridLayout, QLabel, QPushButton, QWidget

from app.intake_window.episode_choices import choices, chosen_or_typed
from app.look.emptied import emptied
from app.look.plain_label import plain_label
from app.look.theme import Theme

MOST = 8
"""Identifiers asked for at a time; the next ones follow when these are answered."""


class PatientRows(QWidget):
    """`said(identifier, episode)` when a person says whose an identifier is."""

    said = Signal(str, str)
    nothing_said = Signal()
    """Confirmed with no episode chosen."""

    def __init__(self, theme: Theme, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._grid = QGridLayout(self)
        self._grid.setContentsMargins(0, 0, 0, 0)
        self._grid.setHorizontalSpacing(theme.px(8))
        self._grid.setColumnStretch(1, 1)
        self.boxes: dict[str, QComboBox] = {}
        self.buttons: dict[str, QPushButton] = {}
        self.hide()

    def show_unknown(
        self, identifiers: Sequence[str], episodes: Mapping[str, str], *, of_table: bool = False
    ) -> None:
        """Ask for identifiers, or for the names of a table's column; none hides the rows. Nothing is chosen but what
        a person chose here before and has not confirmed."""
        before = {text: box.currentText() for text, box in self.boxes.items()}
        emptied(self._grid)
        self.boxes, self.buttons = {}, {}
        for row, text in enumerate(identifiers[:MOST]):
            asked = self.tr("'{name}' in this file is") if of_table else self.tr("Patient {identifier} is")
            self._add(row, text, plain_label(asked.format(name=text, identifier=text)), episodes)
        for text in before.keys() & self.boxes.keys():
            self.boxes[text].setCurrentIndex(max(self.boxes[text].findText(before[text]), 0))
            self.boxes[text].setEditText(before[text])
        self.setVisible(bool(identifiers))

    def _add(self, row: int, text: str, label: QLabel, episodes: Mapping[str, str]) -> None:
        box, button = QComboBox(), QPushButton(self.tr("Confirm"))
        box.setEditable(True)
        box.setInsertPolicy(QComboBox.InsertPolicy.NoInsert)
        box.setAccessibleName(label.text())
        for word, key in (("", ""), *choices(episodes)):
            box.addItem(word, key)
        line = box.lineEdit()
        if line is not None:
            line.setPlaceholderText(self.tr("an episode"))
        button.setProperty("role", "small")
        button.clicked.connect(self._confirm)
        for column, widget in enumerate((label, box, button)):
            self._grid.addWidget(widget, row, column)
        self.boxes[text], self.buttons[text] = box, button

    def _confirm(self) -> None:
        text = next(t for t, b in self.buttons.items() if b is self.sender())
        episode = chosen_or_typed(self.boxes[text])
        if episode:
            self.said.emit(text, episode)
        else:
            self.boxes[text].setFocus()
            self.nothing_said.emit()
