"""A quiet strip for what a person should know of the store while it holds: no alarm, but never out of sight."""

from __future__ import annotations

from PySide6.QtCore import Qt, Signal
from PySide6.QtWidgets import QFrame, QHBoxLayout, QLabel, QPushButton

from app.theme import Theme


class NoticeStrip(QFrame):
    """Stands under the menu while there is something to say. Every notice has a key; a later text takes its place."""

    again_wanted = Signal()
    """The person wants what stands in the way to be tried again."""

    def __init__(self, theme: Theme) -> None:
        super().__init__()
        self._lasting: dict[str, str] = {}
        self._passing: dict[str, str] = {}
        self.setProperty("banner", True)
        self.said = QLabel()
        self.said.setWordWrap(True)
        self.said.setTextFormat(Qt.TextFormat.PlainText)
        self.said.setProperty("role", "strong")
        self.again = self._button(self.tr("Try again"))
        self.seen = self._button(self.tr("Put away"))
        self._row = QHBoxLayout(self)
        self._row.addWidget(self.said, 1)
        self._row.addWidget(self.again)
        self._row.addWidget(self.seen)
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
        self._row.setContentsMargins(px(16), px(4), px(12), px(4))
        self._row.setSpacing(px(8))

    def tell(self, key: str, text: str, *, lasting: bool = False) -> None:
        """Say something under a key; "" takes it back. A lasting notice cannot be put away by the person."""
        self._lasting.pop(key, None)
        self._passing.pop(key, None)
        if text:
            (self._lasting if lasting else self._passing)[key] = text
        self._show()

    def plain(self) -> str:
        """What stands there; "" for nothing."""
        return self.said.text()

    def can_retry(self, allowed: bool) -> None:
        """Whether the person may have it tried again."""
        self.again.setVisible(allowed)

    def forget(self) -> None:
        """Nothing is to be said any more."""
        self._lasting.clear()
        self._passing.clear()
        self.again.hide()
        self._show()

    def _put_away(self) -> None:
        self._passing.clear()
        self._show()

    def _show(self) -> None:
        text = "\n".join((*self._lasting.values(), *self._passing.values()))
        self.said.setText(text)
        self.setAccessibleName(text)
        self.seen.setVisible(bool(self._passing))
        self.setVisible(bool(text))
