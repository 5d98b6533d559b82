"""Where the line on top stands: beside the menus where there is room, else in a row of its own under them."""

from __future__ import annotations

from PySide6.QtWidgets import QMenuBar, QVBoxLayout, QWidget

from app.look.theme import Theme
from app.window.top_bar import TopBar

MENU_MARGINS = 19
"""Pixels that a menu takes beside its word, at 100 %: what the style sheet gives it, and a little."""


class TopLine:
    """Moves the bar between a menu bar's corner and the top of a column."""

    def __init__(self, top: TopBar, menus: QMenuBar, column: QVBoxLayout) -> None:
        self._top, self._menus, self._column = top, menus, column
        self._no_corner = QWidget(menus)
        self._no_corner.hide()

    def place(self, theme: Theme, width: int) -> None:
        """Put the bar where a window of `width` pixels has room for it."""
        fits = self._menus_width(theme) + self._top.sizeHint().width() <= width
        if fits and self._menus.cornerWidget() is not self._top:
            self._menus.setCornerWidget(self._top)
        elif not fits and self._column.indexOf(self._top) < 0:
            self._menus.setCornerWidget(self._no_corner)
            self._column.insertWidget(0, self._top)
        self._top.show()

    def _menus_width(self, theme: Theme) -> int:
        """Measured by their words: a menu that the bar pushed out has no geometry to ask for."""
        metrics = self._menus.fontMetrics()
        words = (action.text().replace("&", "") for action in self._menus.actions())
        return sum(metrics.horizontalAdvance(word) + theme.px(MENU_MARGINS) for word in words)
