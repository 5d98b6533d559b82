"""A quiet strip for what a person should know of the store while it holds: no alarm, but never out of sight."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from PySide6.QtCore import Qt, Signal
from PySide6.QtWidgets import QFrame, QHBoxLayout, QLabel, QPushButton, QVBoxLayout, QWidget

from app.look.flow_row import FlowRow
from app.look.theme import Theme


@dataclass(frozen=True, slots=True)
class Way:
    """A button beside a notice: its key, by which it is told, and its word."""

    key: str
    word: str


class NoticeStrip(QFrame):
    """Stands under the menu while there is something to say. Every notice has a key; a later text takes its place."""

    again_wanted = Signal()
    """The person wants what stands in the way to be tried again."""
    way_wanted = Signal(str)
    """The key of a way that a notice offers."""

    def __init__(self, theme: Theme) -> None:
        super().__init__()
        self._lasting: dict[str, str] = {}
        self._passing: dict[str, str] = {}
        self._ways: dict[str, tuple[Way, ...]] = {}
        self.setProperty("banner", True)
        self.said = QLabel()
        self.said.setWordWrap(True)
        self.said.setTextFormat(Qt.TextFormat.PlainText)
        self.said.setProperty("role", "strong")
        self.again = self._button(self.tr("Try again"))
        self.seen = self._button(self.tr("Put away"))
        self.ways: dict[str, QPushButton] = {}
        self._inside = QWidget()
        self._flow = FlowRow(self._inside, theme.px(8))
        self._flow.setContentsMargins(0, 0, 0, 0)
        self._row = QHBoxLayout()
        self._row.addWidget(self.said, 1)
        self._row.addWidget(self.again, 0, Qt.AlignmentFlag.AlignTop)
        self._row.addWidget(self.seen, 0, Qt.AlignmentFlag.AlignTop)
        self._column = QVBoxLayout(self)
        self._column.addLayout(self._row)
        self._column.addWidget(self._inside)
        self.again.clicked.connect(self.again_wanted)
        self.seen.clicked.connect(self._put_away)
        self.again.hide()
        self.set_theme(theme)
        self.hide()

    def _button(self, word: str) -> QPushButton:
        button = QPushButton(word)
        button.setProperty("role", "small")
        button.setAccessibleName(word)
        return button

    def set_theme(self, theme: Theme) -> None:
        """Take another look or text size."""
        px = theme.px
        self._column.setContentsMargins(px(16), px(4), px(12), px(4))
        self._column.setSpacing(px(4))
        self._row.setSpacing(px(8))

    def tell(self, key: str, text: str, *, lasting: bool = False, ways: Sequence[Way] = ()) -> None:
        """Say something under a key, with ways on as buttons; "" takes it back. A lasting notice cannot be put away
        by the person."""
        for told in (self._lasting, self._passing, self._ways):
            told.pop(key, None)
        if text:
            (self._lasting if lasting else self._passing)[key] = text
            self._ways[key] = tuple(ways)
        self._show()

    def plain(self) -> str:
        """What stands there; "" for nothing."""
        return self.said.text()

    def can_retry(self, allowed: bool) -> None:
        """Whether the person may have it tried again."""
        self.again.setVisible(allowed)

    def forget(self) -> None:
        """Nothing is to be said any more."""
        for told in (self._lasting, self._passing, self._ways):
            told.clear()
        self.again.hide()
        self._show()

    def _put_away(self) -> None:
        for key in self._passing:
            self._ways.pop(key, None)
        self._passing.clear()
        self._show()

    def _show(self) -> None:
        text = "\n".join((*self._lasting.values(), *self._passing.values()))
        self.said.setText(text)
        self.setAccessibleName(text)
        self._show_ways()
        self.seen.setVisible(bool(self._passing))
        self.setVisible(bool(text))

    def _show_ways(self) -> None:
        order = (*self._lasting, *self._passing)
        wanted = {way.key: way for key in order for way in self._ways[key]}
        if list(wanted) == list(self.ways):
            return
        for button in self.ways.values():
            self._flow.removeWidget(button)
            button.hide()
            button.deleteLater()
        self.ways = {}
        for way in wanted.values():
            button = self.ways[way.key] = self._button(way.word)
            button.setProperty("way", way.key)
            button.clicked.connect(self._way_pressed)
            self._flow.addWidget(button)
        self._inside.setVisible(bool(wanted))

    def _way_pressed(self) -> None:
        button = self.sender()
        if button is not None:
            self.way_wanted.emit(str(button.property("way")))
