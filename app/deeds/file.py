"""What goes in and comes out by the menu File: files taken in, the sheet, a picture; and who logs."""

from __future__ import annotations

from pathlib import Path

from PySide6.QtWidgets import QDialog, QFileDialog

from app.deeds.making import MakingDeeds
from app.deeds.recovery_codes import RecoveryCodes
from app.deeds.review import ReviewDeeds
from app.deeds.ward import WardDeeds
from app.keeping.keeper import Keeping
from app.window.shell import Shell


class FileDeeds(MakingDeeds):
    """Serves the menu File."""

    def __init__(
        self, window: Shell, keeping: Keeping, ward: WardDeeds, review: ReviewDeeds, codes: RecoveryCodes
    ) -> None:
        super().__init__(window, keeping, codes)
        self._ward, self._review = ward, review
        self.take_in_wanted.connect(self.do_take_in)

    # files

    def do_take_in(self) -> None:
        """Ask which file, show what it holds, take it in when the person says so."""
        if self.window.model is None:
            self.make_then_take_in()
            return
        chosen, _ = QFileDialog.getOpenFileNames(
            self.window,
            self.tr("Take in files"),
            str(Path.home()),
            self.tr("Files of values (*.csv *.tsv *.txt *.xlsx *.ods *.hl7 *.json *.ndjson);;All files (*)"),
        )
        if chosen:
            self.take_in(*map(Path, chosen))

    def take_in(self, *paths: Path) -> QDialog:
        """Show what files hold, one after the other; a dialog takes each in. A table is mapped first."""
        from app.intake_window.files_in_turn import FilesInTurn

        turn = FilesInTurn(self.model, paths, self._episodes(), self.window)
        return turn.begin()

    def do_taken(self) -> None:
        """Show the files that were taken in."""
        from app.intake_window.taken_dialog import TakenDialog

        TakenDialog(self.model, self.window.reader, self.window.theme, self.window).open()

    def _episodes(self) -> dict[str, str]:
        feed = self.window.feed
        return {key: answer.record.label for key, answer in feed.answers.items()} if feed is not None else {}

    def do_save_handover(self) -> None:
        """Ask where, write the handover sheet as PDF."""
        chosen, _ = QFileDialog.getSaveFileName(
            self.window, self.tr("Save handover"), str(Path.home() / "handover.pdf"), self.tr("PDF (*.pdf)")
        )
        if chosen:
            self._ward.save_handover(Path(chosen))

    def do_save_picture(self) -> None:
        """Ask where, draw what the page shows as PNG, SVG or PDF."""
        self._review.save_picture()

    # person

    def do_sign_in(self) -> None:
        """Ask for initials; where people have PINs, the screen closes until one signs in."""
        if self.model.session.has_people:
            self._keeping.lock_now()
            return
        from app.dialogs.sign_in import SignInDialog, logged_lately

        person, feed = self.model.session.person, self.window.feed
        records = (a.record for a in feed.answers.values()) if feed is not None else ()
        recent = logged_lately(records, person)
        dialog = SignInDialog(person, self.window.theme, self.window, recent=recent)
        if dialog.exec() == QDialog.DialogCode.Accepted:
            self.become(dialog.person)
        dialog.deleteLater()

    def do_quit(self) -> None:
        """Close the window."""
        self.window.close()
