"""Shapes that carry meaning without colour, drawn with QPainter in pixels.

State of a gas is its outline: severe a triangle pointing down, acidotic a square, resolved a circle, not
known a cross. Verdict is how that outline is filled (`gas_mark`) and a sign of its own beside words
(`verdict_sign`). Tier is a pennant: hollow, filled, filled with two tails.
"""

import re
from math import cos, pi, sin

from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QBrush, QColor, QPainter, QPainterPath, QPen, QPolygonF

from app.chart.shapes import Look
from app.look.theme import RADIUS, GasState, Theme, Tier, Verdict

ELLIPSIS = "\N{HORIZONTAL ELLIPSIS}"
_PART_ENDS = re.compile(r"[;,](?=\s)")


def solid_pen(colour: QColor | str, width: float = 1.0) -> QPen:
    """A plain pen with square joints that keep small shapes crisp."""
    pen = QPen(QColor(colour), width)
    pen.setJoinStyle(Qt.PenJoinStyle.MiterJoin)
    return pen


def gas_outline(state: GasState, x: float, y: float, size: float) -> QPainterPath:
    """Outline of a gas of `size` pixels around (x, y); areas look alike between the shapes."""
    path, half = QPainterPath(), size / 2
    if state is GasState.SEVERE:
        w, h = half * 1.2, half * 1.05
        corners = [(-w, -h * 0.9), (w, -h * 0.9), (0.0, h * 1.15)]
        path.addPolygon(QPolygonF([QPointF(x + px, y + py) for px, py in corners]))
        path.closeSubpath()
    elif state is GasState.ACIDOTIC:
        path.addRect(QRectF(x - half * 0.9, y - half * 0.9, size * 0.9, size * 0.9))
    elif state is GasState.RESOLVED:
        path.addEllipse(QPointF(x, y), half, half)
    else:
        arm = half * 0.38
        corners = [(-arm, -half), (arm, -half), (arm, -arm), (half, -arm), (half, arm), (arm, arm)]
        corners += [(-px, -py) for px, py in corners]
        path.addPolygon(QPolygonF([QPointF(x + px, y + py) for px, py in corners]))
        path.closeSubpath()
    return path


def gas_mark(
    painter: QPainter,
    theme: Theme,
    state: GasState,
    verdict: Verdict | None,
    x: float,
    y: float,
    size: float,
    doubtful: bool = False,
) -> None:
    """A gas: outline by state, fill by verdict. A doubtful one stands in a dotted ring."""
    c = theme.colours
    unjudged = c.ink if state is GasState.SEVERE else c.ink_quiet  # a severe gas is never quiet
    colour = QColor(c.verdicts[verdict] if verdict is not None else unjudged)
    path = gas_outline(state, x, y, size)
    painter.save()
    painter.setRenderHint(QPainter.RenderHint.Antialiasing)
    painter.setPen(Qt.PenStyle.NoPen)
    painter.setBrush(QColor(c.raised))
    painter.drawPath(gas_outline(state, x, y, size + 4))  # a rim parts it from what lies below
    _fill(painter, path, verdict, colour, QColor(c.raised), x, y, size)
    pen = solid_pen(colour, 1.6)
    if verdict is Verdict.NOT_YET_KNOWN:
        pen.setDashPattern([1.6, 1.4])
    painter.setPen(pen)
    painter.setBrush(Qt.BrushStyle.NoBrush)
    painter.drawPath(path)
    if doubtful:
        ring = solid_pen(c.ink, 1.2)
        ring.setDashPattern([1.5, 2.0])
        painter.setPen(ring)
        painter.drawEllipse(QPointF(x, y), size * 0.85, size * 0.85)
    painter.restore()


def _fill(
    painter: QPainter,
    path: QPainterPath,
    verdict: Verdict | None,
    colour: QColor,
    ground: QColor,
    x: float,
    y: float,
    size: float,
) -> None:
    full = verdict in (Verdict.BETTER, Verdict.WORSE)
    painter.setBrush(colour if full else ground)
    painter.drawPath(path)
    painter.save()
    painter.setClipPath(path)
    if verdict is Verdict.WORSE:  # a full shape with an arrowhead pointing down; a bar would read as no entry
        painter.setPen(solid_pen(ground, max(1.6, size * 0.15)))
        head = [(-0.3, -0.18), (0.0, 0.12), (0.3, -0.18)]
        painter.setBrush(Qt.BrushStyle.NoBrush)
        painter.drawPolyline(QPolygonF([QPointF(x + dx * size, y + dy * size) for dx, dy in head]))
    elif verdict is Verdict.MIXED:  # half full
        painter.fillRect(QRectF(x - size, y - size, size, size * 2), colour)
    elif verdict is Verdict.NO_CLEAR_CHANGE:  # two bars
        for dy in (-0.22, 0.1):
            painter.fillRect(QRectF(x - size * 0.25, y + size * dy, size * 0.5, size * 0.13), colour)
    elif verdict is Verdict.OVER_CORRECTION:  # a full core
        painter.setBrush(colour)
        painter.drawEllipse(QPointF(x, y), size * 0.2, size * 0.2)
    elif verdict is Verdict.NOT_JUDGED:  # a short dash
        painter.fillRect(QRectF(x - size * 0.18, y - size * 0.06, size * 0.36, size * 0.12), colour)
    painter.restore()


def verdict_sign(painter: QPainter, theme: Theme, verdict: Verdict, box: QRectF) -> None:
    """The sign beside a verdict's word: rising, falling, both, level, overshot, waiting, a dash in brackets."""
    colour = QColor(theme.colours.verdicts[verdict])
    x, y, r = box.center().x(), box.center().y(), min(box.width(), box.height()) / 2
    painter.save()
    painter.setRenderHint(QPainter.RenderHint.Antialiasing)
    pen = solid_pen(colour, max(1.6, r * 0.3))
    pen.setCapStyle(Qt.PenCapStyle.RoundCap)
    pen.setJoinStyle(Qt.PenJoinStyle.RoundJoin)
    painter.setPen(pen)
    painter.setBrush(Qt.BrushStyle.NoBrush)
    for line in _sign_lines(verdict):
        painter.drawPolyline(QPolygonF([QPointF(x + px * r, y + py * r) for px, py in line]))
    if verdict is Verdict.NOT_YET_KNOWN:
        painter.setBrush(colour)
        painter.setPen(Qt.PenStyle.NoPen)
        for dx in (-0.7, 0.0, 0.7):
            painter.drawEllipse(QPointF(x + dx * r, y), r * 0.22, r * 0.22)
    painter.restore()


def _sign_lines(verdict: Verdict) -> tuple[tuple[tuple[float, float], ...], ...]:
    rise = ((-0.8, 0.7), (0.0, -0.1), (0.8, -0.8)), ((0.1, -0.8), (0.8, -0.8), (0.8, -0.1))
    fall = ((-0.8, -0.7), (0.0, 0.1), (0.8, 0.8)), ((0.1, 0.8), (0.8, 0.8), (0.8, 0.1))
    return {
        Verdict.BETTER: rise,
        Verdict.WORSE: fall,
        Verdict.MIXED: (((-0.9, 0.0), (-0.45, -0.7), (0.0, 0.0), (0.45, 0.7), (0.9, 0.0)),),
        Verdict.NO_CLEAR_CHANGE: (((-0.8, -0.35), (0.8, -0.35)), ((-0.8, 0.35), (0.8, 0.35))),
        Verdict.OVER_CORRECTION: (
            ((-0.8, -0.3), (0.8, -0.3)),
            ((0.0, 0.9), (0.0, -0.9)),
            ((-0.4, -0.5), (0.0, -0.95), (0.4, -0.5)),
        ),
        Verdict.NOT_JUDGED: (
            ((-0.5, -0.7), (-0.85, -0.7), (-0.85, 0.7), (-0.5, 0.7)),
            ((0.5, -0.7), (0.85, -0.7), (0.85, 0.7), (0.5, 0.7)),
            ((-0.3, 0.0), (0.3, 0.0)),
        ),
    }.get(verdict, ())


def pennant(
    painter: QPainter, theme: Theme, tier: Tier, x: float, foot: float, size: float, quiet: bool = False
) -> None:
    """A flag on its pole, the pole standing at (x, foot), `size` pixels high."""
    c = theme.colours
    colour = QColor(c.ink_quiet if quiet else c.tiers[tier])
    top, h, w = foot - size, size * 0.62, size * 0.85
    cloth = QPainterPath(QPointF(x, top))
    tails = [(w, 0.0), (w * 0.68, h / 2), (w, h)] if tier is Tier.ESCALATE else [(w, h / 2)]
    for px, py in [*tails, (0.0, h)]:
        cloth.lineTo(x + px, top + py)
    cloth.closeSubpath()
    painter.save()
    painter.setRenderHint(QPainter.RenderHint.Antialiasing)
    hollow = quiet or tier is Tier.REMARK
    loudest = tier is Tier.ESCALATE and not quiet
    painter.setPen(solid_pen(c.ink if loudest else colour, 1.5))  # an edge of ink: the strongest where no hue is seen
    painter.setBrush(QColor(c.raised) if hollow else colour)
    painter.drawPath(cloth)
    painter.drawLine(QPointF(x, top), QPointF(x, foot))
    painter.restore()


def spot(painter: QPainter, ink: QColor, ground: QColor, look: Look, x: float, y: float, size: float) -> None:
    """A value taken now and then. Fresh: full. Doubtful: hollow, with a question's dotted ring. Corrected: a
    full diamond in a frame. Carried: a short bar. Disputed: two half circles apart."""
    r = size / 2
    painter.setPen(solid_pen(ink, 1.5))
    painter.setBrush(ink)
    at = QPointF(x, y)
    if look is Look.FRESH:
        painter.drawEllipse(at, r, r)
    elif look is Look.DOUBTFUL:
        painter.setBrush(ground)
        pen = solid_pen(ink, 1.5)
        pen.setDashPattern([1.6, 1.6])
        painter.setPen(pen)
        painter.drawEllipse(at, r * 1.25, r * 1.25)
        painter.setPen(Qt.PenStyle.NoPen)
        painter.setBrush(ink)
        painter.drawEllipse(at, r * 0.4, r * 0.4)
    elif look is Look.CORRECTED:
        painter.setBrush(ground)
        painter.drawPolygon(_polygon(at, r * 1.7, 4))
        painter.setBrush(ink)
        painter.drawPolygon(_polygon(at, r * 0.85, 4))
    elif look is Look.CARRIED:
        painter.setBrush(ground)
        painter.drawRect(QRectF(x - r * 1.4, y - r * 0.45, r * 2.8, r * 0.9))
    else:
        painter.setBrush(ground)
        painter.drawEllipse(QPointF(x, y - r * 0.7), r * 0.85, r * 0.85)
        painter.setBrush(ink)
        painter.drawEllipse(QPointF(x, y + r * 0.7), r * 0.85, r * 0.85)


def _polygon(at: QPointF, radius: float, corners: int) -> QPolygonF:
    turns = (2 * pi * k / corners for k in range(corners))
    return QPolygonF([QPointF(at.x() + radius * cos(a), at.y() + radius * sin(a)) for a in turns])


def draw_card(painter: QPainter, theme: Theme, rect: QRectF) -> None:
    """A soft raised card with a hairline."""
    painter.save()
    painter.setRenderHint(QPainter.RenderHint.Antialiasing)
    painter.setPen(QPen(QColor(theme.colours.line), 1))
    painter.setBrush(QColor(theme.colours.raised))
    painter.drawRoundedRect(rect.adjusted(0.5, 0.5, -0.5, -0.5), RADIUS, RADIUS)
    painter.restore()


def hatch(ink: QColor) -> QBrush:
    """Diagonal lines for what is uncertain."""
    return QBrush(ink, Qt.BrushStyle.BDiagPattern)


def whole_or_none(painter: QPainter, text: str, width: float) -> str:
    """The text if it fits, else nothing; for words that an ellipsis would make unreadable."""
    return text if painter.fontMetrics().horizontalAdvance(text) <= width else ""


def fitted(painter: QPainter, text: str, width: float) -> str:
    """The text if it fits, with an ellipsis if most of it does, else nothing: a stump says less than a mark.

    A number is never cut: half of it would be another number.
    """
    metrics = painter.fontMetrics()
    whole = metrics.horizontalAdvance(text)
    if whole <= width:
        return text
    if width < whole * 0.6:
        return ""
    cut = metrics.elidedText(text, Qt.TextElideMode.ElideRight, int(width))
    return _whole_numbers(text, cut)


def cut_between(painter: QPainter, text: str, width: float) -> str:
    """The text if it fits, else as many of its parts as do (they end at a comma or a semicolon), else its beginning:
    never nothing, and no part cut in the middle where a part has room."""
    metrics = painter.fontMetrics()
    if metrics.horizontalAdvance(text) <= width:
        return text
    ends = [m.start() for m in _PART_ENDS.finditer(text)]
    for end in reversed(ends):
        if metrics.horizontalAdvance(part := f"{text[:end]} {ELLIPSIS}") <= width:
            return part
    return _whole_numbers(text, metrics.elidedText(text, Qt.TextElideMode.ElideRight, int(width)))


def _whole_numbers(text: str, cut: str) -> str:
    """An elided text without its last word where that is a number whose end is missing."""
    kept = cut.removesuffix(ELLIPSIS)
    before, _, last = kept.rpartition(" ")
    goes_on = len(kept) < len(text) and text[len(kept)] not in " ;,"
    return f"{before} {ELLIPSIS}" if before and goes_on and any(x.isdigit() for x in last) else cut
