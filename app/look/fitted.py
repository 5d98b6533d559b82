"""Dialogs that fit the window they belong to, however large the text: what does not fit rolls up and down."""

from __future__ import annotations

from PySide6.QtCore import QSize, Qt
from PySide6.QtGui import QShowEvent
from PySide6.QtWidgets import QDialog, QFrame, QScrollArea, QWidget

from app.look.theme import Theme

MARGIN = 24
"""Pixels that a dialog leaves of its window's width and height."""
LEAST = QSize(160, 80)


def room_for(dialog: QWidget) -> QSize:
    """The largest size a dialog may take: inside its window, so that its buttons can always be reached."""
    parent = dialog.parentWidget()
    room = parent.window().size() if parent is not None else dialog.screen().availableGeometry().size()
    return QSize(room.width() - MARGIN, room.height() - MARGIN)


def fit(dialog: QWidget, theme: Theme, width: int, height: int) -> None:
    """Take the size that is wanted at 100 %, as far as there is room."""
    dialog.resize(QSize(theme.px(width), theme.px(height)).boundedTo(room_for(dialog)))


class FittedDialog(QDialog):
    """A dialog that never outgrows its window."""

    def showEvent(self, event: QShowEvent) -> None:
        super().showEvent(event)
        self.resize(self.size().boundedTo(room_for(self)))


class RollArea(QScrollArea):
    """Rolls what is inside up and down where it does not fit, never sideways."""

    def __init__(self, inside: QWidget) -> None:
        super().__init__()
        self._inside = inside
        self.setWidgetResizable(True)
        self.setFrameShape(QFrame.Shape.NoFrame)
        self.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self.setFocusPolicy(Qt.FocusPolicy.NoFocus)  # Tab goes to what is inside and brings it into view
        self.setWidget(inside)

    def sizeHint(self) -> QSize:
        """As large as what is inside would like to be."""
        return self._inside.sizeHint()

    def minimumSizeHint(self) -> QSize:
        return QSize(self._inside.minimumSizeHint().width(), LEAST.height())
