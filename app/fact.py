"""A fact in a column: a sign, a name, a few quiet lines. It takes the focus and can say how it came about."""

from __future__ import annotations

from collections.abc import Sequence

from PySide6.QtCore import Qt, Signal
from PySide6.QtGui import QFocusEvent, QKeyEvent, QMouseEvent
from PySide6.QtWidgets import QFrame, QHBoxLayout, QLabel, QSizePolicy, QVBoxLayout, QWidget

from app.explain import Explanation
from app.signs import Sign
from app.theme import Theme


class Fact(QFrame):
    """One fact. Enter or Space unfolds what stands under it; F2, ? or a double click explains it."""

    explain_wanted = Signal(object)

    def __init__(
        self,
        theme: Theme,
        title: str,
        lines: Sequence[str] = (),
        *,
        sign: Sign | None = None,
        explanation: Explanation | None = None,
        folded: Sequence[str] = (),
        fold_word: str = "",
        quiet: bool = False,
        payload: object = None,
    ) -> None:
        super().__init__()
        self.explanation, self.payload = explanation, payload
        self._fold_word = fold_word
        self.setProperty("fact", True)
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self.setAccessibleName(". ".join((title, *lines)))
        row = QHBoxLayout(self)
        row.setContentsMargins(theme.px(8), theme.px(5), theme.px(8), theme.px(5))
        row.setSpacing(theme.px(8))
        if sign is not None:
            row.addWidget(sign, 0, Qt.AlignmentFlag.AlignTop)
        words = QVBoxLayout()
        words.setSpacing(theme.px(1))
        words.addWidget(_label(title, "quiet" if quiet else "strong"))
        for line in lines:
            words.addWidget(_label(line, "caption"))
        self._fold_label = _label(fold_word, "caption") if folded else None
        if self._fold_label is not None:
            words.addWidget(self._fold_label)
        self._folded = [_label(text, "caption") for text in folded]
        for label in self._folded:
            label.hide()
            words.addWidget(label)
        row.addLayout(words, 1)

    @property
    def is_unfolded(self) -> bool:
        """Whether what stands under it is shown."""
        return bool(self._folded) and not self._folded[0].isHidden()

    def unfold(self) -> None:
        """Show what stands under it, or hide it again."""
        shown = not self.is_unfolded
        for label in self._folded:
            label.setVisible(shown)
        if self._fold_label is not None:
            self._fold_label.setVisible(not shown)

    def keyPressEvent(self, event: QKeyEvent) -> None:
        if event.key() in (Qt.Key.Key_Return, Qt.Key.Key_Enter, Qt.Key.Key_Space):
            if self._folded:
                self.unfold()
            elif self.explanation is not None:
                self.explain_wanted.emit(self.explanation)
            return
        if event.key() in (Qt.Key.Key_Down, Qt.Key.Key_Up):
            self.focusNextPrevChild(event.key() == Qt.Key.Key_Down)
            return
        event.ignore()

    def mousePressEvent(self, event: QMouseEvent) -> None:
        self.setFocus(Qt.FocusReason.MouseFocusReason)
        if self._folded:
            self.unfold()
        event.accept()

    def mouseDoubleClickEvent(self, event: QMouseEvent) -> None:
        if self.explanation is not None:
            self.explain_wanted.emit(self.explanation)
        event.accept()

    def focusInEvent(self, event: QFocusEvent) -> None:
        super().focusInEvent(event)
        _bring_into_view(self)


def _bring_into_view(widget: QWidget) -> None:
    from PySide6.QtWidgets import QScrollArea

    parent = widget.parentWidget()
    while parent is not None:
        if isinstance(parent, QScrollArea):
            parent.ensureWidgetVisible(widget, 0, 24)
            return
        parent = parent.parentWidget()


def _label(text: str, role: str) -> QLabel:
    label = QLabel(text)
    label.setTextFormat(Qt.TextFormat.PlainText)
    label.setWordWrap(True)
    label.setProperty("role", role)
    label.setSizePolicy(QSizePolicy.Policy.Ignored, QSizePolicy.Policy.MinimumExpanding)
    label.setAttribute(Qt.WidgetAttribute.WA_TransparentForMouseEvents)
    return label


def heading(text: str) -> QLabel:
    """The heading of a group of facts."""
    label = _label(text, "emphasis")
    label.setWordWrap(False)
    return label
