"""A fact in a column: a sign, a name, a few quiet lines. It takes the focus and can say how it came about."""

from __future__ import annotations

from collections.abc import Sequence

from PySide6.QtCore import QEvent, Qt, Signal
from PySide6.QtGui import QEnterEvent, QFocusEvent, QKeyEvent, QMouseEvent, QResizeEvent
from PySide6.QtWidgets import QFrame, QHBoxLayout, QLabel, QSizePolicy, QToolButton, QVBoxLayout, QWidget

from app.explain.explanation import Explanation
from app.look.formats import whole_units
from app.look.signs import Sign
from app.look.theme import Theme


class Fact(QFrame):
    """One fact. Enter or Space unfolds what stands under it; F2, ?, a double click or "Why" explains it.

    `value` stands at the right of the title, or below it where it is a sentence; `marks` are doubts, told as
    strongly as the value. `large`: what is to be seen first.
    """

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
        value: str = "",
        value_below: bool = False,
        marks: Sequence[str] = (),
        large: bool = False,
    ) -> None:
        super().__init__()
        self.explanation, self.payload = explanation, payload
        self._fold_word = fold_word
        self.setProperty("fact", True)
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self.setAccessibleName(". ".join((title, *((value,) if value else ()), *marks, *lines)))
        row = QHBoxLayout(self)
        row.setContentsMargins(theme.px(8), theme.px(5), theme.px(8), theme.px(5))
        row.setSpacing(theme.px(8))
        if sign is not None:
            row.addWidget(sign, 0, Qt.AlignmentFlag.AlignTop)
        words = QVBoxLayout()
        words.setSpacing(theme.px(1))
        self._has_value = bool(value) and not value_below
        self._title = _label(title, "quiet" if quiet else "emphasis" if large else "strong")
        words.addLayout(_head(theme, self._title, "" if value_below else value))
        below = [(value, "strong")] if value and value_below else []
        below += [(mark, "mark") for mark in marks] + [(line, "caption") for line in lines]
        for text, role in below:
            words.addWidget(_label(text, role))
        self._fold_label = _label(fold_word, "caption") if folded else None
        self._folded = self._fold_under(words, folded)
        row.addLayout(words, 1)
        self.why = self._why_button(title) if explanation is not None else None

    def _fold_under(self, words: QVBoxLayout, folded: Sequence[str]) -> list[QLabel]:
        """What stands hidden under the word that unfolds it."""
        if self._fold_label is not None:
            words.addWidget(self._fold_label)
        labels = [_label(text, "caption") for text in folded]
        for label in labels:
            label.hide()
            words.addWidget(label)
        return labels

    def _why_button(self, title: str) -> QToolButton:
        """A small way in for the mouse; it floats over the corner, so that nothing moves when it comes."""
        button = QToolButton(self)
        button.setText(self.tr("Why"))
        button.setProperty("role", "why")
        button.setToolTip(self.tr("How this came about (F2)"))
        button.setAccessibleName(self.tr("How this came about: {title}").format(title=title))
        button.setFocusPolicy(Qt.FocusPolicy.NoFocus)
        button.clicked.connect(self._want_explanation)
        button.hide()
        return button

    def _want_explanation(self) -> None:
        if self.explanation is not None:
            self.explain_wanted.emit(self.explanation)

    @property
    def key(self) -> str:
        """What it is by, when the column is drawn anew."""
        return self.accessibleName().partition(".")[0]

    def set_title(self, text: str) -> None:
        """Another title."""
        self._title.setText(text)

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

    def enterEvent(self, event: QEnterEvent) -> None:
        super().enterEvent(event)
        if self.why is not None:
            self._place_why()
            self.why.show()

    def leaveEvent(self, event: QEvent) -> None:
        super().leaveEvent(event)
        if self.why is not None:
            self.why.hide()

    def resizeEvent(self, event: QResizeEvent) -> None:
        super().resizeEvent(event)
        if self.why is not None:
            self._place_why()

    def _place_why(self) -> None:
        assert self.why is not None
        self.why.adjustSize()
        below = self._title.fontMetrics().height() if self._has_value else 0
        # beside the short lines: it must cover no word
        self.why.move(self.width() - self.why.width() - 4, (9 if below else 4) + below)
        self.why.raise_()

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


def _head(theme: Theme, title: QLabel, value: str) -> QHBoxLayout:
    """The title, and at its right the value, which is never broken."""
    row = QHBoxLayout()
    row.setSpacing(theme.px(10))
    row.addWidget(title, 1)
    if value:
        label = QLabel(value)
        label.setTextFormat(Qt.TextFormat.PlainText)
        label.setProperty("role", "strong")
        label.setAttribute(Qt.WidgetAttribute.WA_TransparentForMouseEvents)
        row.addWidget(label, 0, Qt.AlignmentFlag.AlignTop)
    return row


def _label(text: str, role: str) -> QLabel:
    label = QLabel(whole_units(text))
    label.setTextFormat(Qt.TextFormat.PlainText)
    label.setWordWrap(True)
    label.setProperty("role", role)
    label.setSizePolicy(QSizePolicy.Policy.Ignored, QSizePolicy.Policy.MinimumExpanding)
    label.setAttribute(Qt.WidgetAttribute.WA_TransparentForMouseEvents)
    return label


def heading(text: str) -> QLabel:
    """The heading of a group of facts."""
    return _label(text, "emphasis")
