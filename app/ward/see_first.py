"""The strong line on top of the ward view: whom to see first, and why."""

from __future__ import annotations

from PySide6.QtCore import QRectF, QSize, Qt, Signal
from PySide6.QtGui import QPainter, QPaintEvent
from PySide6.QtWidgets import QFrame, QHBoxLayout, QLabel, QPushButton, QSizePolicy, QWidget

from app.chart.marks import pennant
from app.look.formats import inert
from app.look.theme import Theme, Tier


class _Pennant(QWidget):
    """A large pennant; the words beside it say what it means."""

    def __init__(self, theme: Theme) -> None:
        super().__init__()
        self.theme, self.tier = theme, Tier.CONCERN
        self.setFixedSize(self.sizeHint())

    def sizeHint(self) -> QSize:
        return QSize(self.theme.px(26), self.theme.px(30))

    def paintEvent(self, event: QPaintEvent) -> None:  # noqa: ARG002
        painter = QPainter(self)
        box = QRectF(self.rect())
        pennant(painter, self.theme, self.tier, box.left() + self.theme.px(3), box.bottom() - 2, box.height() - 4)
        painter.end()


class SeeFirst(QFrame):
    """A card with the label, the reason and a button that opens the episode."""

    opened = Signal(str)

    def __init__(self, theme: Theme) -> None:
        super().__init__()
        self._key = ""
        self.setProperty("card", True)
        self._sign = _Pennant(theme)
        self._title = QLabel()
        self._title.setProperty("role", "title")
        self._why = QLabel()
        self._why.setWordWrap(True)
        self._why.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Preferred)
        self._open = QPushButton(self.tr("Open"))
        self._open.setProperty("role", "small")
        self._open.clicked.connect(self._emit_opened)
        words = QHBoxLayout()
        words.setSpacing(theme.px(16))
        words.addWidget(self._title)
        words.addWidget(self._why, 1)
        self._row = row = QHBoxLayout(self)
        row.setSpacing(theme.px(12))
        row.addWidget(self._sign, 0, Qt.AlignmentFlag.AlignVCenter)
        row.addLayout(words, 1)
        row.addWidget(self._open, 0, Qt.AlignmentFlag.AlignVCenter)
        self.set_theme(theme)

    def set_theme(self, theme: Theme) -> None:
        """Take another look or text size."""
        self._sign.theme = theme
        self._sign.setFixedSize(self._sign.sizeHint())
        margin = theme.px(4)
        self._row.setContentsMargins(theme.px(16), margin, theme.px(12), margin)

    def show_first(self, key: str, label: str, why: str, tier: Tier | None) -> None:
        """Say whom to see first, and why."""
        self._say(key, self.tr("See first: {label}").format(label=label), why, tier)
        self._open.setAccessibleName(self.tr("Open {label}").format(label=label))

    def show_nobody(self, *, empty: bool) -> None:
        """Say that nobody stands out; of an `empty` ward that nobody is on it, for nothing was judged there."""
        if empty:
            self._say("", self.tr("No episode"), self.tr("Nothing is logged here, so nothing is judged."), None)
        else:
            told = self.tr("No open flag and nothing overdue. This is no proof that all is well.")
            self._say("", self.tr("Nobody stands out"), told, None)

    def _say(self, key: str, title: str, why: str, tier: Tier | None) -> None:
        self._key = key
        self._sign.setVisible(tier is not None)
        if tier is not None:
            self._sign.tier = tier
            self._sign.update()
        self._open.setVisible(bool(key))
        self._title.setText(inert(title))
        self._why.setText(inert(why))
        self.setAccessibleName(self.text())

    @property
    def names_somebody(self) -> bool:
        """Whether somebody stands out."""
        return bool(self._key)

    def text(self) -> str:
        """The line in plain words."""
        from PySide6.QtGui import QTextDocumentFragment

        parts = (self._title.text(), self._why.text())
        return ". ".join(QTextDocumentFragment.fromHtml(p).toPlainText() for p in parts)

    def _emit_opened(self) -> None:
        self.opened.emit(self._key)
