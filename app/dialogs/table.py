"""A chart as a table and as text; both can be copied."""

from __future__ import annotations

from PySide6.QtCore import Qt
from PySide6.QtGui import QGuiApplication
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

from app.copying import TableCopy
from app.fitted import FittedDialog, fit
from app.tables import Table
from app.theme import Theme


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
        self.table.setEditTriggers(QAbstractItemView.EditTrigger.NoEditTriggers)
        self.table.setSelectionBehavior(QAbstractItemView.SelectionBehavior.SelectRows)
        self.copying = TableCopy(self.table)
        self.table.verticalHeader().hide()
        for r, row in enumerate(table.rows):
            for c, text in enumerate(row):
                self.table.setItem(r, c, QTableWidgetItem(text))
        self.table.resizeColumnsToContents()
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
        fit(self, theme, 960, 600)

    def _copy_words(self) -> None:
        QGuiApplication.clipboard().setText(self._table.text)
