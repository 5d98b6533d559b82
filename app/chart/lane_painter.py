"""Paints one lane of the ward view, and the heading over all lanes."""

from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QColor, QFont, QFontMetricsF, QPainter, QPen

from app.chart.lane_layout import LaneGeometry, Placed
from app.chart.marks import cut_between, draw_card, fitted, gas_mark, pennant, solid_pen, verdict_sign, whole_or_none
from app.chart.shapes import Lane, LaneItem, LaneKind, LanesSpec
from app.chart.time_ticks import ClockMark, date_word
from app.look.theme import GasState, Theme

_LEFT = Qt.AlignmentFlag.AlignLeft | Qt.AlignmentFlag.AlignVCenter
_DIMMED = 0.45  # ticks of settings that were in force before the mask came off; their words stand in brackets
_FULL_SUPPORT = 20.0  # cmH2O of pressure support that fill the bar


class LanePainter:
    """Paints with one theme and geometry; the painter's origin is the lane's top left corner."""

    def __init__(self, spec: LanesSpec, theme: Theme, geometry: LaneGeometry, marks: list[ClockMark]) -> None:
        self.spec, self.theme, self.g, self.marks = spec, theme, geometry, marks

    # the heading

    def draw_heading(self, painter: QPainter) -> None:
        g, theme = self.g, self.theme
        c = theme.colours
        painter.fillRect(QRectF(0, 0, g.width, g.head), QColor(c.ground))
        pad = theme.px(16)
        plate = self._now_plate(painter)
        painter.setFont(theme.font(theme.type.caption))
        painter.setPen(QColor(c.ink_quiet))
        left = max(g.left + g.clock + pad, plate.right() + pad)
        heading = whole_or_none(painter, self.spec.state_heading, g.width - left)
        painter.drawText(QRectF(left, 0, g.width - left, g.head), _LEFT, heading)
        nearest = g.left + g.clock
        for mark in self.marks:
            x = g.x(mark.at)
            painter.setFont(theme.font(theme.type.caption, bold=mark.midnight))
            width = painter.fontMetrics().horizontalAdvance(mark.label) + 2
            room = QRectF(x - width / 2, 0, width, g.head)
            outside = room.right() > g.left + g.clock + pad
            if not mark.label or outside or room.adjusted(-4, 0, 4, 0).intersects(plate):
                continue
            painter.setPen(QColor(c.ink if mark.midnight else c.ink_quiet))
            painter.drawText(room, Qt.AlignmentFlag.AlignCenter, mark.label)
            nearest = min(nearest, room.left())
        self._draw_left_date(painter, nearest)

    def _draw_left_date(self, painter: QPainter, nearest: float) -> None:
        theme = self.theme
        painter.setFont(theme.font(theme.type.caption, bold=True))
        word = date_word(self.spec.start, self.spec.zone)
        width = painter.fontMetrics().horizontalAdvance(word)
        if self.spec.lane_heading:
            painter.setFont(theme.font(theme.type.caption))
            painter.setPen(QColor(theme.colours.ink_quiet))
            room = QRectF(theme.px(16), 0, self.g.left - width - theme.px(48), self.g.head)
            painter.drawText(room, _LEFT, fitted(painter, self.spec.lane_heading, room.width()))
            painter.setFont(theme.font(theme.type.caption, bold=True))
        painter.setPen(QColor(theme.colours.ink))
        right = min(self.g.left - theme.px(8), nearest - theme.px(8))
        painter.drawText(QRectF(right - width - 2, 0, width + 2, self.g.head), _LEFT, word)

    def _now_plate(self, painter: QPainter) -> QRectF:
        spec, theme, g = self.spec, self.theme, self.g
        if spec.now is None or not spec.now_word or not g.start <= spec.now <= g.end:
            return QRectF()
        painter.setFont(theme.font(theme.type.caption, bold=True))
        width = painter.fontMetrics().horizontalAdvance(spec.now_word) + theme.px(12)
        height = theme.px(20)
        left = min(g.x(spec.now) - width / 2, g.width - width)
        plate = QRectF(round(left), (g.head - height) / 2, width, height)
        painter.save()
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        painter.setPen(Qt.PenStyle.NoPen)
        painter.setBrush(QColor(theme.colours.accent))
        painter.drawRoundedRect(plate, theme.px(4), theme.px(4))
        painter.restore()
        painter.setPen(QColor(theme.colours.on_accent))
        painter.drawText(plate, Qt.AlignmentFlag.AlignCenter, spec.now_word)
        return plate

    # a lane

    def draw_lane(
        self, painter: QPainter, lane: Lane, placed: list[Placed], chosen: bool, item: LaneItem | None, focus: bool
    ) -> None:
        g, theme = self.g, self.theme
        c = theme.colours
        card = QRectF(0, 0, g.width, g.lane)
        if lane.closed:
            painter.save()
            painter.setRenderHint(QPainter.RenderHint.Antialiasing)
            painter.setPen(QPen(QColor(c.line), 1))
            painter.drawRoundedRect(card.adjusted(0.5, 0.5, -0.5, -0.5), 8, 8)
            painter.restore()
        else:
            draw_card(painter, theme, card)
        if lane.first_word:
            painter.fillRect(QRectF(0, theme.px(10), theme.px(4), g.lane - theme.px(20)), QColor(c.accent))
        self._draw_name(painter, lane)
        painter.save()
        painter.setClipRect(QRectF(g.left - 1, 1, g.clock + 2, g.lane - 2))
        self._draw_clock(painter, lane, placed)
        painter.restore()
        self._draw_right(painter, lane)
        self._draw_now(painter)
        painter.save()
        if lane.closed:
            painter.setOpacity(0.6)
        self._draw_items(painter, lane, placed, item)
        painter.restore()
        if chosen:
            self._ring(painter, card.adjusted(1, 1, -1, -1), 2.0 if focus else 1.0)

    def _ring(self, painter: QPainter, box: QRectF, width: float) -> None:
        painter.save()
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        painter.setBrush(Qt.BrushStyle.NoBrush)
        painter.setPen(QPen(QColor(self.theme.colours.accent), width))
        painter.drawRoundedRect(box, self.theme.px(6), self.theme.px(6))
        painter.restore()

    def _ink(self, lane: Lane) -> QColor:
        return QColor(self.theme.colours.ink_quiet if lane.closed else self.theme.colours.ink)

    def _draw_name(self, painter: QPainter, lane: Lane) -> None:
        g, theme = self.g, self.theme
        pad, line = theme.px(16), g.line - theme.px(0 if g.close else 1)
        lines = 3 if lane.first_word and g.lane >= 3 * line + theme.px(4) else 2
        y = g.lane / 2 - lines * line / 2
        room = g.left - pad - theme.px(12)
        if lane.first_word and lines == 3:
            painter.setFont(theme.font(theme.type.caption, bold=True))
            painter.setPen(QColor(theme.colours.accent))
            painter.drawText(QRectF(pad, y, room, line), _LEFT, fitted(painter, lane.first_word, room))
            y += line
        painter.setFont(theme.font(theme.type.body, bold=True))
        painter.setPen(self._ink(lane))
        painter.drawText(QRectF(pad, y, room, line), _LEFT, cut_between(painter, lane.title, room))
        painter.setFont(theme.font(theme.type.caption))
        painter.setPen(QColor(theme.colours.ink_quiet))
        painter.drawText(QRectF(pad, y + line, room, line), _LEFT, cut_between(painter, lane.subtitle, room))

    def _draw_clock(self, painter: QPainter, lane: Lane, placed: list[Placed]) -> None:
        g, c = self.g, self.theme.colours
        for mark in self.marks:
            if mark.label:
                colour = c.edge if mark.midnight else c.line
                painter.fillRect(QRectF(round(g.x(mark.at)), 1, 1, g.lane - 2), QColor(colour))
        painter.fillRect(QRectF(g.left, round(g.middle), g.clock, 1), QColor(c.line))
        painter.save()
        if lane.closed:
            painter.setOpacity(0.55)
        for piece in lane.support:
            self._draw_support(painter, piece.start, piece.end, piece.pressure)
        painter.restore()
        for p in placed:
            if p.item.kind is LaneKind.BREAK:
                self._draw_break(painter, p)

    def _draw_support(self, painter: QPainter, start: int, end: int, pressure: float | None) -> None:
        g, theme = self.g, self.theme
        c = theme.colours
        a, b = max(g.x(start), g.left), min(g.x(end), g.left + g.clock)
        if b <= a:
            return
        if pressure is None:
            painter.fillRect(QRectF(a, round(g.middle) - 1, b - a, 3), QColor(c.support_edge))
        else:
            share = min(max(pressure, 0.0) / _FULL_SUPPORT, 1.0)
            half = round((theme.px(4) + share * (g.thickest - theme.px(4))) / 2)
            band = QRectF(a, round(g.middle) - half, b - a, 2 * half + 1)
            painter.fillRect(band, QColor(c.support))
            for y in (band.top(), band.bottom() - 1):
                painter.fillRect(QRectF(a, y, b - a, 1), QColor(c.support_edge))

    def _draw_break(self, painter: QPainter, placed: Placed) -> None:
        g, theme = self.g, self.theme
        c, box = theme.colours, placed.box
        thick = g.thickest + theme.px(4)
        painter.fillRect(QRectF(box.left(), g.middle - thick / 2, box.width(), thick), QColor(c.raised))
        dots = solid_pen(c.ink_quiet, 1.0)
        dots.setDashPattern([1, 3])
        painter.setPen(dots)
        y = round(g.middle) + 0.5
        painter.drawLine(QPointF(box.left(), y), QPointF(box.right(), y))
        painter.setFont(theme.font(theme.type.caption))
        word = whole_or_none(painter, placed.item.word, box.width())
        if word:
            width, height = painter.fontMetrics().horizontalAdvance(word), painter.fontMetrics().height()
            room = QRectF(box.center().x() - width / 2 - 2, g.middle - height / 2, width + 4, height)
            painter.fillRect(room, QColor(c.raised))
            painter.setPen(QColor(c.ink_quiet))
            painter.drawText(room, Qt.AlignmentFlag.AlignCenter, word)

    def _draw_items(self, painter: QPainter, lane: Lane, placed: list[Placed], chosen: LaneItem | None) -> None:
        low = [p.x for p in placed if p.item.kind is LaneKind.GAS and p.row > self.g.middle]
        taken = [(x - self.theme.px(12), x + self.theme.px(12)) for x in low]  # marks that reach into the foot
        for kind in (LaneKind.WINDOW, LaneKind.SETTING, LaneKind.FLAG, LaneKind.GAS):
            if kind is LaneKind.SETTING:
                self._draw_settings(painter, lane, placed, taken)
                continue
            for p in placed:
                if p.item.kind is kind:
                    self._draw_item(painter, p, taken)
        for p in placed:
            if p.item is chosen:
                self._ring(painter, p.box.adjusted(-1, -1, 1, 1), 2.0)

    def _draw_settings(
        self, painter: QPainter, lane: Lane, placed: list[Placed], taken: list[tuple[float, float]]
    ) -> None:
        """The newest first, so that its words win where they would collide with older ones."""
        painter.save()
        if lane.off_mask:
            painter.setOpacity(painter.opacity() * _DIMMED)
        for p in reversed(placed):
            if p.item.kind is LaneKind.SETTING:
                word = f"({p.item.word})" if lane.off_mask and p.item.word else p.item.word
                self._draw_setting(painter, p, word, taken)
        self._draw_support_words(painter, lane, taken)
        painter.restore()

    def _draw_support_words(self, painter: QPainter, lane: Lane, taken: list[tuple[float, float]]) -> None:
        top, ink = self.g.words, QColor(self.theme.colours.ink_quiet)
        painter.setFont(self.theme.font(self.theme.type.caption))
        for piece in lane.support:
            left, end = max(self.g.x(piece.start), self.g.left), self.g.x(piece.end)
            word = whole_or_none(painter, piece.word, end - left)
            self._words(painter, word, left, top, ink, taken)

    def _draw_item(self, painter: QPainter, placed: Placed, taken: list[tuple[float, float]]) -> None:
        item, theme = placed.item, self.theme
        if item.kind is LaneKind.GAS:
            state = item.state or GasState.UNKNOWN
            gas_mark(painter, theme, state, item.verdict, placed.x, placed.row, self.g.mark, item.doubtful)
        elif item.kind is LaneKind.FLAG and item.tier is not None:
            foot = self.g.flag_top + self.g.flag
            pennant(painter, theme, item.tier, placed.x, foot, self.g.flag, item.settled)
        elif item.kind is LaneKind.WINDOW:
            self._draw_window(painter, placed, taken)

    def _draw_window(self, painter: QPainter, placed: Placed, taken: list[tuple[float, float]]) -> None:
        g, theme = self.g, self.theme
        c = theme.colours
        a, b = max(placed.box.left(), g.left), min(placed.box.right(), g.left + g.clock)
        rail = round(g.words - theme.px(1 if g.close else 2)) + 0.5
        pen = solid_pen(c.accent, 1.5)
        pen.setDashPattern([3, 2])
        painter.setPen(pen)
        painter.drawLine(QPointF(a, rail), QPointF(b, rail))
        painter.setPen(solid_pen(c.accent, 1.5))
        for x in (placed.box.left(), placed.box.right()):
            if g.left <= x <= g.left + g.clock:
                painter.drawLine(QPointF(x, rail - theme.px(4)), QPointF(x, rail + 1))
        painter.setFont(theme.font(theme.type.caption))
        width = painter.fontMetrics().horizontalAdvance(placed.item.word)
        left = min(max((a + b - width) / 2, g.left), g.left + g.clock - width)
        self._words(painter, placed.item.word, left, rail + 2, QColor(c.ink), taken)

    def _draw_setting(self, painter: QPainter, placed: Placed, word: str, taken: list[tuple[float, float]]) -> None:
        g, theme = self.g, self.theme
        c = theme.colours
        foot = g.middle + g.thickest / 2 - theme.px(5)  # on the bar: under it a tick would cut its neighbour's word
        painter.fillRect(QRectF(round(placed.x), foot, 2, theme.px(7)), QColor(c.ink_quiet))
        painter.setFont(theme.font(theme.type.caption))
        left, top = placed.x + theme.px(5), g.words
        self._words(painter, word, self._before_now(placed, word, left), top, QColor(c.ink_quiet), taken)

    def _before_now(self, placed: Placed, word: str, left: float) -> float:
        """Words of a setting end before the now line: right of it they would tell of the time to come."""
        now, g, gap = self.spec.now, self.g, self.theme.px(6)
        if now is None or placed.item.at > now:
            return left
        width = QFontMetricsF(self.theme.font(self.theme.type.caption)).horizontalAdvance(word)
        return min(left, g.x(now) - gap - width)

    def _words(
        self, painter: QPainter, word: str, left: float, top: float, ink: QColor, taken: list[tuple[float, float]]
    ) -> None:
        """Words in the lane's foot, where no others stand yet; the sentence has them in any case."""
        metrics = QFontMetricsF(painter.font())
        width, gap = metrics.horizontalAdvance(word), self.theme.px(6)
        left = self._beside_now(left, width)
        clear = all(left + width + gap <= a or left >= b + gap for a, b in taken)
        if word and clear and left + width <= self.g.left + self.g.clock + 2:
            taken.append((left, left + width))
            painter.save()
            painter.setOpacity(1.0)  # marks may be faint, words are to be read
            painter.setPen(ink)
            painter.drawText(QRectF(left, top, width + 2, metrics.height()), _LEFT, word)
            painter.restore()

    def _beside_now(self, left: float, width: float) -> float:
        """Words that the now line would cut move to its right, or to its left where that is the edge."""
        now, g, gap = self.spec.now, self.g, self.theme.px(6)
        if now is None or not left - gap < g.x(now) < left + width + gap:
            return left
        right = g.x(now) + gap
        return right if right + width <= g.left + g.clock else g.x(now) - gap - width

    def _draw_now(self, painter: QPainter) -> None:
        now, g = self.spec.now, self.g
        if now is not None and g.start <= now <= g.end:
            painter.fillRect(QRectF(round(g.x(now)) - 1, 1, 2, g.lane - 2), QColor(self.theme.colours.accent))

    def _draw_right(self, painter: QPainter, lane: Lane) -> None:
        g, theme = self.g, self.theme
        line, pad = g.line, theme.px(16)
        x = g.left + g.clock + pad
        rows = 4 if g.folded else 2
        y = g.lane / 2 - rows * line / 2
        room = g.state - pad - theme.px(22)
        ink = self._ink(lane)
        if lane.state is not None:
            gas_mark(painter, theme, lane.state, None, x + theme.px(6), y + line / 2, theme.px(11), lane.doubtful)
        self._right_words(
            painter, self._state_word(lane, room), QRectF(x + theme.px(20), y, room, line), ink, bold=True
        )
        if lane.verdict is not None:
            box = QRectF(x + theme.px(1), y + line * 1.5 - theme.px(5), theme.px(10), theme.px(10))
            verdict_sign(painter, theme, lane.verdict, box)
        self._right_words(painter, lane.verdict_word, QRectF(x + theme.px(20), y + line, room, line), ink)
        if g.folded:
            y += 2 * line
        else:
            x, room = x + g.state, g.due - pad - theme.px(28)
        if lane.tier is not None:
            size = theme.px(14)
            pennant(painter, theme, lane.tier, x + theme.px(1), y + (line + size) / 2, size, lane.closed)
        self._right_words(painter, lane.flag_word, QRectF(x + theme.px(20), y, room, line), ink, bold=True)
        self._draw_due(painter, lane, x, y + line, room, line)

    def _state_word(self, lane: Lane, room: float) -> str:
        """The state's words, or shorter ones: a value cut in the middle would be another value."""
        forms = (lane.state_word, *lane.state_shorter)
        for font in (self.theme.font(self.theme.type.caption, bold=True), self._least_font(bold=True)):
            metrics = QFontMetricsF(font)
            for form in forms:
                if metrics.horizontalAdvance(form) <= room:
                    return form
        return forms[-1]

    def _draw_due(self, painter: QPainter, lane: Lane, x: float, y: float, room: float, line: float) -> None:
        if not lane.due_word:
            return
        theme, c = self.theme, self.theme.colours
        painter.save()
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        face = QPointF(x + theme.px(6), y + line / 2)
        painter.setPen(solid_pen(c.ink_quiet, 1.4))
        painter.setBrush(QColor(c.ink_quiet) if lane.due_late else Qt.BrushStyle.NoBrush)
        painter.drawEllipse(face, theme.px(5), theme.px(5))
        painter.setPen(solid_pen(c.raised if lane.due_late else c.ink_quiet, 1.4))
        painter.drawLine(face, QPointF(face.x(), face.y() - theme.px(3)))
        painter.drawLine(face, QPointF(face.x() + theme.px(2), face.y()))
        painter.restore()
        place = QRectF(x + theme.px(20), y, room, line)
        self._right_words(painter, lane.due_word, place, self._ink(lane), bold=lane.due_late)

    def _right_words(self, painter: QPainter, word: str, room: QRectF, ink: QColor, *, bold: bool = False) -> None:
        painter.setFont(self._font_for(word, room.width(), bold=bold))
        painter.setPen(ink)
        painter.drawText(room, _LEFT, cut_between(painter, word, room.width()))

    def _least_font(self, *, bold: bool) -> QFont:
        """The smallest font of words at the right."""
        size = self.theme.type.caption
        while self.theme.px(size - 1) >= self.theme.type.emphasis:
            size -= 1
        return self.theme.font(size, bold=bold)

    def _font_for(self, word: str, width: float, *, bold: bool) -> QFont:
        """The caption's font; where text is large, one so much smaller that the words fit, but never as small as text
        that nobody enlarged."""
        theme, size = self.theme, self.theme.type.caption
        font = theme.font(size, bold=bold)
        while QFontMetricsF(font).horizontalAdvance(word) > width and theme.px(size - 1) >= theme.type.emphasis:
            size -= 1
            font = theme.font(size, bold=bold)
        return font
