"""The episode view: pressure ribbon and panels on one clock; beside them state, flags, due items, levers."""

from __future__ import annotations

from collections.abc import Iterator

from PySide6.QtCore import QPoint, Qt, Signal
from PySide6.QtGui import QKeyEvent, QResizeEvent
from PySide6.QtWidgets import QFrame, QHBoxLayout, QPushButton, QScrollArea, QVBoxLayout, QWidget

from app.chart.shapes import Bracket, Tick
from app.chart.stack import PanelStack
from app.episode.on_screen import EpisodeOnScreen
from app.episode.readout import Readout
from app.episode.side import SideColumn
from app.episode.stack_words import stack_of
from app.explain.findings import Explainer
from app.look.elided_line import ElidedLine
from app.look.plain_label import plain_label
from app.look.theme import Theme
from app.session.readers import reader_at
from app.telling.headline import headline, state_now
from app.telling.phrases import translate
from app.ward.lane_words import indication_word
from app.words import Reader
from core.judgement.response_shapes import ResponseFigure
from core.judgement.shapes import GasFigure
from core.record.instant import MINUTE, Instant

TIGHT = 440
"""Least height at 100 % at which the readout stands still above the charts."""
SIDE_HEIGHT = 320
LEAST_SEEN = 280
"""Least height at 100 % of what is seen of the charts at which the clock stands over them."""


class EpisodeView(QWidget):
    """Draws an EpisodeOnScreen; sends intents and changes nothing."""

    back = Signal()
    """To the ward again."""
    explain_wanted = Signal(object)
    panels_wanted = Signal()

    def __init__(self, theme: Theme) -> None:
        super().__init__()
        self._theme = theme
        self._on: EpisodeOnScreen | None = None
        self._now: Instant = 0
        self._is_tight = False
        self.title = plain_label()
        self.title.setProperty("role", "title")
        self.standing = ElidedLine()
        self.standing.setProperty("role", "emphasis")
        self.about = ElidedLine()
        self.about.setProperty("role", "quiet")
        self.back_button = QPushButton(self.tr("Ward"))
        self.back_button.setToolTip(self.tr("Back to the ward (Esc)"))
        self.back_button.setAccessibleName(self.tr("Back to the ward"))
        self.panels_button = QPushButton(self.tr("Panels..."))
        self.panels_button.setAccessibleName(self.tr("Add, name, fill, order and remove panels"))
        for button in (self.back_button, self.panels_button):
            button.setProperty("role", "small")
        self.readout = Readout(theme)
        self.stack = PanelStack(theme)
        self.notice = plain_label()
        self.notice.setProperty("role", "caption")
        self.side = SideColumn(theme)
        self._lay_out()
        self._connect()

    def _lay_out(self) -> None:
        px = self._theme.px
        self._head = QWidget()
        head = QHBoxLayout(self._head)
        head.setContentsMargins(0, 0, 0, 0)
        head.setSpacing(px(12))
        head.addWidget(self.back_button)
        head.addWidget(self.title)
        head.addWidget(self.standing, 1000)  # as wide as its words, before anything else has room
        head.addWidget(self.about, 1)
        head.addWidget(self.notice)
        head.addWidget(self.panels_button)
        self.roll = QScrollArea()
        self.roll.setWidgetResizable(True)
        self.roll.setFrameShape(QFrame.Shape.NoFrame)
        self.roll.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self.roll.setFocusPolicy(Qt.FocusPolicy.NoFocus)
        inside = QWidget()
        self._rolled = QVBoxLayout(inside)
        self._rolled.setContentsMargins(0, 0, 0, 0)
        self._rolled.addWidget(self.stack)
        self.roll.setWidget(inside)
        left = self._left = QVBoxLayout()
        left.setSpacing(px(4))
        left.addWidget(self._head)
        left.addWidget(self.readout)
        left.addWidget(self.roll, 1)
        row = self._row = QHBoxLayout(self)
        row.setContentsMargins(px(16), px(4), px(8), px(2))
        row.setSpacing(px(12))
        row.addLayout(left, 1)
        row.addWidget(self.side)

    def resizeEvent(self, event: QResizeEvent) -> None:
        super().resizeEvent(event)
        self.side.fit_page(self.width())
        self._make_room()

    def _hold_axis(self, *_place: int) -> None:
        """The clock is seen however far the charts are rolled."""
        seen = self.roll.viewport()
        if seen.height() < self._theme.px(LEAST_SEEN):
            self.stack.hold_axis_above(None)  # it would cover what little is seen
            return
        self.stack.hold_axis_above(self.stack.mapFrom(seen, QPoint(0, seen.height())).y())

    def _make_room(self) -> None:
        """Where large text leaves little height, heading, readout, charts and side column roll under each other."""
        tight = self.height() < self._theme.px(TIGHT)
        if tight == self._is_tight:
            return
        self._is_tight = tight
        self.readout.set_rolling(tight)
        if tight:
            self._rolled.insertWidget(0, self._head)
            self._rolled.insertWidget(1, self.readout)
            self._rolled.addWidget(self.side)
            self.side.setMinimumHeight(self._theme.px(SIDE_HEIGHT))
        else:
            self._left.insertWidget(0, self._head)
            self._left.insertWidget(1, self.readout)
            self._row.addWidget(self.side)
            self.side.setMinimumHeight(0)

    def _connect(self) -> None:
        self.back_button.clicked.connect(self._back)
        self.panels_button.clicked.connect(self._want_panels)
        bar = self.roll.verticalScrollBar()
        bar.valueChanged.connect(self._hold_axis)
        bar.rangeChanged.connect(self._hold_axis)
        self.stack.instant_changed.connect(self._pointed)
        self.stack.reduced_changed.connect(self._reduced)
        self.stack.bracket_activated.connect(self._bracket)
        self.stack.tick_activated.connect(self._tick)
        self.side.explain_wanted.connect(self.explain_wanted)

    # what to show

    def set_theme(self, theme: Theme) -> None:
        """Take another look or text size; call `show_episode` again after it."""
        self._theme = theme
        self.readout.set_theme(theme)
        self._make_room()
        self.side.set_theme(theme)
        self.side.fit_page(self.width())
        self.stack.set_theme(theme)
        if self._on is not None:
            self.show_episode(self._on, self._now)

    def show_episode(self, on: EpisodeOnScreen, now: Instant) -> None:
        """Show an episode; the same one with new values keeps its window and its crosshair."""
        same = self._on is not None and self._on.figures.episode == on.figures.episode
        old_spec, window, instant = self.stack.spec, self.stack.in_view, self.stack.instant
        at_end = old_spec is not None and window[1] >= old_spec.end
        self._on, self._now = on, now
        self.stack.set_spec(stack_of(on, now))
        if same and not at_end:
            self.stack.set_window(*window)
        if same and instant is not None:
            self.stack.point_at(instant)
        self._show_parts(shown=True)
        self.title.setText(on.figures.label)
        self.standing.say("; ".join(self._standing(on)))
        self.standing.ensurePolished()
        self.standing.setMaximumWidth(self.standing.fontMetrics().horizontalAdvance(self.standing.whole()) + 4)
        self.about.say(self._about(on))
        self.side.show_figures(on.figures, on.policy, self._reader())
        self._tell(self.stack.instant)

    def show_nothing(self, why: str) -> None:
        """Show that there is nothing to show: what stood here before must not be taken for this moment's."""
        self._on = None
        self.title.setText(why)
        self._show_parts(shown=False)

    def _show_parts(self, *, shown: bool) -> None:
        for part in (self.standing, self.about, self.notice, self.panels_button, self.readout, self.roll, self.side):
            part.setVisible(shown)

    @property
    def episode(self) -> str | None:
        """The key of the episode shown."""
        return None if self._on is None else self._on.figures.episode

    @property
    def on_screen(self) -> EpisodeOnScreen | None:
        """What is shown."""
        return self._on

    def _reader(self) -> Reader:
        assert self._on is not None
        return reader_at(self._on.zone, self._on.gas_unit, self._on.course.until)

    def _standing(self, on: EpisodeOnScreen) -> Iterator[str]:
        """State and verdict in the fewest words, where the eye falls first."""
        gas = next((g for g in reversed(on.figures.gases) if g.site != "venous"), None)
        if gas is not None:
            yield state_now(on.figures, gas, on.gas_unit, on.zone)
        told = headline(on.figures)
        if told is not None:
            yield told.short

    def _about(self, on: EpisodeOnScreen) -> str:
        facts = on.figures.profile
        indication, age, place = facts.get("indication"), facts.get("age"), facts.get("location")
        parts = [indication_word(str(indication))] if indication else [self.tr("indication not recorded")]
        if isinstance(age, float):
            parts.append(translate("episode", "{age:.0f} years").format(age=age))
        if place:
            parts.append(str(place))
        ceiling = facts.get("ceiling_of_care")
        parts.append(
            translate("episode", "ceiling: {ceiling}").format(ceiling=ceiling or translate("episode", "not recorded"))
        )
        return ", ".join(parts)

    # the crosshair

    def _pointed(self, instant: Instant | None) -> None:
        self._tell(instant)

    def _tell(self, instant: Instant | None) -> None:
        if self._on is None:
            return
        at = self._on.course.until if instant is None else instant
        self.readout.show_moment(
            at,
            self._on.zone,
            self._on.course.at(at),
            self.stack.readings_at(at),
            pointed=instant is not None,
            support=self._on.course.support,
            events=[t.word for t in self.stack.events_at(at)] if instant is not None else (),
            then=not self._on.live,
        )

    def go_to_anchor(self, step: int) -> None:
        """Put the crosshair on the next (1) or previous (-1) anchor."""
        if self._on is None:
            return
        anchors = sorted({r.anchor_at for r in self._on.figures.responses})
        here = self.stack.instant if self.stack.instant is not None else self._on.course.until
        later = [a for a in anchors if a > here] if step > 0 else [a for a in reversed(anchors) if a < here]
        if later:
            start, end = self.stack.in_view
            if not start <= later[0] <= end:
                self.stack.go_to(later[0])
            self.stack.point_at(later[0])

    def gas_pointed_at(self) -> GasFigure | None:
        """The gas under the crosshair, or so near that a hand cannot tell."""
        at = self.stack.instant
        if self._on is None or at is None or not self._on.figures.gases:
            return None
        start, end = self.stack.in_view
        near = min(self._on.figures.gases, key=lambda g: abs(g.at - at))
        return near if abs(near.at - at) <= max(2 * MINUTE, (end - start) // 100) else None

    def response_pointed_at(self) -> ResponseFigure | None:
        """The response whose window the crosshair stands in."""
        at = self.stack.instant
        bracket = self.stack.bracket_at(at) if at is not None else None
        return bracket.payload if bracket is not None and isinstance(bracket.payload, ResponseFigure) else None

    # what the person does

    def keyPressEvent(self, event: QKeyEvent) -> None:
        if event.key() == Qt.Key.Key_Escape:
            if self.stack.instant is not None and self.stack.hasFocus():
                self.stack.point_at(None)
            else:
                self.back.emit()
            return
        if event.key() in (Qt.Key.Key_PageUp, Qt.Key.Key_PageDown):
            bar = self.roll.verticalScrollBar()
            sign = 1 if event.key() == Qt.Key.Key_PageDown else -1
            bar.setValue(bar.value() + sign * bar.pageStep())
            return
        super().keyPressEvent(event)

    def _back(self) -> None:
        self.back.emit()

    def _want_panels(self) -> None:
        self.panels_wanted.emit()

    def _reduced(self, reduced: bool) -> None:
        spec = self.stack.spec
        self.notice.setText(self.tr("lowest and highest per pixel") if reduced and spec is not None else "")
        self.notice.setToolTip(spec.reduced_word if spec is not None else "")

    def _bracket(self, bracket: Bracket) -> None:
        if self._on is not None and isinstance(bracket.payload, ResponseFigure):
            self.explain_wanted.emit(Explainer(self._on.policy, self._reader()).response(bracket.payload))

    def _tick(self, tick: Tick) -> None:
        self.stack.point_at(tick.at)
