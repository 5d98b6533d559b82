"""The line of the log strip: which keys it keeps for itself."""

from __future__ import annotations

from PySide6.QtCore import QEvent, Qt, Signal
from PySide6.QtGui import QKeyEvent, QKeySequence
from PySide6.QtWidgets import QLineEdit

from app.strip.completion import completions


class LineField(QLineEdit):
    """The line itself. Tab completes, Esc leaves, Ctrl+Z on an empty line is the window's undo.

    No line begins with the key that leads to it. `whole` says that a question is asked about what stands there: then
    letters typed behind it are a word of their own.
    """

    whole = False

    left = Signal()
    completion_wanted = Signal()

    def event(self, event: QEvent) -> bool:
        if (
            event.type() == QEvent.Type.ShortcutOverride
            and isinstance(event, QKeyEvent)
            and not self.text()
            and event.matches(QKeySequence.StandardKey.Undo)
        ):
            event.ignore()
            return False
        is_tab = (
            event.type() == QEvent.Type.KeyPress and isinstance(event, QKeyEvent) and event.key() == Qt.Key.Key_Tab
        )
        if is_tab and completions(self.text(), self.cursorPosition()):
            self.completion_wanted.emit()
            return True
        return super().event(event)

    def keyPressEvent(self, event: QKeyEvent) -> None:
        if event.key() == Qt.Key.Key_Escape:
            self.left.emit()
            return
        if event.isAutoRepeat() and event.key() in (Qt.Key.Key_Return, Qt.Key.Key_Enter):
            return  # a key held down is one press, and no yes to what it brought up
        at_start = self.cursorPosition() == 0 or self.selectionStart() == 0
        if event.text() == "/" and at_start:
            return
        text = self.text()
        at_end = self.cursorPosition() == len(text) and not self.hasSelectedText()
        if self.whole and at_end and event.text().isalpha() and text[-1:].isalpha():
            self.insert(" ")
        if event.text() and event.text().isprintable():
            self.whole = False
        super().keyPressEvent(event)
