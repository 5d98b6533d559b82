"""How the log strip stands: for whom, the line, the keys' buttons beside or under it, and what is said of it."""

from __future__ import annotations

from PySide6.QtCore import Qt
from PySide6.QtGui import QResizeEvent
from PySide6.QtWidgets import QBoxLayout, QFrame, QHBoxLayout, QLabel, QSizePolicy, QVBoxLayout

from app.look.theme import Theme
from app.strip.caution_line import with_caution
from app.strip.line_field import LineField
from app.strip.one_key_buttons import OneKeyButtons

LEAST_LINE = 200
"""Least width of the line at 100 % beside the keys' buttons; where it has less they stand under it."""
TIGHT = 560
"""Least height of the window at 100 % at which buttons have a row of their own; their keys and menu stay."""


class StripFrame(QFrame):
    """The widgets and their places; it knows nothing of lines and recordings."""

    def __init__(self, theme: Theme) -> None:
        super().__init__()
        self.setProperty("card", True)
        self._theme = theme
        self.whom = QLabel()
        self.whom.setTextFormat(Qt.TextFormat.PlainText)
        self.whom.setProperty("role", "emphasis")
        self.line = LineField()
        self.line.setAccessibleName(self.tr("Log a line"))
        self.said = QLabel()
        self.said.setTextFormat(Qt.TextFormat.RichText)
        self.said.setWordWrap(True)
        self.said.setAlignment(Qt.AlignmentFlag.AlignTop)
        self.said.setSizePolicy(QSizePolicy.Policy.Ignored, QSizePolicy.Policy.Preferred)
        self.keys = OneKeyButtons()
        self.buttons = self.keys.by_key
        self._column = QVBoxLayout(self)
        self._lay_out()

    def _lay_out(self) -> None:
        self._row = QBoxLayout(QBoxLayout.Direction.LeftToRight)
        line = QHBoxLayout()
        line.addWidget(self.whom)
        line.addWidget(self.line, 1)
        self._row.addLayout(line, 1)
        self._row.addWidget(self.keys)
        self._column.addLayout(self._row)
        self._column.addLayout(with_caution(self.said))

    def set_theme(self, theme: Theme) -> None:
        """Take another look or text size."""
        self._theme = theme
        px = theme.px
        self._column.setContentsMargins(px(12), px(5), px(12), px(4))
        self._column.setSpacing(px(2))
        self._row.setSpacing(px(8))
        self._fit_words(False)

    def _fit_words(self, tight: bool) -> None:
        """Room for two lines is kept, so that nothing jumps; where height is scarce, for what is said."""
        line = round(self._theme.px(self._theme.type.body) * 1.25)
        self.said.setMinimumHeight(line * (1 if tight else 2))

    def resizeEvent(self, event: QResizeEvent) -> None:
        """Where the line would be too short, the keys' buttons stand under it."""
        super().resizeEvent(event)
        rest = self.width() - self.keys.needed() - self.whom.sizeHint().width()
        tight = rest < self._theme.px(LEAST_LINE) and self.window().height() < self._theme.px(TIGHT)
        self.keys.setVisible(not tight)
        self._fit_words(tight)
        direction = QBoxLayout.Direction
        self._row.setDirection(direction.LeftToRight if rest >= self._theme.px(LEAST_LINE) else direction.TopToBottom)
