"""The first rows as they will be recorded: value by value, refused and doubtful ones marked by sign and word."""

from __future__ import annotations

from dataclasses import replace

from PySide6.QtWidgets import QAbstractItemView, QTableWidget, QTableWidgetItem, QWidget

from app.look import formats
from app.look.copying import can_be_copied
from app.look.theme import Theme
from app.words import Reader, sentence
from core.record.channels import CHANNELS, Kind
from core.record.instant import SECOND
from storage.intake.table_preview import PreviewCell, PreviewRow

_REFUSED, _DOUBTFUL = "\N{MULTIPLICATION SIGN} ", "? "


class PreviewTable(QTableWidget):
    """Read only; a cell's tip says why it is refused or in doubt."""

    def __init__(self, theme: Theme, reader: Reader, parent: QWidget | None = None) -> None:
        super().__init__(0, 0, parent)
        self._theme = theme
        self._reader = replace(reader, near=None)  # a file is of any day: dates are always told
        self.setAccessibleName(self.tr("The first rows as they will be recorded"))
        self.verticalHeader().hide()
        can_be_copied(self)
        self.setEditTriggers(QAbstractItemView.EditTrigger.NoEditTriggers)
        self.setSelectionBehavior(QAbstractItemView.SelectionBehavior.SelectRows)

    def show_rows(self, rows: tuple[PreviewRow, ...]) -> None:
        """Show rows; their first one tells the columns."""
        channels = list(dict.fromkeys(c.channel for row in rows for c in row.cells))
        heads = [self.tr("Line"), self.tr("Time"), self.tr("Episode"), *(CHANNELS[k].name for k in channels)]
        self.setColumnCount(len(heads))
        self.setRowCount(len(rows))
        self.setHorizontalHeaderLabels(heads)
        for r, row in enumerate(rows):
            self.setItem(r, 0, QTableWidgetItem(str(row.line)))
            self.setItem(r, 1, self._time(row))
            self.setItem(r, 2, QTableWidgetItem(row.episode or "?"))
            found = {c.channel: c for c in row.cells}
            for c, key in enumerate(channels, 3):
                self.setItem(r, c, self._cell(found[key]) if key in found else QTableWidgetItem(""))
            self.setRowHeight(r, self._theme.px(30))
        self.resizeColumnsToContents()

    def _time(self, row: PreviewRow) -> QTableWidgetItem:
        if row.at is not None:
            seconds = row.at // SECOND % 60
            return QTableWidgetItem(self._reader.time(row.at) + (f":{seconds:02d}" if seconds else ""))
        item = QTableWidgetItem(_REFUSED + row.at_raw if row.at_problem is not None else f"? {row.at_raw}")
        if row.at_problem is not None:
            item.setToolTip(formats.inert(sentence(row.at_problem, self._reader)))
        return item

    def _cell(self, cell: PreviewCell) -> QTableWidgetItem:
        if cell.reading is None and cell.problem is None:
            return QTableWidgetItem("")
        if cell.reading is None:
            is_open = cell.problem is not None and cell.problem.key == "mapping.unit"
            item = QTableWidgetItem((_DOUBTFUL if is_open else _REFUSED) + cell.raw)
        else:
            text = self._value(cell)
            item = QTableWidgetItem(_DOUBTFUL + text if cell.problem is not None else text)
        if cell.problem is not None:
            item.setToolTip(formats.inert(sentence(cell.problem, self._reader)))
            item.setForeground(self._theme.colour("accent"))
        return item

    def _value(self, cell: PreviewCell) -> str:
        """The value as typed with its unit, and in the unit it is kept in where that is another."""
        reading = cell.reading
        if reading is None or reading.number is None:
            return "" if reading is None else reading.words or self.tr("yes")
        known = CHANNELS[cell.channel]
        if known.kind is Kind.INSTANT:
            return self._reader.time(int(reading.number))
        typed = reading.raw.replace(",", ".")
        if known.unit == "fraction":
            return formats.fraction(reading.number)
        shown = formats.as_typed(typed, reading.raw_unit)
        if reading.raw_unit == known.unit:
            return shown
        kept = formats.with_unit(formats.fixed(reading.number, known.decimals), formats.shown_unit(known.key))
        return f"{shown} = {kept}"
