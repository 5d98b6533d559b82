"""A small form: labelled fields, a line that says what is wrong, and two buttons."""

from __future__ import annotations

from itertools import pairwise

from PySide6.QtCore import Qt, QTimer
from PySide6.QtGui import QShowEvent
from PySide6.QtWidgets import (
    QDialogButtonBox,
    QFormLayout,
    QLabel,
    QStyle,
    QVBoxLayout,
    QWidget,
)

from app.look.fitted import FittedDialog, RollArea, room_for
from app.look.theme import Theme


class AskingDialog(FittedDialog):
    """Fields go into `form`. `refuse` says what is wrong and keeps the dialog open."""

    def __init__(self, title: str, accept_word: str, theme: Theme, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.theme = theme
        self.setWindowTitle(title)
        self.form = QFormLayout()
        self.form.setSpacing(theme.px(8))
        self.form.setFieldGrowthPolicy(QFormLayout.FieldGrowthPolicy.ExpandingFieldsGrow)
        self.form.setRowWrapPolicy(QFormLayout.RowWrapPolicy.WrapLongRows)
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
        inside = QWidget()
        self.body = QVBoxLayout()
        self._column = QVBoxLayout(inside)
        self._column.setContentsMargins(0, 0, 0, 0)
        self._column.setSpacing(theme.px(10))
        self._column.addLayout(self.body)
        self._column.addLayout(self.form)
        self._column.addStretch(1)
        self._inside = inside
        self.roll = RollArea(inside)
        column = self._outer = QVBoxLayout(self)
        column.setContentsMargins(theme.px(20), theme.px(16), theme.px(20), theme.px(16))
        column.setSpacing(theme.px(10))
        column.addWidget(self.roll, 1)
        column.addWidget(self.wrong)
        column.addWidget(self.buttons)

    def field(self, label: str, widget: QWidget) -> None:
        """A field with its label; the label is its accessible name."""
        widget.setAccessibleName(label)
        self.form.addRow(label_beside(label, widget), widget)

    def add_body(self, widget: QWidget) -> None:
        """A widget over the fields, which takes the room there is."""
        self.body.addWidget(widget)
        self._column.setStretchFactor(self.body, 1)
        self._column.setStretch(2, 0)

    def showEvent(self, event: QShowEvent) -> None:
        """Tall enough for every wrapped line: a form that cuts its words says something else."""
        super().showEvent(event)
        self._fields_first()
        self.grow()
        QTimer.singleShot(0, self, self.grow)  # once more when the style has told every part its size

    def _fields_first(self) -> None:
        """Tab goes through the fields, then to the buttons, and begins at the first field."""
        inside = self._inside.findChildren(QWidget)
        fields = [w for w in inside if w.focusPolicy() & Qt.FocusPolicy.TabFocus and w.isVisibleTo(self)]
        if not fields:
            return
        for before, after in pairwise((fields[-1], *self.buttons.buttons())):
            QWidget.setTabOrder(before, after)
        if self.focusWidget() is None or self.focusWidget() in self.buttons.buttons():
            fields[0].setFocus(Qt.FocusReason.TabFocusReason)

    def grow(self) -> None:
        """Become tall enough for what stands there now, as far as there is room."""
        self.wrong.setVisible(bool(self.wrong.text()))
        self._column.activate()  # parts inside parts tell a new size only then
        room = room_for(self)
        width = min(self.width(), room.width())
        self.resize(width, min(max(self._needed(width), self.height()), room.height()))

    def _needed(self, width: int) -> int:
        """The height at which nothing rolls."""
        outer = self._outer
        margins = outer.contentsMargins()
        inner = width - margins.left() - margins.right()
        bar = self.style().pixelMetric(QStyle.PixelMetric.PM_ScrollBarExtent)
        # beside a bar that once stood there: it goes only where all fits as narrow as it left it
        parts = [self._column.totalHeightForWidth(inner - bar), self.buttons.sizeHint().height()]
        if self.wrong.text():
            parts.append(self.wrong.heightForWidth(inner))
        return sum(parts) + outer.spacing() * (len(parts) - 1) + margins.top() + margins.bottom()

    def submit(self) -> None:
        """What the accepting button does; the usual one closes the dialog."""
        self.accept()

    @property
    def is_filled_in(self) -> bool:
        """Whether a person is filling it in: an answer that comes now is of one that was left before."""
        return self.isVisible() and self.go.isEnabled()

    def say(self, text: str) -> None:
        """Say something over the buttons; "" takes it back."""
        self.wrong.setText(text)
        self.grow()

    def refuse(self, text: str) -> None:
        """Say what is wrong."""
        self.say(text)
        self.go.setEnabled(True)


def label_beside(text: str, field: QWidget) -> QLabel:
    """A label that stands at the middle of its field: a form's own stays near the top of a tall one."""
    label = QLabel(text)
    label.setBuddy(field)
    field.ensurePolished()
    height = min(field.sizeHint().height(), field.maximumHeight())
    if height > 2 * label.sizeHint().height() + field.fontMetrics().height():  # a list: its name stands at its top
        label.setAlignment(Qt.AlignmentFlag.AlignTop)
    label.setMinimumHeight(height)
    return label
