"""The ward: pages, order, filter, search, handover."""

from __future__ import annotations

from pathlib import Path

from app.deeds.doer import Doer
from app.ward.ordering import Order, Shown


class WardDeeds(Doer):
    """Serves the menu Ward."""

    def do_show_ward(self) -> None:
        """All episodes along the shift's clock."""
        self.window.show_page("ward")

    def do_show_handover(self) -> None:
        """The handover on screen."""
        self.window.show_page("handover")

    def do_show_compare(self) -> None:
        """Episodes laid over each other."""
        self.window.show_page("compare")

    def do_sort_concern(self) -> None:
        """Whom to see first on top."""
        self._sort(Order.CONCERN)

    def do_sort_bed(self) -> None:
        """In the order of the beds."""
        self._sort(Order.BED)

    def do_sort_due(self) -> None:
        """What is due first on top."""
        self._sort(Order.DUE)

    def do_filter_all(self) -> None:
        """Every episode."""
        self._show(Shown.ALL)

    def do_filter_not_responding(self) -> None:
        """Only those with an open flag of concern or more."""
        self._show(Shown.NOT_RESPONDING)

    def do_filter_due(self) -> None:
        """Only those with something due soon or overdue."""
        self._show(Shown.DUE)

    def do_find_episode(self) -> None:
        """To the search field."""
        self.window.show_page("ward")
        self.pages.ward.search.setFocus()
        self.pages.ward.search.selectAll()

    def _sort(self, order: Order) -> None:
        self.window.show_page("ward")
        self.pages.ward.sort_by(order)

    def _show(self, which: Shown) -> None:
        self.window.show_page("ward")
        self.pages.ward.show_only(which)

    # handover

    def show_handover_text(self) -> None:
        """Fill the handover page from the figures that the ward shows."""
        feed = self.window.feed
        if feed is not None:
            self.pages.handover.show_ward(feed.content(), feed.answers, self.window.reader)

    def save_handover(self, path: Path) -> None:
        """Write the sheet of this shift."""
        from app.operations import handover

        shift = self.window.shift()
        session = self.model.session
        end = min(shift.end, session.moment())
        request = handover.HandoverRequest(shift.start, end, session.zone)
        self._path = path
        self.model.ask(handover.of_shift, request, done=self._saved, subject="handover")

    def _saved(self, outcome: object) -> None:
        self.window.say(self.tr("{path} was written.").format(path=self._path))
