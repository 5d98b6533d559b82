"""The closed handovers: each as it was printed, to be opened or copied, never changed."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

from PySide6.QtCore import Qt, Signal
from PySide6.QtWidgets import (
    QHBoxLayout,
    QLabel,
    QPushButton,
    QTableWidget,
    QTableWidgetItem,
    QVBoxLayout,
    QWidget,
)

from app.look.fitted import FittedDialog, fit
from app.look.formats import wall
from app.look.read_table import read_table
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
        self.table = self._filled_table(found, zone)
        none = QLabel(self.tr("No handover was closed yet. Ctrl+Shift+H closes this shift's."))
        none.setVisible(not found)
        column = QVBoxLayout(self)
        column.addWidget(none)
        column.addWidget(self.table, 1)
        column.addLayout(self._foot(has_any=bool(found)))
        if found:
            self.table.selectRow(0)
        self.table.itemActivated.connect(self._activated)
        fit(self, theme, 900, 420)

    def _filled_table(self, found: Sequence[DocumentFacts], zone: str) -> QTableWidget:
        heads = [self.tr("Handover"), self.tr("Closed"), self.tr("By"), self.tr("Ledger"), self.tr("SHA-256")]
        table = read_table(self.tr("Closed handovers"), heads, wide=0)
        table.setRowCount(len(found))
        for r, d in enumerate(found):
            for c, text in enumerate((d.name, wall(d.recorded_at, zone), d.by, str(d.seq), d.sha[:16])):
                item = QTableWidgetItem(text)
                item.setToolTip(d.sha if c == len(heads) - 1 else text)
                table.setItem(r, c, item)
        return table

    def _foot(self, *, has_any: bool) -> QHBoxLayout:
        self.open_button, self.copy_button = QPushButton(self.tr("Open")), QPushButton(self.tr("Save a copy..."))
        close = QPushButton(self.tr("Leave"))
        for button, does in ((self.open_button, self._open), (self.copy_button, self._copy)):
            button.setEnabled(has_any)
            button.clicked.connect(does)
        close.clicked.connect(self.close)
        foot = QHBoxLayout()
        foot.addWidget(self.open_button)
        foot.addWidget(self.copy_button)
        foot.addStretch(1)
        foot.addWidget(close)
        return foot

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
