"""The table's columns with what each holds: name, first values, channel, unit, and what is still to be answered."""

from __future__ import annotations

from collections.abc import Sequence

from PySide6.QtCore import QEvent, QObject, Qt, Signal
from PySide6.QtWidgets import (
    QAbstractItemView,
    QComboBox,
    QHBoxLayout,
    QHeaderView,
    QTableWidget,
    QTableWidgetItem,
    QWidget,
)

from app.look.copying import can_be_copied
from app.look.formats import inert
from app.look.theme import Theme
from app.words import Reader, sentence
from core.record.channels import CHANNELS, Group, Kind
from core.record.message import Message
from storage.intake.mapping import ColumnUse
from storage.intake.proposals import unit_of

_SHOWN = 3
_LETTERS = 24
_GROUPS = (Group.GAS, Group.VITAL, Group.SETTING, Group.DEVICE, Group.EVENT, Group.PROFILE)


class NoWheel(QObject):
    """A wheel over a choice scrolls the list it stands in and changes nothing: a slip must not map a column anew."""

    def eventFilter(self, watched: QObject, event: QEvent) -> bool:
        if event.type() == QEvent.Type.Wheel and isinstance(watched, QComboBox) and not watched.hasFocus():
            event.ignore()
            return True
        return super().eventFilter(watched, event)


class ColumnTable(QTableWidget):
    """`changed(column, channel, unit)` when a person says what a column holds."""

    changed = Signal(str, str, str)

    def __init__(self, theme: Theme, reader: Reader, parent: QWidget | None = None) -> None:
        super().__init__(0, 5, parent)
        self._theme, self._reader = theme, reader
        self._still = NoWheel(self)
        can_be_copied(self)
        self._channels: list[QComboBox] = []
        self._units: list[QComboBox] = []
        self._rows: Sequence[tuple[str, Sequence[str]]] = ()
        self.setAccessibleName(self.tr("Columns of the table"))
        self.setHorizontalHeaderLabels(
            [
                self.tr("Column"),
                self.tr("First values"),
                self.tr("What it is"),
                self.tr("Unit"),
                self.tr("To answer"),
            ]
        )
        self.verticalHeader().hide()
        self.setEditTriggers(QAbstractItemView.EditTrigger.NoEditTriggers)
        self.setSelectionMode(QAbstractItemView.SelectionMode.NoSelection)
        self.setFocusPolicy(Qt.FocusPolicy.NoFocus)
        self.setShowGrid(False)
        self.setWordWrap(True)
        head = self.horizontalHeader()
        head.setDefaultAlignment(Qt.AlignmentFlag.AlignLeft | Qt.AlignmentFlag.AlignVCenter)
        for column, mode in enumerate(("Interactive", "Interactive", "Fixed", "Fixed", "Stretch")):
            head.setSectionResizeMode(column, QHeaderView.ResizeMode[mode])
        for column, width in enumerate((116, 120, 258, 136)):
            self.setColumnWidth(column, theme.px(width))
        head.sectionResized.connect(self._fit_all)

    def show_rows(
        self, rows: Sequence[tuple[str, Sequence[str]]], uses: dict[str, ColumnUse], taken: dict[str, str],
        hints: dict[str, Message], *, has_unit_column: bool = False,
    ) -> None:  # fmt: skip
        """Show columns, or a long table's words, with their first values. `taken` are used for something else."""
        self.setRowCount(0)
        self._channels, self._units, self._rows = [], [], rows
        self.setRowCount(len(rows))
        for row, (name, values) in enumerate(rows):
            first = list(dict.fromkeys(values))[: _SHOWN * 2]
            self.setItem(row, 0, QTableWidgetItem(name))
            item = QTableWidgetItem(_as_fit(first))
            item.setToolTip(inert(", ".join(first)[:400]))
            self.setItem(row, 1, item)
            use = uses.get(name, ColumnUse(name))
            channels, units = self._channel_box(name, use), QComboBox()
            units.setAccessibleName(self.tr("Unit of {column}").format(column=name))
            self._fill_units(units, use.channel, use.unit)
            for box in (channels, units):
                box.installEventFilter(self._still)
            self._channels.append(channels)
            self._units.append(units)
            self.setCellWidget(row, 2, _padded(channels))
            self.setCellWidget(row, 3, _padded(units))
            units.setVisible(not has_unit_column and bool(units.count()))
            if name in taken:
                channels.setItemText(0, taken[name])
                channels.setCurrentIndex(0)
                channels.setEnabled(False)
            if not has_unit_column:
                self.show_answer(row, use, hints.get(name))
            channels.activated.connect(self._channel_chosen)
            units.activated.connect(self._unit_chosen)
            self.setRowHeight(row, self._theme.px(50))

    def show_answer(self, row: int, use: ColumnUse, hint: Message | None) -> None:
        """Say what is still open in a row, or nothing."""
        known = CHANNELS.get(use.channel)
        is_open = known is not None and known.kind is Kind.NUMBER and len(known.units) > 1 and not use.unit
        text = self.tr("Which unit?") if is_open else ""
        if is_open and hint is not None:
            text = sentence(hint, self._reader)
        item = QTableWidgetItem(text)
        item.setForeground(self._theme.colour("accent"))
        item.setToolTip(inert(text))
        self.setItem(row, 4, item)
        self._fit(row)

    def _fit(self, row: int) -> None:
        """A row tall enough for its words."""
        self.resizeRowToContents(row)
        self.setRowHeight(row, max(self.rowHeight(row), self._theme.px(50)))

    def _fit_all(self, column: int, *_: int) -> None:
        if column == self.columnCount() - 1:
            for row in range(self.rowCount()):
                self._fit(row)

    def _channel_box(self, name: str, use: ColumnUse) -> QComboBox:
        box = QComboBox()
        box.setAccessibleName(self.tr("What {column} is").format(column=name))
        box.addItem(self.tr("left out"), "")
        fill_channels(box)
        box.setCurrentIndex(max(0, box.findData(use.channel)))
        return box

    @staticmethod
    def _fill_units(box: QComboBox, key: str, unit: str) -> None:
        box.clear()
        known = CHANNELS.get(key)
        names = [u.name for u in known.units] if known is not None and known.kind is Kind.NUMBER else []
        if len(names) > 1:
            box.addItem("?", "")
        for name in names:
            box.addItem(name, name)
        box.setCurrentIndex(max(0, box.findData(unit)))
        box.setEnabled(len(names) > 1)
        box.setVisible(bool(names))

    def _channel_chosen(self) -> None:
        row = self._channels.index(self.sender())  # type: ignore[arg-type]
        key = str(self._channels[row].currentData() or "")
        name, values = self._rows[row]
        self._fill_units(self._units[row], key, unit_of(key, name, values) if key else "")
        self._tell(row)

    def _unit_chosen(self) -> None:
        self._tell(self._units.index(self.sender()))  # type: ignore[arg-type]

    def _tell(self, row: int) -> None:
        item = self.item(row, 0)
        if item is not None:
            key, unit = self._channels[row].currentData(), self._units[row].currentData()
            self.changed.emit(item.text(), str(key or ""), str(unit or ""))

    def box_of(self, column: str, *, unit: bool = False) -> QComboBox:
        """The choice of a column's channel, or of its unit."""
        row = next(r for r in range(self.rowCount()) if (i := self.item(r, 0)) is not None and i.text() == column)
        return (self._units if unit else self._channels)[row]


def _as_fit(values: Sequence[str]) -> str:
    """As many values as fit two short lines, the first always."""
    shown = values[0][:_LETTERS] if values else ""
    for value in values[1:]:
        if len(shown) + len(value) > _LETTERS:
            return f"{shown}, \N{HORIZONTAL ELLIPSIS}"
        shown += f", {value}"
    return shown


def fill_channels(box: QComboBox) -> None:
    """Every channel, group by group."""
    for group in _GROUPS:
        for known in CHANNELS.values():
            if known.group is group:
                box.addItem(known.name, known.key)
    box.setMaxVisibleItems(24)


def _padded(box: QComboBox) -> QWidget:
    """A choice with a little room around it, so that rows do not touch."""
    holder = QWidget()
    row = QHBoxLayout(holder)
    row.setContentsMargins(4, 4, 4, 4)
    row.addWidget(box)
    return holder
