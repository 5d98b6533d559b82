"""A comparison as a picture by itself: the courses, and above them whose line is which."""

from __future__ import annotations

from dataclasses import dataclass

from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QColor, QPainter

from app.chart.picture_title import draw_picture_title
from app.compare.course_chart import CourseChart, pen_of
from app.compare.courses import Comparison
from app.look.theme import Theme

_ROW = 22


@dataclass(frozen=True, slots=True)
class ComparisonPicture:
    """Paints a comparison with its names. Needs a QApplication."""

    comparison: Comparison
    theme: Theme
    title: str

    def paint_on(self, painter: QPainter, width: int, height: int) -> None:
        """Paint at the painter's origin on a surface of this size."""
        px, theme = self.theme.px, self.theme
        names_top, left = draw_picture_title(painter, theme, self.title, width), px(16)
        columns = 2 if width >= px(900) else 1
        names = list(self.comparison.names.items())
        per = -(-len(names) // columns)
        each = (width - 2 * left) / columns
        for n, (number, name) in enumerate(names):
            self._name(painter, number, name, left + n // per * each, names_top + n % per * px(_ROW), each)
        top = names_top + per * px(_ROW) + px(8)
        chart = CourseChart(theme)
        chart.show_comparison(self.comparison)
        painter.save()
        painter.translate(left, top)
        chart.paint_on(painter, width - 2 * left, height - top - px(8))
        painter.restore()
        chart.deleteLater()

    def _name(self, painter: QPainter, number: int, name: str, x: float, y: float, width: float) -> None:
        px, theme = self.theme.px, self.theme
        middle = y + px(_ROW) / 2
        painter.setPen(pen_of(theme, number))
        painter.drawLine(QPointF(x, middle), QPointF(x + px(36), middle))
        painter.setPen(QColor(theme.colours.ink))
        painter.setFont(theme.font())
        room = QRectF(x + px(44), y, width - px(48), px(_ROW))
        painter.drawText(room, Qt.AlignmentFlag.AlignLeft | Qt.AlignmentFlag.AlignVCenter, f"{number}  {name}")
