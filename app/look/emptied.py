"""Emptying a layout that is filled anew."""

from __future__ import annotations

from PySide6.QtWidgets import QLayout


def emptied(layout: QLayout) -> None:
    """Take everything out of a layout, and out of layouts inside it: widgets leave the screen at once and are thrown
    away when Qt is idle, so that one may be emptied from its own signal."""
    while layout.count():
        item = layout.takeAt(0)
        widget, inner = (item.widget(), item.layout()) if item is not None else (None, None)
        if widget is not None:
            widget.hide()
            widget.deleteLater()
        elif inner is not None:
            emptied(inner)
