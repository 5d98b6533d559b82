"""Parts of a form: a field under its name, what is known of it beneath, in cards that flow into lines."""

from __future__ import annotations

from PySide6.QtGui import QWheelEvent
from PySide6.QtWidgets import QFrame, QLabel, QSizePolicy, QVBoxLayout, QWidget

from app.look.chooser import Chooser
from app.look.flow_row import FlowRow
from app.look.theme import Theme

WIDTH = 228


class QuietChooser(Chooser):
    """Choices that the wheel never changes."""

    def wheelEvent(self, event: QWheelEvent) -> None:
        event.ignore()


class Cell(QWidget):
    """A name, the field, and a quiet note under it."""

    def __init__(self, name: str, field: QWidget, theme: Theme, *, width: int = WIDTH, noted: bool = True) -> None:
        super().__init__()
        self.field, self.name, self.note = field, QLabel(name), QLabel()
        self.name.setProperty("role", "strong")
        self.name.setBuddy(field)
        self.note.setProperty("role", "caption")
        self.note.setSizePolicy(QSizePolicy.Policy.Ignored, QSizePolicy.Policy.Preferred)
        if not field.accessibleName():
            field.setAccessibleName(name)
        column = QVBoxLayout(self)
        column.setContentsMargins(0, 0, 0, 0)
        column.setSpacing(theme.px(3))
        column.addWidget(self.name)
        column.addWidget(field)
        column.addWidget(self.note)
        self.note.setVisible(noted)
        if width:
            self.setFixedWidth(max(theme.px(width), self.name.sizeHint().width()))

    def tell(self, text: str, *, strong: bool = False) -> None:
        """What is known of the value."""
        self.note.setText(text)
        self.note.setToolTip(text)
        self.note.setProperty("role", "mark" if strong else "caption")
        self.note.style().unpolish(self.note)
        self.note.style().polish(self.note)
        self.field.setAccessibleDescription(text)
        proxy = self.field.focusProxy()
        if proxy is not None:
            proxy.setAccessibleDescription(text)


class Card(QFrame):
    """Cells that flow into lines, under a heading where there is one."""

    def __init__(self, theme: Theme, heading: str = "", note: str = "") -> None:
        super().__init__()
        self.setProperty("card", True)
        px = theme.px
        self.column = QVBoxLayout(self)
        self.column.setContentsMargins(px(14), px(10), px(14), px(12))
        self.column.setSpacing(px(8))
        if heading:
            title = QLabel(heading)
            title.setProperty("role", "emphasis")
            self.column.addWidget(title)
        if note:
            said = QLabel(note)
            said.setProperty("role", "caption")
            said.setWordWrap(True)
            self.column.addWidget(said)
        self._flow: FlowRow | None = None
        self._theme = theme

    def add(self, cell: QWidget) -> None:
        """A cell beside the others."""
        if self._flow is None:
            inside = QWidget()
            self._flow = FlowRow(inside, self._theme.px(16))
            self._flow.setContentsMargins(0, 0, 0, 0)
            self.column.addWidget(inside)
        self._flow.addWidget(cell)

    def add_line(self, widget: QWidget) -> None:
        """Something that has a line of its own; the next cell begins a new one."""
        self._flow = None
        self.column.addWidget(widget)
