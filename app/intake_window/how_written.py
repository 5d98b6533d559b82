"""How a table is written: encoding, line of the header, sheet. Found by looking; what a person says beats it."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

from PySide6.QtCore import Signal
from PySide6.QtWidgets import QBoxLayout, QComboBox, QHBoxLayout, QLabel, QSpinBox, QWidget

from app.intake_window.column_table import NoWheel
from app.look.flow_row import FlowRow
from app.look.plain_label import plain_label
from app.look.theme import Theme

if TYPE_CHECKING:
    from storage.intake.table import Table

_OFFERED = ("utf-8", "cp1252", "iso8859-15", "latin-1", "cp437", "utf-16")
_MOST_LINES = 1_000
LARGE = 1.25
"""Size of text from which words and fields stand under each other."""


class HowWritten(QWidget):
    """`changed()` when a person says that it is written otherwise."""

    changed = Signal()

    def __init__(self, theme: Theme, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._filling = False
        self.about = plain_label()
        self.about.setWordWrap(True)
        self.sheet, self.encoding, self.header = QComboBox(), QComboBox(), QSpinBox()
        self.header.setRange(1, _MOST_LINES)
        self.header.setKeyboardTracking(False)
        self.header.setButtonSymbols(QSpinBox.ButtonSymbols.NoButtons)
        self._still = NoWheel(self)
        self._labels: dict[QWidget, QLabel] = {}
        large = theme.text_scale > LARGE
        whole = QBoxLayout(QBoxLayout.Direction.TopToBottom if large else QBoxLayout.Direction.LeftToRight, self)
        whole.setContentsMargins(0, 0, 0, 0)
        whole.setSpacing(theme.px(8))
        whole.addWidget(self.about, 0 if large else 1)
        row = FlowRow(None, theme.px(8)) if large else QHBoxLayout()
        whole.addLayout(row)
        fields = ((self.tr("Text in"), self.encoding), (self.tr("Header on line"), self.header),
                  (self.tr("Sheet"), self.sheet))  # fmt: skip
        for word, field in fields:
            label = QLabel(word)
            label.setProperty("role", "quiet")
            label.setBuddy(field)
            field.setAccessibleName(word)
            self._labels[field] = label
            row.addWidget(label)
            row.addWidget(field)
        for box in (self.sheet, self.encoding):
            box.setMinimumContentsLength(9)
            box.installEventFilter(self._still)
            box.activated.connect(self._tell)
        self.header.valueChanged.connect(self._tell)

    def show_table(self, table: Table) -> None:
        """Show how a table is read now."""
        self._filling = True
        d = table.dialect
        self.about.setText(self._words(table))
        _fill(self.sheet, table.sheets, d.sheet)
        _fill(self.encoding, _OFFERED if d.encoding in _OFFERED else (d.encoding, *_OFFERED), d.encoding)
        self.header.setValue(d.header_line)
        for field, matters in ((self.sheet, len(table.sheets) > 1), (self.encoding, table.book is None)):
            field.setVisible(matters)
            self._labels[field].setVisible(matters)
        self._filling = False

    def _words(self, table: Table) -> str:
        d, count = table.dialect, len(table.header)
        if table.book is not None:
            return self.tr("{count} columns").format(count=count)
        marks = {",": self.tr("comma"), ";": self.tr("semicolon"), "\t": self.tr("tab"), "|": self.tr("bar")}
        text = self.tr("{count} columns apart by {mark}").format(count=count, mark=marks[d.delimiter])
        if d.encoding_is_sure:
            return text
        return text + self.tr(". The encoding is assumed: look at letters with accents.")

    @property
    def said(self) -> tuple[str, str, int]:
        """Sheet, encoding (empty for a spreadsheet) and line of the header as they stand."""
        encoding = str(self.encoding.currentData() or "") if self.encoding.isVisibleTo(self) else ""
        return str(self.sheet.currentData() or ""), encoding, self.header.value()

    def _tell(self) -> None:
        if not self._filling:
            self.changed.emit()


def _fill(box: QComboBox, words: Sequence[str], chosen: str) -> None:
    box.clear()
    for word in words:
        box.addItem(word.upper() if word in _OFFERED else word, word)
    box.setCurrentIndex(max(0, box.findData(chosen)))
