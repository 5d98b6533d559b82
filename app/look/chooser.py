"""A field that offers choices, with a drawn arrow: the style sheet that rounds it takes Qt's own away."""

from __future__ import annotations

from PySide6.QtCore import QPointF, Qt
from PySide6.QtGui import QPainter, QPaintEvent, QPalette, QPen, QPolygonF
from PySide6.QtWidgets import QComboBox, QSizePolicy


class Chooser(QComboBox):
    """A combo box as wide as its row."""

    def __init__(self) -> None:
        super().__init__()
        self.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Fixed)

    def paintEvent(self, event: QPaintEvent) -> None:
        super().paintEvent(event)
        painter = QPainter(self)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        group = QPalette.ColorGroup.Active if self.isEnabled() else QPalette.ColorGroup.Disabled
        pen = QPen(self.palette().color(group, QPalette.ColorRole.Text), 1.6)
        pen.setCapStyle(Qt.PenCapStyle.RoundCap)
        painter.setPen(pen)
        x, y, half = self.width() - self.height() / 2, self.height() / 2, self.height() / 9
        painter.drawPolyline(
            QPolygonF([QPointF(x - half, y - half / 2), QPointF(x, y + half / 2), QPointF(x + half, y - half / 2)])
        )
        painter.end()
