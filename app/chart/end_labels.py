"""Names at the right end of the lines, in place of a legend: swatch, name, value under the crosshair, unit."""

from dataclasses import dataclass

from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QColor, QFontMetricsF, QPainter

from app.chart.marks import solid_pen
from app.chart.shapes import Trace
from app.look.theme import Theme


@dataclass(frozen=True, slots=True)
class EndLabel:
    """One trace's label; y is the height of its last value in the area's pixels, None: no value."""

    trace: Trace
    ink: QColor
    spotted: bool
    y: float | None
    value: str


def label_width(theme: Theme, trace: Trace) -> int:
    """Pixels for the label with a value of five figures in it."""
    bold, plain = (QFontMetricsF(theme.font(theme.type.caption, bold=b)) for b in (True, False))
    words = bold.horizontalAdvance(trace.name + " ") + bold.horizontalAdvance("000 ")
    return round(words + plain.horizontalAdvance(trace.unit)) + theme.px(40)


def draw_end_labels(painter: QPainter, theme: Theme, area: QRectF, labels: list[EndLabel]) -> None:
    """Each label as near to its line's end as the others allow."""
    step = float(theme.px(18))
    wanted = [area.height() if label.y is None else min(max(label.y, 0.0), area.height()) for label in labels]
    for label, want, y in zip(labels, wanted, spread(wanted, step, area.height()), strict=True):
        _draw(painter, theme, area, label, want, y)


def spread(wanted: list[float], step: float, height: float) -> list[float]:
    """Heights near the wanted ones, `step` apart and inside the area as far as they fit.

    >>> spread([10.0, 12.0], 10.0, 100.0)
    [6.0, 16.0]
    """
    order = sorted(range(len(wanted)), key=lambda i: wanted[i])
    groups: list[tuple[list[int], float]] = []  # members and their common middle
    for i in order:
        members, middle = [i], _inside(wanted[i], 1, step, height)
        while groups and middle - step * len(members) / 2 < groups[-1][1] + step * len(groups[-1][0]) / 2:
            before, _ = groups.pop()
            members = before + members
            middle = _inside(sum(wanted[k] for k in members) / len(members), len(members), step, height)
        groups.append((members, middle))
    placed = [0.0] * len(wanted)
    for members, middle in groups:
        for n, i in enumerate(members):
            placed[i] = middle + (n - (len(members) - 1) / 2) * step
    return placed


def _inside(middle: float, count: int, step: float, height: float) -> float:
    half = step * (count - 1) / 2
    return height / 2 if 2 * half > height else min(max(middle, half), height - half)


def _draw(painter: QPainter, theme: Theme, area: QRectF, label: EndLabel, want: float, y: float) -> None:
    c = theme.colours
    left, reach = area.left(), theme.px(14)
    at = area.top() + y
    painter.save()
    painter.setRenderHint(QPainter.RenderHint.Antialiasing)
    if label.y is not None:
        painter.setPen(solid_pen(label.ink, 1.0))
        painter.drawLine(QPointF(left + 2, area.top() + want), QPointF(left + reach, at))
    painter.setPen(solid_pen(label.ink, 2.0))
    painter.setBrush(label.ink)
    x = left + reach + theme.px(2)
    if label.spotted:
        painter.drawEllipse(QPointF(x + theme.px(5), at), theme.px(3), theme.px(3))
    else:
        painter.drawLine(QPointF(x, at), QPointF(x + theme.px(10), at))
    painter.restore()
    x += theme.px(16)
    height = theme.px(20)
    for word, bold, colour in (
        (label.trace.name, True, c.ink),
        (label.value, False, c.ink),
        (label.trace.unit if label.trace.unit != label.trace.name else "", False, c.ink_quiet),
    ):
        if word:
            painter.setFont(theme.font(theme.type.caption, bold=bold))
            painter.setPen(QColor(colour))
            room = QRectF(x, at - height / 2, area.right() - x, height)
            painter.drawText(room, Qt.AlignmentFlag.AlignLeft | Qt.AlignmentFlag.AlignVCenter, word)
            x += painter.fontMetrics().horizontalAdvance(word + " ")
