"""The acid-base map of the episode in hand: the gases as a path, and beside it what each of them says."""

from __future__ import annotations

from html import escape

from PySide6.QtCore import Qt, Signal
from PySide6.QtGui import QKeyEvent, QResizeEvent
from PySide6.QtWidgets import (
    QAbstractItemView,
    QFrame,
    QHBoxLayout,
    QHeaderView,
    QLabel,
    QTableWidget,
    QTableWidgetItem,
    QVBoxLayout,
    QWidget,
)

from app.chart.acid_base_map import AcidBaseMap
from app.chart.shapes import MapGas, MapSpec
from app.episode.on_screen import EpisodeOnScreen
from app.look.copying import can_be_copied
from app.look.fitted import RollArea
from app.look.formats import day, opened, unbroken
from app.look.theme import Theme
from app.map.words import class_words, doubt_sentence, map_spec, map_table, response_words, steps_of, titled_spec
from app.telling.phrases import gas_name, gas_words
from app.telling.table import Table
from app.words import Reader
from core.figures.gas_path import PathGas

_SHOWN = (0, 1, 3, 4, 7)
"""The columns of the table that find room beside the map; all of them are in the table dialog."""
_TIME, _SITE = 1, 2
LEAST_MAP = 300
"""Pixels at 100 % that the map is high at least; where a window has less, it rolls."""
SHARE = 0.45
"""Of the page's width, that its words take at most: with large text the map keeps its room."""


class MapView(QWidget):
    """Draws the gases of an EpisodeOnScreen; sends intents and changes nothing."""

    back = Signal()
    explain_wanted = Signal(object)
    """A GasFigure."""

    def __init__(self, theme: Theme) -> None:
        super().__init__()
        self._theme = theme
        self._on: EpisodeOnScreen | None = None
        self.title = QLabel(self.tr("Acid-base map"))
        self.title.setProperty("role", "title")
        self.map = AcidBaseMap(theme)
        self.told = QLabel()
        self.told.setTextFormat(Qt.TextFormat.RichText)
        self.told.setWordWrap(True)
        self.told.setTextInteractionFlags(Qt.TextInteractionFlag.TextSelectableByMouse)
        self.table = QTableWidget(0, len(_SHOWN))
        can_be_copied(self.table)
        self.table.setAccessibleName(self.tr("Gases of the map"))
        self.table.setEditTriggers(QAbstractItemView.EditTrigger.NoEditTriggers)
        self.table.setSelectionBehavior(QAbstractItemView.SelectionBehavior.SelectRows)
        self.table.setSelectionMode(QAbstractItemView.SelectionMode.SingleSelection)
        self.table.verticalHeader().hide()
        self.table.setWordWrap(True)
        self.table.setShowGrid(False)
        self.table.horizontalHeader().setDefaultAlignment(Qt.AlignmentFlag.AlignLeft | Qt.AlignmentFlag.AlignVCenter)
        self._lay_out()
        self.map.gas_chosen.connect(self._chosen)
        self.map.gas_activated.connect(self._activated)
        self.table.itemSelectionChanged.connect(self._row_chosen)

    def _lay_out(self) -> None:
        px = self._theme.px
        self._card = QFrame()
        self._card.setProperty("card", True)
        inside = QVBoxLayout(self._card)
        inside.setContentsMargins(px(14), px(10), px(14), px(10))
        inside.addWidget(self.told)
        self._side = QWidget()
        side = QVBoxLayout(self._side)
        side.setContentsMargins(0, 0, 0, 0)
        side.setSpacing(px(8))
        side.addWidget(self._card)
        side.addWidget(self.table, 1)
        inner = QWidget()
        row = QHBoxLayout(inner)
        row.setContentsMargins(0, 0, 0, 0)
        row.setSpacing(px(12))
        row.addWidget(self.map, 1)
        row.addWidget(self._side)
        self.roll = RollArea(inner)
        column = QVBoxLayout(self)
        column.setContentsMargins(px(16), px(4), px(16), px(4))
        column.addWidget(self.title)
        column.addWidget(self.roll, 1)
        self._set_widths()

    def _set_widths(self) -> None:
        px = self._theme.px
        room = self.width() - px(32) - px(16)  # less margins, and the bar that rolls
        beside = max(min(px(470), round(room * SHARE), room - self.map.minimumSizeHint().width() - px(12)), px(180))
        self._side.setFixedWidth(beside)

        self.map.setMinimumHeight(self._theme.px(LEAST_MAP))
        self._make_room()

    def _make_room(self) -> None:
        """Classes broken to pieces tell nothing: where they have no room they stand over the table alone."""
        last = len(_SHOWN) - 1
        others = sum(self.table.sizeHintForColumn(c) for c in range(last))
        self.table.setColumnHidden(last, self._side.width() - others < self._theme.px(140))

    def resizeEvent(self, event: QResizeEvent) -> None:
        super().resizeEvent(event)
        self._set_widths()

    def set_theme(self, theme: Theme) -> None:
        """Take another look or text size."""
        self._theme = theme
        self.map.set_theme(theme)
        self._set_widths()
        if self._on is not None:
            self.show_episode(self._on)

    def show_episode(self, on: EpisodeOnScreen) -> None:
        """Show an episode's gases; the gas that was chosen stays chosen where it is still there."""
        same = self._on is not None and self._on.figures.episode == on.figures.episode
        before = self.map.chosen if same else None
        self._on = on
        reader = self._reader()
        spec = map_spec(on.figures, reader)
        self.map.set_spec(spec)
        self.roll.show()
        self.title.setText(self.tr("Acid-base map, {label}").format(label=on.figures.label))
        self._fill(map_table(on.figures, reader))
        self.map.choose(before.number if before is not None else 0)
        if self.map.chosen is None and spec.gases:
            self.map.choose(spec.gases[-1].number)
        self._tell(self.map.chosen)

    def show_nothing(self, why: str) -> None:
        """Show that there is nothing to show: what stood here before must not be taken for this moment's."""
        self._on = None
        self.title.setText(why)
        self.roll.hide()

    @property
    def on_screen(self) -> EpisodeOnScreen | None:
        """What is shown."""
        return self._on

    def picture_spec(self) -> MapSpec | None:
        """The map for a picture by itself."""
        return None if self._on is None else titled_spec(self._on.figures, self._reader())

    def as_table(self) -> Table | None:
        """The map as a table and in words."""
        return None if self._on is None else map_table(self._on.figures, self._reader())

    def _reader(self) -> Reader:
        assert self._on is not None
        return Reader(self._on.zone, self._on.gas_unit)

    def _short(self, column: int, row: tuple[str, ...]) -> str:
        """A cell as far as there is room beside the map: another day is named, and a site that is unusual."""
        if column != _TIME:
            return row[column].rstrip(".")
        date, _, time = row[_TIME].partition(" ")
        site = row[_SITE].replace(" gas", "")
        today = self._on is not None and date == day(self._on.course.until, self._on.zone)
        return "\n".join(
            part
            for part in ("" if today else date, time, "" if site == "arterial" else site.replace("arterial (", "("))
            if part
        )

    def _fill(self, table: Table) -> None:
        self.table.blockSignals(True)
        self.table.setRowCount(len(table.rows))
        self.table.setHorizontalHeaderLabels([table.heads[c] for c in _SHOWN])
        for r, row in enumerate(table.rows):
            for n, c in enumerate(_SHOWN):
                item = QTableWidgetItem(self._short(c, row))
                item.setToolTip(row[c])
                item.setData(Qt.ItemDataRole.UserRole, int(row[0]))
                self.table.setItem(r, n, item)
        header = self.table.horizontalHeader()
        header.setSectionResizeMode(QHeaderView.ResizeMode.ResizeToContents)
        header.setSectionResizeMode(len(_SHOWN) - 1, QHeaderView.ResizeMode.Stretch)
        self._make_room()
        self.table.resizeRowsToContents()
        self.table.blockSignals(False)

    # what the person does

    def _chosen(self, gas: MapGas) -> None:
        self._tell(gas)

    def _row_chosen(self) -> None:
        items = self.table.selectedItems()
        if items:
            self.map.choose(int(items[0].data(Qt.ItemDataRole.UserRole)))
            self._tell(self.map.chosen)

    def _activated(self, gas: MapGas) -> None:
        self.explain_wanted.emit(gas.payload.gas)

    def _tell(self, gas: MapGas | None) -> None:
        if gas is None:
            self.told.setText(escape(self.tr("No gas with a pH and a PCO2 has been recorded.")))
            return
        self._mark_row(gas.number)
        self.told.setText(self._html(gas.payload))

    def _mark_row(self, number: int) -> None:
        self.table.blockSignals(True)
        for r in range(self.table.rowCount()):
            item = self.table.item(r, 0)
            if item is not None and item.data(Qt.ItemDataRole.UserRole) == number:
                self.table.selectRow(r)
        self.table.blockSignals(False)

    def _html(self, p: PathGas) -> str:
        reader, theme = self._reader(), self._theme
        quiet = f"color:{theme.colours.ink_quiet}"
        head = f"{p.number}. {reader.time(p.gas.at)}, {gas_name(p.gas)}"
        parts = [f'<p style="{quiet}; margin:0">{escape(head)}</p>',
                 f'<p style="font-size:{theme.px(theme.type.emphasis)}px; font-weight:600; margin:2px 0">'
                 f"{escape(class_words(p, reader))}</p>",
                 f'<p style="margin:2px 0">{escape(unbroken(gas_words(p.gas, reader.gas_unit)))}</p>']  # fmt: skip
        if doubt := doubt_sentence(p):
            parts.append(f'<p style="margin:2px 0"><b>{escape(doubt)}</b></p>')
        parts += [f'<p style="{quiet}; margin:1px 0">{escape(unbroken(step))}</p>' for step in steps_of(p, reader)]
        if told := response_words(p, reader):
            parts.append(f'<p style="margin:4px 0 0 0"><b>{escape(unbroken(opened(told)))}</b></p>')
        return "".join(parts)

    def keyPressEvent(self, event: QKeyEvent) -> None:
        if event.key() == Qt.Key.Key_Escape:
            self.back.emit()
            return
        super().keyPressEvent(event)
