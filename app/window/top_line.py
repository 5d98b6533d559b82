"""Where the line on top stands: beside the menus where there is room, else all of it or its pages under them."""

from __future__ import annotations

from PySide6.QtWidgets import QMenuBar, QVBoxLayout, QWidget

from app.look.theme import Theme
from app.window.top_bar import TopBar

MENU_MARGINS, MENU_SPACING = 16, 3
"""Pixels that a menu takes beside its word: by the style sheet, at 100 %, and what parts it from the next."""


class TopLine:
    """Moves the bar between a menu bar's corner and the top of a column."""

    def __init__(self, top: TopBar, menus: QMenuBar, column: QVBoxLayout) -> None:
        self._top, self._menus, self._column = top, menus, column
        self._no_corner = QWidget(menus)
        self._no_corner.hide()

    def place(self, theme: Theme, width: int) -> None:
        """Put the bar where a window of `width` pixels has room for it: beside the menus; in a row of its own; or
        its pages in that row and moment and person beside the menus, without the date where that has no room."""
        top, menus = self._top, self._menus_width(theme)
        top.shorten(False)
        row = top.pages.sizeHint().width() + top.who.sizeHint().width() + theme.px(8 + 12)
        if menus + row <= width:
            self._set_corner(top)
        elif row <= width:
            self._set_corner(self._no_corner)
        else:
            self._split(menus, width)
        top.show()
        top.who.show()

    def _split(self, menus: int, width: int) -> None:
        top = self._top
        for is_short in (False, True):
            top.shorten(is_short)
            if menus + top.who.sizeHint().width() <= width:
                self._set_corner(top.who)
                return
        top.shorten(False)
        self._set_corner(self._no_corner)

    def _set_corner(self, corner: QWidget) -> None:
        if corner is not self._top.who and not self._top.has_who:
            self._top.take_who()
        if corner is not self._top and self._column.indexOf(self._top) < 0:
            self._menus.setCornerWidget(self._no_corner)
            self._column.insertWidget(0, self._top)
        if self._menus.cornerWidget() is not corner:
            self._menus.setCornerWidget(corner)

    def _menus_width(self, theme: Theme) -> int:
        """Measured by their words: a menu that the bar pushed out has no geometry to ask for."""
        metrics = self._menus.fontMetrics()
        words = (action.text().replace("&", "") for action in self._menus.actions())
        return sum(metrics.horizontalAdvance(word) + theme.px(MENU_MARGINS) + MENU_SPACING for word in words)
