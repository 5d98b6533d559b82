"""Tables that can be copied: Ctrl+C or the context menu puts the chosen rows, else all of them, on the clipboard."""

from __future__ import annotations

from collections.abc import Iterator

from PySide6.QtCore import QAbstractItemModel, QModelIndex, QObject, Qt
from PySide6.QtGui import QAction, QGuiApplication, QKeySequence
from PySide6.QtWidgets import QAbstractItemView, QTreeView

_ROOT = QModelIndex()


class TableCopy(QObject):
    """Belongs to a view and copies it, tab-separated, with its headings."""

    def __init__(self, view: QAbstractItemView) -> None:
        super().__init__(view)
        self._view = view
        action = QAction(self.tr("Copy table"), view)
        action.setShortcut(QKeySequence(QKeySequence.StandardKey.Copy))
        action.setShortcutContext(Qt.ShortcutContext.WidgetShortcut)
        action.triggered.connect(self.copy)
        view.addAction(action)
        view.setContextMenuPolicy(Qt.ContextMenuPolicy.ActionsContextMenu)

    def copy(self) -> None:
        """Put the rows on the clipboard."""
        QGuiApplication.clipboard().setText(self.text())

    def text(self) -> str:
        """Two or more chosen rows, else every row: one chosen row is only where the cursor stands."""
        model = self._view.model()
        rows = list(_rows(model, _ROOT, isinstance(self._view, QTreeView)))
        chosen = {_first(index) for index in self._view.selectedIndexes()}
        kept = [r for r in rows if r in chosen] if len(chosen) > 1 else rows
        columns = range(model.columnCount())
        heads = [str(model.headerData(c, Qt.Orientation.Horizontal) or "") for c in columns]
        lines = [[str(row.siblingAtColumn(c).data() or "") for c in columns] for row in kept]
        return "\n".join("\t".join(" ".join(cell.split()) for cell in line) for line in (heads, *lines))


def can_be_copied(view: QAbstractItemView) -> None:
    """Give a view its copying."""
    TableCopy(view)


def _first(index: QModelIndex) -> QModelIndex:
    return index.siblingAtColumn(0)


def _rows(model: QAbstractItemModel, parent: QModelIndex, deep: bool) -> Iterator[QModelIndex]:
    for n in range(model.rowCount(parent)):
        row = model.index(n, 0, parent)
        yield row
        if deep:
            yield from _rows(model, row, deep)
