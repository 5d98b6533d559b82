"""What stands in a panel's title line besides its title: what its bands mean, and why a stretch is in doubt."""

from math import inf

from PySide6.QtCore import QRectF, Qt
from PySide6.QtGui import QColor, QPainter

from app.chart.marks import hatch, solid_pen
from app.chart.row import FRONT, ClockRow, Layer
from app.chart.shapes import PanelSpec

_APART = 240
"""Pixels at 100 % between two stretches of one doubt from which its reason is said again."""
_LEFT = Qt.AlignmentFlag.AlignLeft | Qt.AlignmentFlag.AlignVCenter


class PanelHeader:
    """Words in the title line, so that none of them covers a value."""

    def __init__(self, row: ClockRow, spec: PanelSpec) -> None:
        self.row, self.spec = row, spec
        self.layer = Layer(row.item, FRONT, self._area, self._draw, clipped=True)

    def _area(self) -> QRectF:
        view = self.row.view
        return QRectF(view.pos().x(), 0, view.rect().width(), self.row.theme.px(28))

    def _draw(self, painter: QPainter) -> None:
        row, spec, theme = self.row, self.spec, self.row.theme
        bold = row.metrics(bold=True, size=theme.type.body)
        taken = [(0.0, bold.horizontalAdvance(row.title) + theme.px(24))]
        painter.setFont(theme.font(theme.type.caption))
        painter.translate(self._area().left(), 0)
        key = taken[0][1]
        for word, dashed in [(b.word, False) for b in spec.bands] + [(a.word, True) for a in spec.areas]:
            if word:
                key += self._draw_key(painter, word, key, dashed=dashed)
        taken.append((taken[0][1], key))
        said: dict[str, float] = {}
        for trace in spec.traces:
            for span in trace.doubts:
                x = float(row.frame().x(row.seconds(span.start)))
                end = float(row.frame().x(row.seconds(span.end)))
                if x - said.get(span.word, -inf) < theme.px(_APART):
                    continue  # said just before
                if self._draw_doubt(painter, span.word, x, end, taken):
                    said[span.word] = max(end, taken[-1][1])

    def _draw_key(self, painter: QPainter, word: str, x: float, *, dashed: bool) -> float:
        """A swatch and its word; returns the pixels taken."""
        theme, c, metrics = self.row.theme, self.row.theme.colours, painter.fontMetrics()
        swatch = QRectF(round(x) + 0.5, theme.px(9) + 0.5, theme.px(14), theme.px(9))
        painter.setBrush(theme.colour("ink_quiet", 0.12) if dashed else QColor(c.target))
        pen = solid_pen(c.ink_quiet if dashed else c.edge, 1.0)
        if dashed:
            pen.setDashPattern([2, 2])
        painter.setPen(pen)
        painter.drawRect(swatch)
        painter.setPen(QColor(c.ink_quiet))
        left = swatch.right() + theme.px(6)
        width = metrics.horizontalAdvance(word)
        painter.drawText(QRectF(left, 0, width + 2, theme.px(28)), _LEFT, word)
        return left + width + theme.px(20) - x

    def _draw_doubt(
        self, painter: QPainter, word: str, x: float, end: float, taken: list[tuple[float, float]]
    ) -> bool:
        """The reason over the hatched stretch, moved along the line to where it can stand; whether it could."""
        theme, frame = self.row.theme, self.row.frame()
        width = painter.fontMetrics().horizontalAdvance(word) + theme.px(20)
        if end < 0 or x > frame.width or not word:
            return False
        left = min(max(x, 0.0), frame.width - width)
        for a, b in sorted(taken):
            if left < b and left + width > a:
                left = b
        if left + width > frame.width or left > max(end, x + theme.px(120)):
            return False  # no room near its stretch; the readout says it
        taken.append((left, left + width))
        painter.fillRect(QRectF(left, theme.px(9), theme.px(14), theme.px(10)), hatch(QColor(theme.colours.edge)))
        painter.setPen(QColor(theme.colours.ink_quiet))
        painter.drawText(QRectF(left + theme.px(20), 0, width, theme.px(28)), _LEFT, word)
        return True
