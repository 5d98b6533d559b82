"""Which page shows: it wires a page when it comes to be, gives it what it shows, and hands it the focus."""

from __future__ import annotations

from PySide6.QtCore import QObject

from app.deeds import Doers
from app.window.shell import Shell
from app.window.top_bar import TopBar

FOCUS = {
    "ward": "lanes", "episode": "stack", "handover": "text", "compare": "list", "map": "map", "statistics": "table",
}  # fmt: skip
"""The part of each page that takes the focus."""
OF_ONE_EPISODE = ("episode", "map")


class PageTurner(QObject):
    """Belongs to a window; acts only while a store is open."""

    def __init__(self, window: Shell, top: TopBar, doers: Doers) -> None:
        super().__init__(window)
        self._window, self._top, self._doers = window, top, doers

    def show(self, name: str) -> None:
        """Show a page and give it the focus. One of a single episode needs an episode in hand."""
        o, top = self._window.now_open(), self._top
        if name in OF_ONE_EPISODE and o.model.session.selection is None:
            top.pages.choose(o.pages.name)
            return
        o.pages.setCurrentWidget(o.pages.page(name))
        top.pages.choose(name)
        self.fill(name)
        self.focus()

    def show_ward(self) -> None:
        """Back to all episodes."""
        self.show("ward")

    def fill(self, name: str) -> None:
        """Give a page what it shows; the ward has it already."""
        o, doers = self._window.now_open(), self._doers
        if name in OF_ONE_EPISODE:
            o.episode_feed.show_selection()
        elif name == "handover":
            doers.ward.show_handover_text()
        elif name == "compare":
            o.pages.compare.show_ward(o.feed.content(), o.feed.answers)
        elif name == "statistics":
            doers.review.refresh_statistics()

    def focus(self) -> None:
        """Hand the focus to the page that shows."""
        pages = self._window.now_open().pages
        getattr(pages.page(pages.name), FOCUS[pages.name]).setFocus()

    def page_made(self, name: str) -> None:
        """A page has come to be: join its signals."""
        window, pages = self._window, self._window.now_open().pages
        doers, actions = self._doers, window.actions_by_key
        if name == "episode":
            pages.episode.back.connect(self.show_ward)
            pages.episode.explain_wanted.connect(doers.view.explain)
            pages.episode.panels_wanted.connect(actions["panels"].trigger)
        elif name == "handover":
            pages.handover.save_wanted.connect(actions["save_handover"].trigger)
            pages.handover.back.connect(self.show_ward)
        elif name == "compare":
            pages.compare.back.connect(self.show_ward)
            pages.compare.opened.connect(window.open_episode)
        elif name == "map":
            pages.map.back.connect(self.show_ward)
            pages.map.explain_wanted.connect(doers.view.explain_figure)
        elif name == "statistics":
            pages.statistics.back.connect(self.show_ward)
            pages.statistics.span_wanted.connect(doers.review.count_shift)
            pages.statistics.save_wanted.connect(actions["save_statistics"].trigger)
