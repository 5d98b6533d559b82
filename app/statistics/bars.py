"""The picture of shift figures: responses by verdict, flags by marker and how many were seen, waits on clocks."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

from PySide6.QtCore import QPointF, QRectF, QSize, Qt
from PySide6.QtGui import QColor, QFontMetricsF, QPainter, QPaintEvent
from PySide6.QtWidgets import QWidget

from app.chart.marks import draw_card, fitted, pennant, solid_pen, verdict_sign
from app.chart.picture_title import draw_picture_title
from app.look.formats import minutes, span
from app.look.theme import Theme, Tier, Verdict, verdict_of, verdict_word
from app.statistics.measures import clock_name, flag_name, measures, ordered_flags
from app.telling.phrases import translate
from app.words import Reader
from core.figures.ward_statistics import Waits, WardStatistics

_LEFT = Qt.AlignmentFlag.AlignLeft | Qt.AlignmentFlag.AlignVCenter
_MOST_FLAGS = 12


@dataclass(frozen=True, slots=True)
class Bar:
    """One bar: its name, its length, the part of it that is filled full, and the sign before the name."""

    name: str
    value: int
    full: int
    beside: str
    verdict: Verdict | None = None
    tier: Tier | None = None


def verdict_bars(found: WardStatistics) -> tuple[Bar, ...]:
    """Responses by verdict, the most frequent first."""
    ordered = sorted(found.responses.items(), key=lambda x: (-x[1], x[0]))
    return tuple(Bar(verdict_word(verdict_of(k)), n, n, str(n), verdict_of(k)) for k, n in ordered)


def flag_bars(found: WardStatistics, reader: Reader) -> tuple[Bar, ...]:
    """Flags by marker, the strongest first; the full part was seen."""
    made = []
    for marker, count in ordered_flags(found)[:_MOST_FLAGS]:
        beside = translate("statistics", "{raised}, seen {seen}").format(raised=count.raised, seen=count.seen.known)
        name = flag_name(marker, reader)
        made.append(Bar(name, count.raised, count.seen.known, beside, None, Tier(count.tier)))
    return tuple(made)


def known_words(waits: Waits) -> str:
    """Of how many a time is known, and of how many it is not.

    >>> known_words(Waits(not_known=11))
    '0 known\\n11 not known'
    """
    known = translate("statistics", "{count} known").format(count=waits.known)
    if not waits.not_known:
        return known
    return known + "\n" + translate("statistics", "{count} not known").format(count=waits.not_known)


MOST_LEAST = 560
"""Pixels: half of a window of 1280, whatever the size of the text."""


class StatisticsBars(QWidget):
    """Draws the figures of a span."""

    def __init__(self, theme: Theme) -> None:
        super().__init__()
        self._theme = theme
        self._found: WardStatistics | None = None
        self._reader = Reader()

    def set_theme(self, theme: Theme) -> None:
        """Take another look or text size."""
        self._theme = theme
        self._fit()

    def show_figures(self, found: WardStatistics, reader: Reader) -> None:
        """Draw the figures of another span."""
        self._found, self._reader = found, reader
        self.setAccessibleName(self.tr("Shift figures as bars"))
        self.setAccessibleDescription("; ".join(f"{m.name}: {m.shown}" for m in measures(found, reader)))
        self._fit()

    def _fit(self) -> None:
        self.setMinimumHeight(self.minimumSizeHint().height())
        self.update()

    def minimumSizeHint(self) -> QSize:
        px, found = self._theme.px, self._found
        rows = 0 if found is None else len(found.responses) + min(len(found.flags), _MOST_FLAGS) + 4 * 2
        return QSize(min(px(420), MOST_LEAST), px(3 * 60 + 24 * max(rows, 6)))

    def paintEvent(self, event: QPaintEvent) -> None:
        painter = QPainter(self)
        painter.fillRect(event.rect(), QColor(self._theme.colours.ground))
        self.paint_on(painter, self.width(), self.height())
        painter.end()

    def paint_on(self, painter: QPainter, width: int, height: int) -> None:  # noqa: ARG002
        """Paint at the painter's origin on a surface of this width."""
        if self._found is None:
            return
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        px = self._theme.px
        verdicts = verdict_bars(self._found)
        y = self._draw_bars(painter, translate("statistics", "Responses by verdict"), "", verdicts, 0, width)
        y = self._draw_waits(painter, y + px(10), width)
        note = translate("statistics", "filled: seen; * confirm locally")
        flags = flag_bars(self._found, self._reader)
        self._draw_bars(painter, translate("statistics", "Flags by marker"), note, flags, y + px(10), width)

    def _card(self, painter: QPainter, title: str, note: str, y: float, width: int, rows: float) -> float:
        """A card with its title; the y of its first row."""
        theme, px = self._theme, self._theme.px
        draw_card(painter, theme, QRectF(0, y, width - 1, px(44) + rows))
        painter.setFont(theme.font(theme.type.body, bold=True))
        painter.setPen(QColor(theme.colours.ink))
        painter.drawText(QRectF(px(14), y + px(8), width, px(20)), _LEFT, title)
        painter.setFont(theme.font(theme.type.caption))
        painter.setPen(QColor(theme.colours.ink_quiet))
        painter.drawText(QRectF(0, y + px(8), width - px(14), px(20)), int(Qt.AlignmentFlag.AlignRight), note)
        return y + px(34)

    def _draw_bars(
        self, painter: QPainter, title: str, note: str, bars: tuple[Bar, ...], y: float, width: int
    ) -> float:
        theme, px = self._theme, self._theme.px
        row = px(24)
        top = self._card(painter, title, note if bars else "", y, width, row * max(len(bars), 1))
        if not bars:
            painter.drawText(QRectF(px(14), top, width, row), _LEFT, translate("statistics", "none in this span"))
        most = max((b.value for b in bars), default=1)
        name_at, end = px(38), width - px(90)
        bar_at = self._after_names((b.name for b in bars), name_at, width)
        for n, bar in enumerate(bars):
            at = top + n * row
            self._draw_sign(painter, bar, QRectF(px(14), at + px(4), px(16), px(16)))
            painter.setFont(theme.font(theme.type.body))
            painter.setPen(QColor(theme.colours.ink))
            name = fitted(painter, bar.name, bar_at - name_at - px(8))
            painter.drawText(QRectF(name_at, at, bar_at - name_at, row), _LEFT, name)
            self._draw_bar(painter, bar, QRectF(bar_at, at + px(5), (end - bar_at) * bar.value / most, px(13)))
            painter.setPen(QColor(theme.colours.ink))
            room = QRectF(bar_at + (end - bar_at) * bar.value / most + px(8), at, px(90), row)
            painter.setFont(theme.font(theme.type.caption))
            painter.drawText(room, _LEFT, bar.beside)
        return top + row * max(len(bars), 1) + px(10)

    def _after_names(self, names: Iterable[str], left: float, width: float) -> float:
        """Where what stands beside names begins: after the longest, that no name is cut where there is room."""
        metrics = QFontMetricsF(self._theme.font(self._theme.type.body))
        longest = max((metrics.horizontalAdvance(name) for name in names), default=0.0)
        return min(left + longest + self._theme.px(12), width * 0.7)

    def _draw_sign(self, painter: QPainter, bar: Bar, box: QRectF) -> None:
        if bar.verdict is not None:
            verdict_sign(painter, self._theme, bar.verdict, box)
        elif bar.tier is not None:
            pennant(painter, self._theme, bar.tier, box.left() + 2, box.bottom(), box.height())

    def _draw_bar(self, painter: QPainter, bar: Bar, box: QRectF) -> None:
        c = self._theme.colours
        colour = c.verdicts[bar.verdict] if bar.verdict is not None else c.tiers[bar.tier or Tier.REMARK]
        full = QRectF(box)
        full.setWidth(box.width() * bar.full / bar.value if bar.value else 0)
        painter.fillRect(full, QColor(colour))
        painter.setPen(solid_pen(colour, 1.2))
        painter.setBrush(Qt.BrushStyle.NoBrush)
        painter.drawRect(box)

    # waits

    def _draw_waits(self, painter: QPainter, y: float, width: int) -> float:
        assert self._found is not None
        px, found = self._theme.px, self._found
        rows = [(clock_name(key), found.clocks[key]) for key in found.limits]
        rows.append((translate("statistics", "From the start to the first gas"), found.first_gas))
        row = px(38)
        note = translate("statistics", "line: limit")
        title = translate("statistics", "Time to start, and to the first gas")
        top = self._card(painter, title, note, y, width, row * 4)
        longest = max([m for _, w in rows for m in w.minutes] + [130.0])
        bar_at = self._after_names((name for name, _ in rows), px(14), width)
        for n, (name, waits) in enumerate(rows):
            self._draw_wait(painter, name, waits, (bar_at, longest), QRectF(0, top + n * row, width, row))
        return top + row * 4 + px(10)

    def _draw_wait(self, painter: QPainter, name: str, waits: Waits, scale: tuple[float, float], box: QRectF) -> None:
        """`scale`: where the line begins, and how many minutes its end stands for."""
        bar_at, longest = scale
        theme, px, c = self._theme, self._theme.px, self._theme.colours
        end, middle = box.width() - px(96), box.top() + box.height() * 0.45
        painter.setFont(theme.font(theme.type.body))
        painter.setPen(QColor(c.ink))
        name = fitted(painter, name, bar_at - px(22))
        painter.drawText(QRectF(px(14), box.top(), bar_at, box.height() * 0.9), _LEFT, name)
        painter.fillRect(QRectF(bar_at, middle, end - bar_at, 1), QColor(c.edge))
        painter.setFont(theme.font(theme.type.caption))
        if waits.limit_min is not None:
            x = bar_at + (end - bar_at) * waits.limit_min / longest
            painter.fillRect(QRectF(round(x) - 1, middle - px(9), 2, px(18)), QColor(c.ink))
            painter.drawText(QRectF(x - px(40), middle + px(7), px(80), px(16)), Qt.AlignmentFlag.AlignCenter,
                             minutes(waits.limit_min))  # fmt: skip
        painter.setPen(solid_pen(c.raised, 1.0))
        for length in waits.minutes:
            over = waits.limit_min is not None and length > waits.limit_min
            painter.setBrush(QColor(c.verdicts[Verdict.WORSE] if over else c.accent))
            at = QPointF(bar_at + (end - bar_at) * length / longest, middle)
            if over:  # a square is over the limit, a dot inside it
                painter.drawRect(QRectF(at.x() - px(4), at.y() - px(4), px(8), px(8)))
            else:
                painter.drawEllipse(at, px(4.5), px(4.5))
        painter.setPen(QColor(c.ink_quiet))
        room = QRectF(end + px(8), box.top(), px(88), box.height() * 0.9)
        painter.drawText(room, _LEFT, known_words(waits))


@dataclass(frozen=True, slots=True)
class StatisticsPicture:
    """Paints the figures by themselves, under their span. Needs a QApplication."""

    found: WardStatistics
    reader: Reader
    theme: Theme

    def paint_on(self, painter: QPainter, width: int, height: int) -> None:
        """Paint at the painter's origin on a surface of this size."""
        px, theme = self.theme.px, self.theme
        told = translate("statistics", "Shift figures of the ward, {span}").format(
            span=span(self.found.start, self.found.end, self.reader.zone))  # fmt: skip
        top = draw_picture_title(painter, theme, told, width)
        bars = StatisticsBars(theme)
        bars.show_figures(self.found, self.reader)
        painter.save()
        painter.translate(px(16), top)
        bars.paint_on(painter, width - px(32), height - top)
        painter.restore()
        bars.deleteLater()
