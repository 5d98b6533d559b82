"""Small widgets that draw one sign: a verdict, the state of a gas, a tier. Always beside its word."""

from __future__ import annotations

from PySide6.QtCore import QRectF, QSize, Qt
from PySide6.QtGui import QPainter, QPaintEvent
from PySide6.QtWidgets import QWidget

from app.chart.marks import gas_mark, pennant, verdict_sign
from app.look.theme import GasState, Theme, Tier, Verdict

What = Verdict | Tier | GasState


class Sign(QWidget):
    """One sign, as high as a line of text. Its word stands beside it, so it is silent to screen readers."""

    def __init__(
        self,
        theme: Theme,
        what: What,
        *,
        verdict: Verdict | None = None,
        quiet: bool = False,
        doubtful: bool = False,
    ) -> None:
        super().__init__()
        self._theme, self._what, self._verdict, self._quiet = theme, what, verdict, quiet
        self._doubtful = doubtful
        self.setFixedSize(self.sizeHint())
        self.setAttribute(Qt.WidgetAttribute.WA_TransparentForMouseEvents)

    def sizeHint(self) -> QSize:
        side = self._theme.px(18)
        return QSize(side, side)

    def paintEvent(self, event: QPaintEvent) -> None:  # noqa: ARG002
        painter = QPainter(self)
        side = float(self.width())
        middle = side / 2
        if isinstance(self._what, Verdict):
            inset = side * 0.15
            verdict_sign(painter, self._theme, self._what, QRectF(inset, inset, side - 2 * inset, side - 2 * inset))
        elif isinstance(self._what, Tier):
            pennant(painter, self._theme, self._what, side * 0.14, side * 0.94, side * 0.86, self._quiet)
        else:
            size = side * (0.54 if self._doubtful else 0.62)  # the ring of a doubt has its room
            gas_mark(painter, self._theme, self._what, self._verdict, middle, middle, size, self._doubtful)
        painter.end()
