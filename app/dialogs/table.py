"""A chart as a table and as text; both can be copied."""

from __future__ import annotations

from collections.abc import Sequence

from PySide6.QtCore import Qt
from PySide6.QtGui import QGuiApplication, QResizeEvent, QShowEvent
from PySide6.QtWidgets import (
    QAbstractItemView,
    QHBoxLayout,
    QPlainTextEdit,
    QPushButton,
    QTableWidget,
    QTableWidgetItem,
    QVBoxLayout,
    QWidget,
)

from app.look.copying import TableCopy
from app.look.fitted import FittedDialog, fit
from app.look.theme import Theme
from app.telling.table import Table

MOST_LINES = 4
"""Lines of a row; what is longer is told whole by its tip, in the words below and in the copy."""


class TableDialog(FittedDialog):
    """Shows one table. Ctrl+C copies the chosen rows, or all."""

    def __init__(self, table: Table, theme: Theme, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._table = table
        self.setWindowTitle(table.title)
        self.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
        self.table = QTableWidget(len(table.rows), len(table.heads))
        self.table.setAccessibleName(table.title)
        self.table.setHorizontalHeaderLabels(list(table.heads))
        self.table.horizontalHeader().setDefaultAlignment(Qt.AlignmentFlag.AlignLeft | Qt.AlignmentFlag.AlignVCenter)
        self.table.setEditTriggers(QAbstractItemView.EditTrigger.NoEditTriggers)
        self.table.setSelectionBehavior(QAbstractItemView.SelectionBehavior.SelectRows)
        self.copying = TableCopy(self.table)
        self.table.verticalHeader().hide()
        for r, row in enumerate(table.rows):
            for c, text in enumerate(row):
                cell = QTableWidgetItem(text)
                cell.setToolTip(text)
                self.table.setItem(r, c, cell)
        self.table.resizeColumnsToContents()
        self._wanted = [self.table.columnWidth(c) for c in range(self.table.columnCount())]
        self.text = QPlainTextEdit(table.text)
        self.text.setReadOnly(True)
        self.text.setAccessibleName(self.tr("In words"))
        self.text.setMaximumHeight(theme.px(150))
        self.copy = QPushButton(self.tr("Copy table"))
        self.copy_words = QPushButton(self.tr("Copy words"))
        close = QPushButton(self.tr("Close"))
        foot = QHBoxLayout()
        foot.addWidget(self.copy)
        foot.addWidget(self.copy_words)
        foot.addStretch(1)
        foot.addWidget(close)
        column = QVBoxLayout(self)
        column.addWidget(self.table, 1)
        column.addWidget(self.text)
        column.addLayout(foot)
        self.copy.clicked.connect(self.copying.copy)
        self.copy_words.clicked.connect(self._copy_words)
        close.clicked.connect(self.close)
        fit(self, theme, 1240, 700)

    def resizeEvent(self, event: QResizeEvent) -> None:
        super().resizeEvent(event)
        self._share_width()

    def showEvent(self, event: QShowEvent) -> None:
        super().showEvent(event)
        self._share_width()

    def _share_width(self) -> None:
        """Columns that do not fit share the width, and their words go on in a few more lines."""
        room = self.table.viewport().width()
        for column, width in enumerate(shared(self._wanted, room)):
            self.table.setColumnWidth(column, width)
        self.table.resizeRowsToContents()
        most = self.table.fontMetrics().lineSpacing() * MOST_LINES
        for row in range(self.table.rowCount()):
            self.table.setRowHeight(row, min(self.table.rowHeight(row), most))

    def _copy_words(self) -> None:
        QGuiApplication.clipboard().setText(self._table.text)


def shared(wanted: Sequence[int], room: int) -> list[int]:
    """Widths of columns in `room` pixels: as wanted where they fit. Else the widest, a list of happenings, gives way
    down to a fifth of the room, and the others share what is left: the narrow ones keep what they want.

    >>> shared([100, 50], 400), shared([100, 200, 900], 500), shared([100, 300, 600], 500)
    ([100, 50], [100, 200, 200], [100, 300, 100])
    """
    widths = list(wanted)
    if sum(widths) <= room or not widths:
        return widths
    widest = widths.index(max(widths))
    left, others = room - room // 5, sorted((c for c in range(len(widths)) if c != widest), key=widths.__getitem__)
    for n, column in enumerate(others):
        widths[column] = max(min(widths[column], left // (len(others) - n)), 1)
        left -= widths[column]
    widths[widest] = room - sum(w for c, w in enumerate(widths) if c != widest)
    return widths
