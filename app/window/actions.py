"""Every action of the window: its name, its keys, its help, and the menu it stands in.

One table feeds the menus, the searchable list, the help page and the test that says no action lacks any of
them. The object that serves a menu carries out its deeds by methods named `do_KEY`.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable
from typing import Final

from PySide6.QtCore import QCoreApplication
from PySide6.QtGui import QAction, QKeySequence
from PySide6.QtWidgets import QMenu, QMenuBar, QWidget

from app.window.action_table import DEEDS, MENUS, Deed

CONTEXT: Final = "action"


def _t(text: str) -> str:
    return QCoreApplication.translate(CONTEXT, text)


def name_of(deed: Deed) -> str:
    """The action's name in the reader's language."""
    return _t(deed.name)


def menu_name(title: str) -> str:
    """A menu's name in the reader's language, without the mark of its key."""
    return _t(title).replace("&", "")


def help_of(deed: Deed) -> str:
    """What it does, in the reader's language."""
    return _t(deed.help)


def keys_of(deed: Deed) -> str:
    """Its keys as this platform writes them, parted by commas."""
    return ", ".join(QKeySequence(k).toString(QKeySequence.SequenceFormat.NativeText) for k in deed.keys)


def make_actions(window: QWidget, server_of: Callable[[str], object]) -> dict[str, QAction]:
    """One QAction for each deed, joined to the method of the object that serves its menu."""
    made = {}
    for deed in DEEDS:
        action = QAction(name_of(deed), window)
        action.setObjectName(deed.key)
        action.setShortcuts([QKeySequence(k) for k in deed.keys])
        action.setToolTip(help_of(deed))
        action.setStatusTip(help_of(deed))
        action.setWhatsThis(help_of(deed))
        action.setCheckable(deed.checkable)
        action.triggered.connect(getattr(server_of(deed.menu), deed.slot))
        window.addAction(action)
        made[deed.key] = action
    return made


def fill_menus(bar: QMenuBar, actions: dict[str, QAction]) -> None:
    """The menus, each with its actions in the table's order."""
    for key, title in MENUS:
        menu: QMenu = bar.addMenu(_t(title))
        menu.setToolTipsVisible(True)
        for deed in (d for d in DEEDS if d.menu == key):
            if deed.parted:
                menu.addSeparator()
            menu.addAction(actions[deed.key])


def found(text: str, deeds: Iterable[Deed] = DEEDS) -> tuple[Deed, ...]:
    """The actions whose name, help or keys hold every word of `text`, those with it in the name first.

    >>> [d.key for d in found("gas sent")]
    ['gas_sent']
    """
    words = text.casefold().split()
    hits = []
    for deed in deeds:
        name = name_of(deed).casefold()
        whole = f"{name} {help_of(deed).casefold()} {keys_of(deed).casefold()}"
        if all(w in whole for w in words):
            hits.append((not all(w in name for w in words), deed))
    return tuple(deed for _, deed in sorted(hits, key=lambda hit: hit[0]))
