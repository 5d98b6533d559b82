"""The end of a shift: closing a handover, opening closed ones again, the paper form, the shift pattern."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

from PySide6.QtCore import QUrl
from PySide6.QtGui import QDesktopServices
from PySide6.QtWidgets import QInputDialog

from app.deeds.ward import WardDeeds
from app.deeds.writing import WritingDeeds
from app.keeping.left_behind import HANDOVERS, OwnFolder
from app.operations.outcome import Outcome
from app.session.failure import Failure
from app.window.shell import Shell
from app.words import sentence
from core.record.message import Message

if TYPE_CHECKING:
    from app.dialogs.close_handover import CloseHandoverDialog
    from app.operations.handover import Handover
    from core.record.instant import Instant
    from storage.documents import DocumentFacts
    from storage.store import Store


class ClosingDeeds(WritingDeeds):
    """Closes handovers and shows closed ones; the menu Review builds on it."""

    _dialog: CloseHandoverDialog | None = None
    _printed = ""
    _opened_folder: OwnFolder | None = None

    def __init__(self, window: Shell, ward: WardDeeds) -> None:
        super().__init__(window)
        self._ward = ward

    def do_close_handover(self) -> None:
        """Ask who gives and who takes; keep the sheet as it is printed now."""
        from app.dialogs.close_handover import CloseHandoverDialog
        from app.look.formats import span, wall

        shift, session = self.window.shift(), self.model.session
        told = span(shift.start, shift.end, session.zone)
        if session.moment() < shift.end:
            still = self.tr("{shift}, which still runs: its figures are as of {time}")
            told = still.format(shift=told, time=wall(session.moment(), session.zone))
        self._dialog = CloseHandoverDialog(
            told, (session.person, self.window.preferences.paper), self.close_handover, self.window.theme, self.window
        )
        self._dialog.open()
        from app.operations import handover

        self.model.ask(handover.closed_of_shift, (shift.start, shift.end), done=self._tell_closed)

    def _tell_closed(self, outcome: Outcome[tuple[DocumentFacts, ...]]) -> None:
        """A second handover of one shift is closed knowingly."""
        from app.look.formats import wall

        if self._dialog is not None and outcome.value:
            newest = wall(outcome.value[0].recorded_at, self.model.session.zone)
            self._dialog.tell_closed([d.name for d in outcome.value], newest)

    def close_handover(self, given_by: str, taken_by: str, paper: str) -> None:
        """Gather the shift, print it, keep the print."""
        from app.sheet import operations as handover_sheet

        self.window.prefer(paper=paper)
        request = handover_sheet.CloseRequest(
            self._ward.handover_request(), self.window.plain_reader, given_by, taken_by, paper
        )
        self.model.ask(handover_sheet.close, request, done=self._closed, failed=self._not_closed)

    def _closed(self, outcome: Outcome[str]) -> None:  # noqa: ARG002
        if self._dialog is not None:
            self._dialog.accept()
            self._dialog.deleteLater()
            self._dialog = None
        if self.window.pages is not None and self.window.pages.name == "handover":  # it tells what was closed
            self.window.fill_page("handover")
        self.window.say(self.tr("The handover is closed. Ctrl+Shift+O lists and opens closed ones."))

    def _not_closed(self, failure: Failure) -> None:
        told = sentence(failure.message, self.window.reader)
        if self._dialog is not None:
            self._dialog.refuse(told)
        self.window.say(told)

    # on paper

    def do_print_handover(self) -> None:
        """Show the sheet as it will be printed; the printer is chosen there."""
        from app.operations import handover

        self.window.say(self.tr("Gathering the shift..."))
        self.model.ask(handover.prepare, self._ward.handover_request(), done=self._preview,
                       failed=self._not_closed, subject="handover preview")  # fmt: skip

    def _preview(self, outcome: Outcome[Handover]) -> None:
        from PySide6.QtPrintSupport import QPrinterInfo

        from app.dialogs.print_preview import HandoverPreview
        from app.sheet.content import sheet_content

        person = self.model.session.person
        content = sheet_content(outcome.value, self.window.plain_reader, given_by=person)
        told = "" if QPrinterInfo.availablePrinterNames() else self.tr(
            "No printer is set up on this computer. Ctrl+P saves the sheet as a PDF.")  # fmt: skip
        self.window.say(told)
        self._printed = f"{content.ward.shift}, {content.head}"
        preview = HandoverPreview(content, self.window.theme, self.window, self.window.preferences.paper)
        preview.accepted.connect(self._note_print)
        preview.failed.connect(self._not_on_paper)
        preview.open()

    def _not_on_paper(self, message: Message) -> None:
        self.window.say(sentence(message, self.window.reader))

    def _note_print(self) -> None:
        self._ward.note_print(self._printed)

    # closed ones

    def do_closed_handovers(self) -> None:
        """List the closed handovers."""
        from app.operations import handover

        self.model.ask(handover.closed_list, None, done=self._listed, subject="closed handovers")

    def _listed(self, outcome: Outcome[tuple[DocumentFacts, ...]]) -> None:
        from app.dialogs.closed_handovers import ClosedHandoversDialog

        dialog = ClosedHandoversDialog(outcome.value, self.model.session.zone, self.window.theme, self.window)
        dialog.open_wanted.connect(self.open_closed)
        dialog.copy_wanted.connect(self.copy_closed)
        dialog.open()

    def open_closed(self, facts: DocumentFacts) -> None:
        """Open a closed handover in the computer's reader of PDFs, from a folder that goes with the window."""
        if self._opened_folder is None:
            self._opened_folder = OwnFolder(HANDOVERS)
        self.fetch_closed(facts.id, self._opened_folder.path / f"handover-{facts.seq}.pdf")

    def copy_closed(self, facts: DocumentFacts) -> None:
        """Ask where, write a closed handover's bytes."""
        path = self.ask_path(self.tr("Save a copy"), f"handover-{facts.seq}.pdf", self.tr("PDF (*.pdf)"))
        if path is not None:
            self.fetch_closed(facts.id, path)

    def fetch_closed(self, document: str, path: Path) -> None:
        """Write a closed handover's bytes, unchanged."""
        self.model.ask(_fetch, (document, path), done=self._fetched)

    def _fetched(self, outcome: Outcome[tuple[bytes, Path]]) -> None:
        data, path = outcome.value
        self.write(path, data)
        if self._opened_folder is not None and path.parent == self._opened_folder.path:
            QDesktopServices.openUrl(QUrl.fromLocalFile(str(path)))

    def forget_opened(self) -> bool:
        """Throw the opened copies away: they hold a ward's patients. Whether there were any."""
        had = self._opened_folder is not None
        if self._opened_folder is not None:
            self._opened_folder.forget()
            self._opened_folder = None
        return had

    # paper and pattern

    def do_blank_form(self) -> None:
        """Ask where, write the paper form."""
        from app.sheet.blank import blank_bytes

        path = self.ask_path(self.tr("Blank paper form"), "handover-form.pdf", self.tr("PDF (*.pdf)"))
        if path is not None:
            self.write(path, blank_bytes(self.window.preferences.paper)[0])

    def do_shift_times(self) -> None:
        """Ask at which times of day shifts begin."""
        now = " ".join(self.window.preferences.shift_starts)
        asked = self.tr("Times of day at which shifts begin, e.g. 07:30 19:30")
        text, given = QInputDialog.getText(self.window, self.tr("Shift times"), asked, text=now)
        if given:
            self.set_shift_times(text)

    def set_shift_times(self, text: str) -> None:
        """Begin shifts at other times of day, or say what is wrong with them."""
        from app.session.shift import read_starts

        starts = read_starts(text)
        if starts is None:
            told = self.tr("'{text}' is no shift pattern. Accepted: one to six times of day, e.g. 07:30 19:30.")
            self.window.say(told.format(text=text))
            return
        self.window.prefer(shift_starts=starts)
        self.window.say(self.tr("Shifts begin at {times}.").format(times=", ".join(starts)))


def _fetch(store: Store, who: str, now: Instant, request: tuple[str, Path]) -> Outcome[tuple[bytes, Path]]:
    """A closed handover and where it goes: of two that are asked for, none is written under the other's name."""
    from app.operations import handover

    document, path = request
    found = handover.closed(store, who, now, document)
    return Outcome((found.value, path), found.head)
