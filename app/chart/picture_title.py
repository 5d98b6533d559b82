"""The line above a chart that stands by itself, so that it is not taken for another patient's or another time's."""

from PySide6.QtCore import QRectF, Qt
from PySide6.QtGui import QColor, QPainter

from app.chart.marks import fitted
from app.look.theme import Theme


def draw_picture_title(painter: QPainter, theme: Theme, title: str, width: int) -> int:
    """Write a title over a picture of a width in pixels, shortened where it is too long for it; the pixels it takes
    from the top."""
    px = theme.px
    painter.setPen(QColor(theme.colours.ink))
    painter.setFont(theme.font(theme.type.emphasis, bold=True))
    room = QRectF(px(16), px(8), width - px(32), px(26))
    painter.drawText(room, Qt.AlignmentFlag.AlignLeft, fitted(painter, title, room.width()))
    return px(38)
