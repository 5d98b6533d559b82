"""The closed handovers: each as it was printed, to be opened or copied, never changed."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

from PySide6.QtCore import Qt, Signal
from PySide6.QtWidgets import (
    QAbstractItemView,
    QHBoxLayout,
    QHeaderView,
    QLabel,
    QPushButton,
    QTableWidget,
    QTableWidgetItem,
    QVBoxLayout,
    QWidget,
)

from app.look.copying import can_be_copied
from app.look.fitted import FittedDialog, fit
from app.look.formats import wall
from app.look.theme import Theme

if TYPE_CHECKING:
    from storage.documents import DocumentFacts


class ClosedHandoversDialog(FittedDialog):
    """Lists them, the newest first. `open_wanted` and `copy_wanted` carry a DocumentFacts."""

    open_wanted = Signal(object)
    copy_wanted = Signal(object)

    def __init__(
        self, found: Sequence[DocumentFacts], zone: str, theme: Theme, parent: QWidget | None = None
    ) -> None:
        super().__init__(parent)
        self._found = found
        self.setWindowTitle(self.tr("Closed handovers"))
        self.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
        heads = [self.tr("Handover"), self.tr("Closed"), self.tr("By"), self.tr("Ledger"), self.tr("SHA-256")]
        self.table = QTableWidget(len(found), len(heads))
        can_be_copied(self.table)
        self.table.setAccessibleName(self.tr("Closed handovers"))
        self.table.setHorizontalHeaderLabels(heads)
        self.table.horizontalHeader().setDefaultAlignment(Qt.AlignmentFlag.AlignLeft | Qt.AlignmentFlag.AlignVCenter)
        self.table.setEditTriggers(QAbstractItemView.EditTrigger.NoEditTriggers)
        self.table.setSelectionBehavior(QAbstractItemView.SelectionBehavior.SelectRows)
        self.table.setSelectionMode(QAbstractItemView.SelectionMode.SingleSelection)
        self.table.verticalHeader().hide()
        for r, d in enumerate(found):
            for c, text in enumerate((d.name, wall(d.recorded_at, zone), d.by, str(d.seq), d.sha[:16])):
                item = QTableWidgetItem(text)
                item.setToolTip(d.sha if c == len(heads) - 1 else text)
                self.table.setItem(r, c, item)
        header = self.table.horizontalHeader()
        header.setSectionResizeMode(QHeaderView.ResizeMode.ResizeToContents)
        header.setSectionResizeMode(0, QHeaderView.ResizeMode.Stretch)
        none = QLabel(self.tr("No handover was closed yet. Ctrl+Shift+H closes this shift's."))
        none.setVisible(not found)
        self.open_button, self.copy_button = QPushButton(self.tr("Open")), QPushButton(self.tr("Save a copy..."))
        close = QPushButton(self.tr("Leave"))
        for button in (self.open_button, self.copy_button):
            button.setEnabled(bool(found))
        foot = QHBoxLayout()
        foot.addWidget(self.open_button)
        foot.addWidget(self.copy_button)
        foot.addStretch(1)
        foot.addWidget(close)
        column = QVBoxLayout(self)
        column.addWidget(none)
        column.addWidget(self.table, 1)
        column.addLayout(foot)
        if found:
            self.table.selectRow(0)
        self.open_button.clicked.connect(self._open)
        self.copy_button.clicked.connect(self._copy)
        self.table.itemActivated.connect(self._activated)
        close.clicked.connect(self.close)
        fit(self, theme, 900, 420)

    def chosen(self) -> DocumentFacts | None:
        """The handover whose row is chosen."""
        row = self.table.currentRow()
        return self._found[row] if 0 <= row < len(self._found) else None

    def _open(self) -> None:
        if (found := self.chosen()) is not None:
            self.open_wanted.emit(found)

    def _copy(self) -> None:
        if (found := self.chosen()) is not None:
            self.copy_wanted.emit(found)

    def _activated(self, item: QTableWidgetItem) -> None:  # noqa: ARG002
        self._open()
