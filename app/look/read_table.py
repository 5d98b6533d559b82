"""A table to look at: rows are chosen whole, nothing is typed into it, and it can be copied."""

from __future__ import annotations

from collections.abc import Sequence

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QAbstractItemView, QHeaderView, QTableWidget

from app.look.copying import can_be_copied


def read_table(name: str, heads: Sequence[str], *, wide: int | None = None, many: bool = False) -> QTableWidget:
    """An empty table with its headings, named for screen readers.

    `wide`: the column that takes the room that the others, each as wide as its words, leave; else all share it.
    `many`: more than one row may be chosen.
    """
    table = QTableWidget(0, len(heads))
    can_be_copied(table)
    table.setAccessibleName(name)
    table.setHorizontalHeaderLabels(list(heads))
    header = table.horizontalHeader()
    header.setDefaultAlignment(Qt.AlignmentFlag.AlignLeft | Qt.AlignmentFlag.AlignVCenter)
    header.setSectionResizeMode(
        QHeaderView.ResizeMode.Stretch if wide is None else QHeaderView.ResizeMode.ResizeToContents
    )
    if wide is not None:
        header.setSectionResizeMode(wide, QHeaderView.ResizeMode.Stretch)
    table.setEditTriggers(QAbstractItemView.EditTrigger.NoEditTriggers)
    table.setSelectionBehavior(QAbstractItemView.SelectionBehavior.SelectRows)
    if not many:
        table.setSelectionMode(QAbstractItemView.SelectionMode.SingleSelection)
    table.verticalHeader().hide()
    return table
