"""A small form: labelled fields, a line that says what is wrong, and two buttons."""

from __future__ import annotations

from PySide6.QtCore import Qt
from PySide6.QtGui import QShowEvent
from PySide6.QtWidgets import (
    QDialog,
    QDialogButtonBox,
    QFormLayout,
    QLabel,
    QVBoxLayout,
    QWidget,
)

from app.theme import Theme


class AskingDialog(QDialog):
    """Fields go into `form`. `refuse` says what is wrong and keeps the dialog open."""

    def __init__(self, title: str, accept_word: str, theme: Theme, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.theme = theme
        self.setWindowTitle(title)
        self.form = QFormLayout()
        self.form.setSpacing(theme.px(8))
        self.form.setFieldGrowthPolicy(QFormLayout.FieldGrowthPolicy.ExpandingFieldsGrow)
        self.form.setLabelAlignment(Qt.AlignmentFlag.AlignLeft | Qt.AlignmentFlag.AlignVCenter)
        self.wrong = QLabel()
        self.wrong.setWordWrap(True)
        self.wrong.setTextFormat(Qt.TextFormat.PlainText)
        self.wrong.setProperty("role", "strong")
        self.buttons = QDialogButtonBox()
        self.go = self.buttons.addButton(accept_word, QDialogButtonBox.ButtonRole.AcceptRole)
        self.go.setProperty("role", "primary")
        self.leave = self.buttons.addButton(self.tr("Leave"), QDialogButtonBox.ButtonRole.RejectRole)
        self.buttons.accepted.connect(self.submit)
        self.buttons.rejected.connect(self.reject)
        column = QVBoxLayout(self)
        column.setContentsMargins(theme.px(20), theme.px(16), theme.px(20), theme.px(16))
        column.setSpacing(theme.px(10))
        self.body = QVBoxLayout()
        column.addLayout(self.body)
        self._column = column
        column.addLayout(self.form)
        column.addWidget(self.wrong)
        column.addStretch(1)
        column.addWidget(self.buttons)

    def field(self, label: str, widget: QWidget) -> None:
        """A field with its label; the label is its accessible name."""
        widget.setAccessibleName(label)
        self.form.addRow(label, widget)

    def add_body(self, widget: QWidget) -> None:
        """A widget over the fields, which takes the room there is."""
        self.body.addWidget(widget)
        self._column.setStretchFactor(self.body, 1)
        self._column.setStretch(3, 0)

    def showEvent(self, event: QShowEvent) -> None:
        """Tall enough for every wrapped line: a form that cuts its words says something else."""
        super().showEvent(event)
        self.grow()

    def grow(self) -> None:
        """Become tall enough for what stands there now."""
        needed = self._column.totalHeightForWidth(self.width())
        if needed > self.height():
            self.resize(self.width(), needed)

    def submit(self) -> None:
        """What the accepting button does; the usual one closes the dialog."""
        self.accept()

    def refuse(self, text: str) -> None:
        """Say what is wrong."""
        self.wrong.setText(text)
        self.grow()
        self.go.setEnabled(True)
