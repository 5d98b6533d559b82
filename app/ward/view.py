"""The ward view: every episode along the shift's clock, whom to see first on top."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace
from zoneinfo import ZoneInfo

from PySide6.QtCore import Signal
from PySide6.QtGui import QResizeEvent
from PySide6.QtWidgets import QHBoxLayout, QLabel, QVBoxLayout, QWidget

from app.chart.lanes import WardLanes
from app.chart.shapes import Lane, LaneItem, LanesSpec
from app.look.choice_row import ChoiceRow
from app.look.elided_line import ElidedLine
from app.look.flow_row import FlowRow
from app.look.formats import clock
from app.look.theme import Theme, Tier
from app.session.readers import reader_at
from app.session.shift import Shift
from app.ward.lane_words import LaneWords, OnWard, strongest_flag
from app.ward.legend import Legend
from app.ward.moves import told_apart, what_tells_apart
from app.ward.ordering import Order, Shown, first_to_see, ordered, shown
from app.ward.search_field import SearchField
from app.ward.see_first import SeeFirst
from app.words import sentence
from core.record.instant import Instant

LEAST = 300
"""Least height at 100 % at which whom to see first has a line of its own."""
ROOMY = 380
"""Least height at 100 % at which the ward view shows more than its lanes."""


@dataclass(frozen=True, slots=True)
class WardContent:
    """What the ward view shows: its episodes, as of a moment, in a shift."""

    episodes: tuple[OnWard, ...]
    as_of: Instant
    shift: Shift
    zone: str
    gas_unit: str = "mmHg"
    live: bool = True
    """False where the past is looked at: its line is no "now"."""


class WardView(QWidget):
    """Draws a WardContent; sends intents and changes nothing."""

    opened = Signal(str)
    """An episode is to be opened."""
    selected = Signal(str)
    """An episode was taken in hand."""

    def __init__(self, theme: Theme) -> None:
        super().__init__()
        self._theme = theme
        self._content: WardContent | None = None
        self._by_key: dict[str, OnWard] = {}
        self._later: dict[str, int] = {}
        self._in_hand = ""
        self._order, self._shown = Order.CONCERN, Shown.ALL
        self.first = SeeFirst(theme)
        self.lanes = WardLanes(theme)
        self.status = ElidedLine()
        self.status.setProperty("role", "quiet")
        self.sort = ChoiceRow(
            self.tr("Sort by"),
            (
                (Order.CONCERN, self.tr("concern")),
                (Order.BED, self.tr("bed")),
                (Order.DUE, self.tr("next due")),
            ),
        )
        self.filter = ChoiceRow(
            self.tr("Show"),
            (
                (Shown.ALL, self.tr("all")),
                (Shown.NOT_RESPONDING, self.tr("not responding or flagged")),
                (Shown.DUE, self.tr("due soon")),
            ),
        )
        self.shift = QLabel()
        self.shift.setProperty("role", "quiet")
        self.search = SearchField()
        self._legend: Legend | None = None
        self._lay_out()
        self._connect()

    def _lay_out(self) -> None:
        px = self._theme.px
        self.tools = QWidget()
        tools = FlowRow(self.tools, px(12))
        tools.setContentsMargins(0, 0, 0, 0)
        tools.addWidget(self.sort)
        tools.addWidget(self.filter)
        tools.add_right(self.shift)
        tools.add_right(self.search)
        self.search.setFixedWidth(px(166))
        self._foot = QHBoxLayout()
        self._foot.setSpacing(px(16))
        self._foot.addWidget(self.status, 1)
        column = QVBoxLayout(self)
        column.setContentsMargins(px(16), px(8), px(16), px(2))
        column.setSpacing(px(6))
        column.addWidget(self.first)
        column.addWidget(self.tools)
        column.addWidget(self.lanes, 1)
        column.addLayout(self._foot)
        self._renew_legend()

    def _connect(self) -> None:
        self.first.opened.connect(self.opened)
        self.lanes.lane_activated.connect(self.opened)
        self.lanes.item_activated.connect(self._item_activated)
        self.lanes.selection_changed.connect(self._selection_changed)
        self.lanes.hovered.connect(self._hovered)
        self.sort.chosen.connect(self._sort_chosen)
        self.filter.chosen.connect(self._filter_chosen)
        self.search.textChanged.connect(self._search_changed)
        self.search.returnPressed.connect(self._take_first)
        self.search.left.connect(self.lanes.setFocus)

    def resizeEvent(self, event: QResizeEvent) -> None:
        super().resizeEvent(event)
        self._make_room()

    def _make_room(self) -> None:
        """Where large text leaves little height, lanes come first: order and filter stay in the menu."""
        roomy = self.height() >= self._theme.px(ROOMY)
        self.tools.setVisible(roomy)
        self.status.setVisible(roomy)
        tall = self.height() >= self._theme.px(LEAST)
        self.first.setVisible(tall or not self._first_is_on_top())  # there its lane says so too
        if self._legend is not None:
            self._legend.setVisible(roomy)

    def _first_is_on_top(self) -> bool:
        """Whether the lane of whom to see first is the first one: another order or a filter puts it out of sight."""
        lanes = () if self.lanes.spec is None else self.lanes.spec.lanes
        return self._content is None or (bool(lanes) and bool(lanes[0].first_word)) or not self.first.names_somebody

    # what to show

    def set_theme(self, theme: Theme) -> None:
        """Take another look or text size."""
        self._theme = theme
        self.search.setFixedWidth(theme.px(166))
        self._make_room()
        self.first.set_theme(theme)
        self.lanes.set_theme(theme)
        self._renew_legend()

    def show_ward(self, content: WardContent) -> None:
        """Show the ward; what was chosen stays chosen where it is still there."""
        self._content = content
        self._by_key = {e.figures.episode: e for e in content.episodes}
        self._refresh()

    def sort_by(self, order: Order) -> None:
        """Sort the lanes."""
        self._order = order
        self.sort.choose(order)
        self._refresh()
        self.lanes.show_chosen()

    def show_all(self) -> None:
        """Every lane: no filter, no search."""
        self.search.clear()
        self.show_only(Shown.ALL)

    def show_only(self, which: Shown) -> None:
        """Filter the lanes."""
        self._shown = which
        self.filter.choose(which)
        self._refresh()
        self.lanes.show_chosen()

    def select(self, key: str) -> None:
        """Show which episode is in hand; no lane is, where it is not among those shown."""
        self._in_hand = key
        if key in self.shown_keys():
            if self.lanes.selected_key != key:  # else the thing chosen on the lane stays chosen
                self.lanes.select(key)
        else:
            self.lanes.select_none()
            self.status.say(self._elsewhere())

    def shown_keys(self) -> tuple[str, ...]:
        """The episodes shown, from top to bottom."""
        return () if self.lanes.spec is None else tuple(lane.key for lane in self.lanes.spec.lanes)

    def _refresh(self) -> None:
        content = self._content
        if content is None:
            return
        ward = [e.figures for e in content.episodes]
        top = first_to_see(ward)
        words = LaneWords(reader_at(content.zone, content.gas_unit, content.as_of), content.as_of)
        apart = what_tells_apart(ward, content.as_of, content.zone)
        lanes = [
            self._marked(words.lane(self._by_key[f.episode], first=top is f, apart=apart.get(f.episode, "")))
            for f in ordered(shown(ward, self._shown, self.search.text(), self._former()), self._order)
        ]
        self._tell_first(words)
        self._tell_shift(content, len(lanes))
        self.lanes.set_spec(
            LanesSpec(
                ZoneInfo(content.zone),
                content.shift.start,
                content.shift.end,
                tuple(lanes),
                content.as_of if content.shift.start <= content.as_of <= content.shift.end else None,
                self.tr("now") if content.live else self.tr("then"),
                self.tr("Bed"),
                self.tr("State now, next due") if content.live else self.tr("State then, next due"),
                self._empty_word(),
                self.tr("Ward: {count} episodes along the shift's clock").format(count=len(lanes)),
            )
        )
        if self._in_hand:
            self.select(self._in_hand)
        self.lanes.setAccessibleDescription("\n".join(x.sentence for x in lanes) or self._empty_word())
        self.status.say(self.lanes.sentence_of_selection() or self._elsewhere())
        self._make_room()

    def _elsewhere(self) -> str:
        """That the episode in hand is not on the screen: whoever types must not think of another."""
        held = self._by_key.get(self._in_hand)
        content = self._content
        if held is None or content is None or not self.shown_keys():
            return ""
        told = self.tr("{label} is in hand and not shown. Enter takes the first lane.")
        ward = [e.figures for e in content.episodes]
        return told.format(label=told_apart(held.figures, ward, content.as_of, content.zone))

    def _take_first(self) -> None:
        """Enter in the search: the first that was found is taken in hand, unless one of the found is already."""
        keys = self.shown_keys()
        if keys and self._in_hand not in keys:
            self.lanes.select(keys[0])
        self.lanes.setFocus()

    def _former(self) -> dict[str, tuple[str, ...]]:
        """The beds and places that each episode was in before, to be found by."""
        return {key: tuple(m.before for m in e.moves) for key, e in self._by_key.items() if e.moves}

    def mark_later(self, counts: Mapping[str, int]) -> None:
        """Mark lanes whose record holds more now of this time than it did then; {} where the window is live."""
        if counts != self._later:
            self._later = dict(counts)
            self._refresh()

    def _marked(self, lane: Lane) -> Lane:
        count = self._later.get(lane.key, 0)
        if not count:
            return lane
        mark = self.tr("+{count} later").format(count=count)
        told = self.tr("{count} values came later").format(count=count)
        return replace(lane, subtitle=f"{mark}; {lane.subtitle}", sentence=f"{lane.sentence}. {told}")

    def _tell_first(self, words: LaneWords) -> None:
        assert self._content is not None
        top = first_to_see([e.figures for e in self._content.episodes])
        if top is None:
            self.first.show_nobody(empty=not self._content.episodes)
            return
        flag = strongest_flag(top)
        why = sentence(top.concern.why, words.reader) if top.concern.why is not None else words.lane_sentence(top)
        ward = [e.figures for e in self._content.episodes]
        label = told_apart(top, ward, self._content.as_of, self._content.zone)
        self.first.show_first(top.episode, label, why, Tier(flag.tier) if flag is not None else None)

    def _tell_shift(self, content: WardContent, shown_now: int) -> None:
        """Which shift it is, and that not every episode is shown: what is hidden must not be forgotten."""
        kind = self.tr("Night shift") if content.shift.night else self.tr("Day shift")
        start, end = clock(content.shift.start, content.zone), clock(content.shift.end, content.zone)
        told = self.tr("{kind} {start} to {end}").format(kind=kind, start=start, end=end)
        hidden = shown_now < len(content.episodes)
        if hidden:
            told = self.tr("{count} of {all} shown").format(count=shown_now, all=len(content.episodes))
        self.shift.setText(told)
        self.shift.setProperty("role", "strong" if hidden else "quiet")
        self.shift.style().unpolish(self.shift)
        self.shift.style().polish(self.shift)

    def _empty_word(self) -> str:
        if self._content is not None and self._content.episodes:
            return self.tr("No episode fits. Show all with Alt+4.")
        return self.tr("No episode yet. Ctrl+N begins one, Ctrl+T takes in a file.")

    def _renew_legend(self) -> None:
        if self._legend is not None:
            self._foot.removeWidget(self._legend)
            self._legend.deleteLater()
        self._legend = Legend(self._theme)
        self._foot.addWidget(self._legend)

    # what the person does

    def _selection_changed(self, key: str, item: LaneItem | None) -> None:  # noqa: ARG002
        self._in_hand = key
        self._tell()
        self.selected.emit(key)

    def _hovered(self, words: str) -> None:
        self._tell(words)

    def _tell(self, hovered: str = "") -> None:
        """What is hovered or chosen, in words; a thing on a lane has the whole line, so that it is told whole."""
        if self._legend is not None:
            self._legend.signs.setVisible(not hovered and self.lanes.selected_item is None)
        self.status.say(hovered or self.lanes.sentence_of_selection() or self._elsewhere())

    def _item_activated(self, key: str, item: object) -> None:  # noqa: ARG002
        self.opened.emit(key)

    def _sort_chosen(self, key: str) -> None:
        self.sort_by(Order(key))

    def _filter_chosen(self, key: str) -> None:
        self.show_only(Shown(key))

    def _search_changed(self, text: str) -> None:  # noqa: ARG002
        self._refresh()
        self.lanes.show_chosen()
