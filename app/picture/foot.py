"""The caution under a picture: a picture goes where the program does not, and must say there what it is not."""

from __future__ import annotations

from dataclasses import dataclass

from PySide6.QtCore import QRectF, Qt
from PySide6.QtGui import QColor, QFontMetricsF, QPainter

from app.chart.render import Spec, paint_chart
from app.look.theme import Theme
from app.telling.caution_texts import CAUTION

_WRAP = Qt.AlignmentFlag.AlignLeft | Qt.AlignmentFlag.AlignTop | Qt.TextFlag.TextWordWrap


@dataclass(frozen=True, slots=True)
class Cautioned:
    """A picture's content with the caution in small print under it. Needs a QApplication."""

    spec: Spec
    theme: Theme

    def paint_on(self, painter: QPainter, width: int, height: int) -> None:
        """Paint at the painter's origin on a surface of this size."""
        px, theme = self.theme.px, self.theme
        font, wide = theme.font(theme.type.caption), width - px(32)
        room = QRectF(0, 0, wide, height)
        high = round(QFontMetricsF(font).boundingRect(room, int(_WRAP), CAUTION).height()) + px(10)
        painter.save()
        paint_chart(self.spec, theme, painter, width, height - high, painter.worldTransform().m11())
        painter.restore()
        painter.setFont(font)
        painter.setPen(QColor(theme.colours.ink_quiet))
        painter.drawText(QRectF(px(16), height - high + px(2), wide, high), int(_WRAP), CAUTION)
