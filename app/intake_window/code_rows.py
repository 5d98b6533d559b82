"""Codes of a sender's own that are no quantity of the log yet: a person says which each is, once, and it is kept."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

from PySide6.QtCore import Signal
from PySide6.QtWidgets import QComboBox, QGridLayout, QPushButton, QWidget

from app.intake_window.column_table import NoWheel, fill_channels
from app.look import formats
from app.look.emptied import emptied
from app.look.plain_label import plain_label
from app.look.theme import Theme
from storage.codes import LOINC

if TYPE_CHECKING:
    from storage.intake.findings import UnknownCode

MOST = 6
"""Codes asked for at a time; the next ones follow when these are answered."""
_OPEN = "?"
_SYSTEMS = {LOINC: "LOINC", "http://snomed.info/sct": "SNOMED CT"}
_SHORT = 12
"""Letters of a system's name that are shown; a longer one stands in the tip."""


class CodeRows(QWidget):
    """`said(answers)` when a person has said what codes are: channels by code, an empty text for one not wanted.

    Nothing is chosen beforehand, and a code left at the question mark stays aside and is asked about again.
    """

    said = Signal(object)

    def __init__(self, theme: Theme, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._grid = QGridLayout(self)
        self._grid.setContentsMargins(0, 0, 0, 0)
        self._grid.setHorizontalSpacing(theme.px(12))
        self._grid.setVerticalSpacing(theme.px(4))
        self._grid.setColumnStretch(1, 1)
        self._still = NoWheel(self)
        self.boxes: dict[str, QComboBox] = {}
        self.keep = QPushButton()
        self.hide()

    def show_unknown(self, codes: Sequence[UnknownCode]) -> None:
        """Ask for codes; none hides the rows. What was chosen and not kept yet stays chosen."""
        before = self.answers
        emptied(self._grid)
        self.boxes = {}
        self.setVisible(bool(codes))
        if not codes:
            return
        shown = list(codes)[:MOST]
        head = plain_label(self._head(len(codes) - len(shown)))
        head.setProperty("role", "emphasis")
        self._grid.addWidget(head, 0, 0, 1, 3)
        for row, code in enumerate(shown, 1):
            self._add(row, code)
        self.keep = QPushButton(self.tr("Keep what is said and read again"))
        self.keep.setProperty("role", "small")
        self.keep.setEnabled(False)
        self.keep.clicked.connect(self._tell)
        none = QPushButton(self.tr("None of them is wanted"))
        none.setProperty("role", "small")
        none.clicked.connect(self._want_none)
        for key in before.keys() & self.boxes.keys():
            self.boxes[key].setCurrentIndex(self.boxes[key].findData(before[key]))
        self._answered()
        self._grid.addWidget(none, len(shown) + 1, 1)
        self._grid.addWidget(self.keep, len(shown) + 1, 2)

    def _head(self, more: int) -> str:
        text = self.tr("Codes that this log does not know. What is each?")
        return text + self.tr(" {count} more follow.").format(count=more) if more else text

    def _add(self, row: int, code: UnknownCode) -> None:
        system, mark, plain = code.key.rpartition("|")
        told = f"{_SYSTEMS.get(system, system if len(system) <= _SHORT else '')} {plain}".strip() if mark else plain
        name = plain_label(f"{code.name} ({told})" if code.name not in (told, plain) else told)
        name.setToolTip(formats.inert(code.key))
        name.setWordWrap(True)
        sent = formats.with_unit(code.example, code.unit)
        text = self.tr("e.g. {value}, sent once") if code.count == 1 else self.tr("e.g. {value}, sent {count} times")
        example = plain_label(text.format(value=sent or "-", count=code.count))
        example.setProperty("role", "quiet")
        box = QComboBox()
        box.setAccessibleName(self.tr("What {code} is").format(code=code.name or code.key))
        box.addItem(_OPEN, _OPEN)
        box.addItem(self.tr("not wanted"), "")
        fill_channels(box)
        box.setMinimumContentsLength(20)
        box.installEventFilter(self._still)
        box.activated.connect(self._answered)
        for column, widget in enumerate((name, example, box)):
            self._grid.addWidget(widget, row, column)
        self.boxes[code.key] = box

    def _want_none(self) -> None:
        """Every code that is shown is set to 'not wanted'; it still has to be kept by a press."""
        for box in self.boxes.values():
            box.setCurrentIndex(box.findData(""))
        self._answered()

    @property
    def answers(self) -> dict[str, str]:
        """What a person has said so far."""
        found = {key: str(box.currentData()) for key, box in self.boxes.items()}
        return {key: channel for key, channel in found.items() if channel != _OPEN}

    def _answered(self) -> None:
        self.keep.setEnabled(bool(self.answers))

    def _tell(self) -> None:
        if self.answers:
            self.said.emit(self.answers)
