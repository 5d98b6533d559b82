"""How a table is written: encoding, delimiter, line of the header, sheet. Found by looking; what is said beats it."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from typing import TYPE_CHECKING

from PySide6.QtCore import Signal
from PySide6.QtWidgets import QBoxLayout, QComboBox, QHBoxLayout, QLabel, QSizePolicy, QSpinBox, QWidget

from app.intake_window.column_table import NoWheel
from app.look.flow_row import FlowRow
from app.look.plain_label import plain_label
from app.look.theme import Theme
from core.record.message import RecordError
from storage.intake.writing import AS_FOUND, Writing, delimiter_said

if TYPE_CHECKING:
    from storage.intake.table import Table

_OFFERED = ("utf-8", "cp1252", "iso8859-15", "latin-1", "cp437", "utf-16")
_MOST_LINES = 1_000
LARGE = 1.25
"""Size of text from which words and fields stand under each other."""


class HowWritten(QWidget):
    """`changed()` when a person says that it is written otherwise; `said` holds what was said, not what was found."""

    changed = Signal()

    def __init__(self, theme: Theme, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._filling = False
        self.said, self._delimiter = AS_FOUND, ""
        self.about = plain_label()
        self.about.setWordWrap(True)
        self.sheet, self.encoding, self.mark, self.header = QComboBox(), QComboBox(), QComboBox(), QSpinBox()
        self.mark.setEditable(True)
        self.mark.setInsertPolicy(QComboBox.InsertPolicy.NoInsert)
        self.mark.setCompleter(None)  # type: ignore[arg-type]  # a typed character is no beginning of a name
        self.mark.setToolTip(self.tr("Choose, or type the character that stands between columns"))
        self.header.setRange(1, _MOST_LINES)
        self.header.setKeyboardTracking(False)
        self.header.setButtonSymbols(QSpinBox.ButtonSymbols.NoButtons)
        self._still = NoWheel(self)
        self._pairs: dict[QWidget, QWidget] = {}
        large = theme.text_scale > LARGE
        whole = QBoxLayout(QBoxLayout.Direction.TopToBottom if large else QBoxLayout.Direction.LeftToRight, self)
        whole.setContentsMargins(0, 0, 0, 0)
        whole.setSpacing(theme.px(8))
        self.setSizePolicy(QSizePolicy.Policy.Preferred, QSizePolicy.Policy.Maximum)
        whole.addWidget(self.about, 0 if large else 1)
        row = FlowRow(None, theme.px(8)) if large else QHBoxLayout()
        whole.addLayout(row)
        if large:
            self.about.setSizePolicy(QSizePolicy.Policy.Preferred, QSizePolicy.Policy.Fixed)
        apart = self.tr("Apart by") if large else self.tr("Columns apart by")
        fields = ((self.tr("Text in"), self.encoding), (apart, self.mark),
                  (self.tr("Header on line"), self.header), (self.tr("Sheet"), self.sheet))  # fmt: skip
        for word, field in fields:
            label = QLabel(word)
            label.setProperty("role", "quiet")
            label.setBuddy(field)
            field.setAccessibleName(word)
            pair = QWidget()
            beside = QHBoxLayout(pair)
            beside.setContentsMargins(0, 0, 0, 0)
            beside.addWidget(label)
            beside.addWidget(field)
            row.addWidget(pair)
            self._pairs[field] = pair
        for box, letters in ((self.sheet, 9), (self.encoding, 9), (self.mark, 8)):
            box.setMinimumContentsLength(letters)
            box.installEventFilter(self._still)
        self.sheet.activated.connect(self._sheet_said)
        self.encoding.activated.connect(self._encoding_said)
        self.mark.activated.connect(self._mark_said)
        line = self.mark.lineEdit()
        if line is not None:
            line.editingFinished.connect(self._mark_said)
        self.header.valueChanged.connect(self._header_said)

    def show_table(self, table: Table, said: Writing) -> None:
        """Show how a table is read now, and keep what was said of it."""
        self._filling = True
        self.said = said
        d = table.dialect
        self.about.setText(self._words(table))
        _fill(self.sheet, table.sheets, d.sheet)
        _fill(self.encoding, _OFFERED if d.encoding in _OFFERED else (d.encoding, *_OFFERED), d.encoding)
        self._delimiter = d.delimiter
        self._fill_marks()
        self.header.setValue(d.header_line)
        is_text = table.book is None
        for field, matters in ((self.sheet, len(table.sheets) > 1), (self.encoding, is_text), (self.mark, is_text)):
            self._pairs[field].setVisible(matters)
        self._filling = False

    def _fill_marks(self) -> None:
        mark = self._delimiter
        names = {",": self.tr("comma"), ";": self.tr("semicolon"), "\t": self.tr("tab"), "|": self.tr("bar"),
                 " ": self.tr("space"), ":": self.tr("colon")}  # fmt: skip
        self.mark.clear()
        for key in (*names, *((mark,) if mark and mark not in names else ())):
            self.mark.addItem(names.get(key, key), key)
        self._show_mark()

    def _show_mark(self) -> None:
        index = max(0, self.mark.findData(self._delimiter))
        self.mark.setCurrentIndex(index)
        self.mark.setEditText(self.mark.itemText(index))

    def _words(self, table: Table) -> str:
        count = len(table.header)
        text = self.tr("1 column") if count == 1 else self.tr("{count} columns").format(count=count)
        if table.dialect.encoding_is_sure:
            return text
        return text + self.tr(". The encoding is assumed: look at letters with accents.")

    def _sheet_said(self) -> None:
        self._say(Writing(sheet=str(self.sheet.currentData() or "")))  # its header is found anew

    def _encoding_said(self) -> None:
        self._say(replace(self.said, encoding=str(self.encoding.currentData() or "")))

    def _header_said(self, line: int) -> None:
        self._say(replace(self.said, header_line=line))

    def _mark_said(self) -> None:
        """A delimiter was chosen or typed; one that cannot be is taken back, and why is said."""
        text = self.mark.currentText()
        known = self.mark.findText(text)
        mark, told = "", ""
        try:
            mark = str(self.mark.itemData(known)) if known >= 0 else delimiter_said(text)
        except RecordError:
            told = self.tr("Columns cannot be apart by '{text}': it takes one character that is no letter, digit or "
                           "quote.").format(text=text[:20])  # fmt: skip
        if told:
            self.about.setText(told)
        if mark and mark != self._delimiter:
            self._say(replace(self.said, delimiter=mark))
        else:
            self._show_mark()

    def _say(self, said: Writing) -> None:
        if not self._filling and said != self.said:
            self.said = said
            self.changed.emit()


def _fill(box: QComboBox, words: Sequence[str], chosen: str) -> None:
    box.clear()
    for word in words:
        box.addItem(word.upper() if word in _OFFERED else word, word)
    box.setCurrentIndex(max(0, box.findData(chosen)))
