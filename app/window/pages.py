"""The pages of the window, each made when it is first needed: charts load slowly and the ward must show first."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import Signal
from PySide6.QtWidgets import QStackedWidget, QWidget

from app.look.theme import Theme
from app.ward.view import WardView

if TYPE_CHECKING:
    from app.compare.view import CompareView
    from app.episode.view import EpisodeView
    from app.handover.view import HandoverView
    from app.map.view import MapView
    from app.statistics.view import StatisticsView


class Pages(QStackedWidget):
    """All pages of an open store. `made(name)` when one has come to be and wants its wires."""

    made = Signal(str)

    def __init__(self, theme: Theme) -> None:
        super().__init__()
        self._theme = theme
        self.ward = WardView(theme)
        self.addWidget(self.ward)
        self._episode: EpisodeView | None = None
        self._compare: CompareView | None = None
        self._handover: HandoverView | None = None
        self._map: MapView | None = None
        self._statistics: StatisticsView | None = None

    @property
    def episode(self) -> EpisodeView:
        """The episode view."""
        if self._episode is None:
            from app.episode.view import EpisodeView

            self._episode = EpisodeView(self._theme)
            self._added(self._episode, "episode")
        return self._episode

    @property
    def compare(self) -> CompareView:
        """The compare view."""
        if self._compare is None:
            from app.compare.view import CompareView

            self._compare = CompareView(self._theme)
            self._added(self._compare, "compare")
        return self._compare

    @property
    def handover(self) -> HandoverView:
        """The handover view."""
        if self._handover is None:
            from app.handover.view import HandoverView

            self._handover = HandoverView(self._theme)
            self._added(self._handover, "handover")
        return self._handover

    @property
    def map(self) -> MapView:
        """The acid-base map."""
        if self._map is None:
            from app.map.view import MapView

            self._map = MapView(self._theme)
            self._added(self._map, "map")
        return self._map

    @property
    def statistics(self) -> StatisticsView:
        """The shift figures."""
        if self._statistics is None:
            from app.statistics.view import StatisticsView

            self._statistics = StatisticsView(self._theme)
            self._added(self._statistics, "statistics")
        return self._statistics

    @property
    def name(self) -> str:
        """The name of the page that shows."""
        names = {
            self.ward: "ward",
            self._episode: "episode",
            self._compare: "compare",
            self._handover: "handover",
            self._map: "map",
            self._statistics: "statistics",
        }
        return names.get(self.currentWidget(), "")  # type: ignore[call-overload, no-any-return]

    def page(self, name: str) -> QWidget:
        """The page of that name."""
        found: QWidget = getattr(self, name)
        return found

    def has(self, name: str) -> bool:
        """Whether the page has been made."""
        return name == "ward" or getattr(self, f"_{name}") is not None

    def set_theme(self, theme: Theme) -> None:
        """Take another look or text size in every page that there is."""
        self._theme = theme
        for name in ("ward", "episode", "map", "compare", "handover", "statistics"):
            if self.has(name):
                self.page(name).set_theme(theme)  # type: ignore[attr-defined]

    def _added(self, page: QWidget, name: str) -> None:
        self.addWidget(page)
        self.made.emit(name)
