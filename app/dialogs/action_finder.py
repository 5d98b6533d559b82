"""Every action by name, with its keys; typing narrows the list, Enter does it."""

from __future__ import annotations

from PySide6.QtCore import Qt
from PySide6.QtGui import QAction, QKeyEvent
from PySide6.QtWidgets import (
    QHeaderView,
    QLineEdit,
    QTreeWidget,
    QTreeWidgetItem,
    QVBoxLayout,
    QWidget,
)

from app.look.fitted import FittedDialog, fit
from app.look.theme import Theme
from app.window.actions import found, help_of, keys_of, name_of


class ActionFinder(FittedDialog):
    """Searches the table of actions. `chosen` is the action to do after it has closed."""

    def __init__(self, actions: dict[str, QAction], theme: Theme, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._actions = actions
        self.chosen: QAction | None = None
        self.setWindowTitle(self.tr("Find an action"))
        self.search = QLineEdit()
        self.search.setPlaceholderText(self.tr("Type a part of its name"))
        self.search.setAccessibleName(self.tr("Part of an action's name"))
        self.list = QTreeWidget()
        self.list.setAccessibleName(self.tr("Actions"))
        self.list.setHeaderLabels([self.tr("Action"), self.tr("Keys"), self.tr("What it does")])
        self.list.setRootIsDecorated(False)
        self.list.header().setSectionResizeMode(QHeaderView.ResizeMode.ResizeToContents)
        column = QVBoxLayout(self)
        column.addWidget(self.search)
        column.addWidget(self.list)
        self.search.textChanged.connect(self._narrow)
        self.search.returnPressed.connect(self._take)
        self.list.itemActivated.connect(self._take)
        self._narrow("")
        fit(self, theme, 1040, 560)

    def keyPressEvent(self, event: QKeyEvent) -> None:
        if event.key() in (Qt.Key.Key_Down, Qt.Key.Key_Up) and self.search.hasFocus():
            self.list.setFocus()
            return
        super().keyPressEvent(event)

    def _narrow(self, text: str) -> None:
        self.list.clear()
        for deed in found(text):
            action = self._actions[deed.key]
            item = QTreeWidgetItem([name_of(deed).rstrip("."), keys_of(deed), help_of(deed)])
            item.setData(0, Qt.ItemDataRole.UserRole, deed.key)
            item.setDisabled(not action.isEnabled())
            self.list.addTopLevelItem(item)
        first = self.list.topLevelItem(0)
        if first is not None:
            self.list.setCurrentItem(first)

    def _take(self) -> None:
        item = self.list.currentItem()
        if item is not None and not item.isDisabled():
            self.chosen = self._actions[item.data(0, Qt.ItemDataRole.UserRole)]
            self.accept()
