"""Rows of a table as high as the sentences in its widest column need, at any size of text."""

from __future__ import annotations

from PySide6.QtCore import QRect, Qt
from PySide6.QtWidgets import QTableWidget

_AROUND = 2.2
"""What the style and Qt leave free beside a cell's text, in heights of a line; `_ABOVE` above and under it."""
_ABOVE = 1.1
_HIGH = 1 << 16


def fit_rows(table: QTableWidget, column: int) -> None:
    """Make every row as high as its text in `column` needs, beside what the others need.

    Qt's own measure of a wrapped text does not know the style's padding, and left out a sentence's last line.
    """
    table.resizeRowsToContents()
    metrics = table.fontMetrics()
    room = QRect(0, 0, max(1, table.columnWidth(column) - round(metrics.height() * _AROUND)), _HIGH)
    for row in range(table.rowCount()):
        item = table.item(row, column)
        if item is None:
            continue
        needed = metrics.boundingRect(room, Qt.TextFlag.TextWordWrap, item.text()).height() + round(
            metrics.height() * _ABOVE
        )
        if needed > table.rowHeight(row):
            table.setRowHeight(row, needed)
