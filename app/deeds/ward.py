"""The ward: pages, order, filter, search, handover."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

from app.deeds.doer import Doer
from app.operations.outcome import Outcome
from app.session.failure import Failure
from app.ward.ordering import Order, Shown
from app.words import sentence

if TYPE_CHECKING:
    from app.operations import handover


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
        """Every episode: no filter, no search."""
        self.window.show_page("ward")
        self.pages.ward.show_all()

    def do_filter_not_responding(self) -> None:
        """Only those that do not respond, or with an open flag of concern or more."""
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
        """Gather this shift and show it."""
        from app.operations import handover

        self.pages.handover.wait(self.tr("Gathering the shift..."))
        self.model.ask(
            handover.prepare,
            self.handover_request(),
            done=self._gathered,
            failed=self._not_gathered,
            subject="handover",
        )

    def handover_request(self) -> handover.HandoverRequest:
        """The shift that is looked at."""
        from app.operations import handover

        shift, session = self.window.shift(), self.model.session
        return handover.HandoverRequest(shift.start, shift.end, session.as_known_at, session.as_of)

    def _gathered(self, outcome: Outcome[handover.Handover]) -> None:
        from app.sheet.content import sheet_content

        self.pages.handover.show_content(
            sheet_content(outcome.value, self.window.reader, given_by=self.model.session.person)
        )

    def _not_gathered(self, failure: Failure) -> None:
        self.pages.handover.say(sentence(failure.message, self.window.reader))

    def save_handover(self, path: Path) -> None:
        """Write the sheet of this shift."""
        from app.sheet import operations as handover_sheet

        self._path = path
        window = self.window
        request = handover_sheet.SheetRequest(
            self.handover_request(), window.plain_reader, path, window.preferences.paper, self.model.session.person
        )
        self.model.ask(handover_sheet.write, request, done=self._printed, subject="handover sheet")

    def _printed(self, outcome: Outcome[int]) -> None:
        told = self.tr("{path} was written: {pages} pages.")
        self.window.say(told.format(path=self._path, pages=outcome.value))

    def note_print(self, detail: str) -> None:
        """Keep in the chain what was printed."""
        from app.operations import handover

        self.model.ask(handover.note_print, detail, done=self._noted)

    def _noted(self, outcome: Outcome[bool]) -> None:
        """A print that could not be kept lies on paper all the same."""
