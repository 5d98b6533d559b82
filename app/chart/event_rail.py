"""Events on a rail: every tick stands at the top, words hang under the ticks, so that no tick runs through a word."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace

from PySide6.QtCore import QRectF, Qt
from PySide6.QtGui import QColor, QFontMetricsF, QPainter

from app.chart.shapes import Tick
from app.look.theme import Theme

CAPS = (1.0, 0.26, 0.17, 0.11)
"""How much of the row one event's words may take, widest first: a long note must not silence its neighbours."""
LEAST = 36
"""Pixels at 100 % under which a cut word says less than its tick alone."""


@dataclass(frozen=True, slots=True)
class Placed:
    """One event's word: where it begins, on which line, and as much of it as there is room for."""

    x: float
    line: int
    word: str
    width: float
    doubtful: bool
    whole: str


def placed_words(
    places: Sequence[tuple[Tick, float]],
    metrics: QFontMetricsF,
    left: float,
    right: float,
    *,
    lines: int,
    gap: float,
    least: float,
) -> tuple[Placed, ...]:
    """Words of the ticks inside (left, right), none over another. Of the widths a word may have, the widest that
    lets most events speak; what is cut ends in an ellipsis."""
    seen = [(tick, x) for tick, x in places if left <= x <= right and tick.word]
    best: tuple[Placed, ...] = ()
    for cap in CAPS:
        found = _with_cap(seen, metrics, right, (right - left) * cap, lines, gap, least)
        if len(found) > len(best):
            best = found
        if len(best) == len(seen):
            break
    return tuple(_grown(p, best, metrics, right, gap) for p in best)


def _grown(p: Placed, all_placed: Sequence[Placed], metrics: QFontMetricsF, right: float, gap: float) -> Placed:
    """A cut word takes the room that is left before the next one on its line."""
    end = min((q.x - gap for q in all_placed if q.line == p.line and q.x > p.x), default=right)
    room = min(end, right) - p.x
    whole = metrics.horizontalAdvance(p.whole)
    if whole <= room:
        return replace(p, word=p.whole, width=whole)
    return replace(p, word=metrics.elidedText(p.whole, Qt.TextElideMode.ElideRight, room), width=max(room, 0.0))


def _with_cap(
    seen: Sequence[tuple[Tick, float]],
    metrics: QFontMetricsF,
    right: float,
    cap: float,
    lines: int,
    gap: float,
    least: float,
) -> tuple[Placed, ...]:
    ends = [float("-inf")] * lines
    found = []
    for tick, x in seen:
        line = next((n for n, end in enumerate(ends) if end <= x), None)
        room = min(cap, right - x)
        whole = metrics.horizontalAdvance(tick.word)
        if line is None or (whole > room and room < least):
            continue
        word = tick.word if whole <= room else metrics.elidedText(tick.word, Qt.TextElideMode.ElideRight, room)
        width = min(whole, room)
        found.append(Placed(x, line, word, width, tick.doubtful, tick.word))
        ends[line] = x + width + gap
    return tuple(found)


def draw_on_rail(
    painter: QPainter, theme: Theme, area: QRectF, ticks: Sequence[Tick], column: Callable[[int], float], lines: int
) -> None:
    """Ticks on a rail at the top of an area, their words on lines under it."""
    c, px = theme.colours, theme.px
    painter.setFont(theme.font(theme.type.caption))
    places = [(tick, round(column(tick.at))) for tick in ticks]
    rail = px(8)
    for _, x in places:
        if area.left() <= x <= area.right():
            painter.fillRect(QRectF(x, area.top(), 2, rail), QColor(c.ink_quiet))
    height = (area.height() - rail) / lines
    metrics = QFontMetricsF(painter.font())
    for p in placed_words(places, metrics, area.left(), area.right(), lines=lines, gap=px(10), least=px(LEAST)):
        painter.setPen(QColor(c.ink_quiet if p.doubtful else c.ink))
        room = QRectF(p.x, area.top() + rail + p.line * height, p.width + 2, height)
        painter.drawText(room, Qt.AlignmentFlag.AlignLeft | Qt.AlignmentFlag.AlignVCenter, p.word)
