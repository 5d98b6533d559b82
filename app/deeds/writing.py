"""Files for others: pictures and exports."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

from app.deeds.writer import Writer
from app.operations.outcome import Outcome

if TYPE_CHECKING:
    from app.dialogs.export import Wanted
    from storage.export.deidentified import Statement


class WritingDeeds(Writer):
    """Writes what others are to have; the menu Review builds on it."""

    _export_path = Path()

    # pictures

    def save_picture(self) -> None:
        """Ask where, draw what the page shows as PNG, SVG or PDF."""
        from app.look.theme import LIGHT
        from app.picture.drawn import picture_of_page

        if picture_of_page(self.pages, LIGHT, "") is None:
            self.window.say(self.tr("This page is text: save it as a PDF with Ctrl+P."))
            return
        kinds = self.tr("PDF (*.pdf);;SVG (*.svg);;PNG (*.png)")
        path = self.ask_path(self.tr("Save picture"), f"{self.pages.name}.pdf", kinds)
        if path is not None:
            self.write_picture(path)

    def write_picture(self, path: Path) -> None:
        """Draw what the page shows into a file, and say so or say why not."""
        from app.look.theme import LIGHT
        from app.picture.drawn import SUFFIXES, moment_words, picture_of_page, write_picture

        session = self.model.session
        moment = moment_words(session.moment(), session.as_known_at, session.zone)
        found = picture_of_page(self.pages, LIGHT, moment)
        if path.suffix.lower() not in SUFFIXES:
            path = path.with_name(path.name + ".pdf")
        if found is not None:
            self.attempt(path, lambda: write_picture(found, LIGHT, path))

    # values

    def do_export_values(self) -> None:
        """Ask what, ask where, write it."""
        from app.dialogs.export import ExportDialog

        answers = self.window.feed.answers if self.window.feed is not None else {}
        labels = {key: f"{a.figures.label} ({key})" for key, a in answers.items()}
        ExportDialog(labels, self.export_wanted, self.window.theme, self.window).open()

    def export_wanted(self, wanted: Wanted) -> None:
        """Ask where, write what was chosen."""
        name = "values-deidentified.csv" if wanted.deidentified else "values.csv"
        path = self.ask_path(self.tr("Export values"), name, self.tr("CSV (*.csv)"))
        if path is not None:
            self.export(wanted, path, replace=True)  # the dialog asked, where the file is there

    def export(self, wanted: Wanted, path: Path, *, replace: bool = False) -> None:
        """Write what was chosen; over a file that is there only with `replace`."""
        from app.operations import export

        shift = self.window.shift() if wanted.shift_only else None
        request = export.ExportRequest(
            path, wanted.episodes, self.model.session.as_known_at, wanted.channels,
            shift.start if shift else None, shift.end if shift else None, wanted.dictionary, replace=replace,
        )  # fmt: skip
        self._export_path = path
        if wanted.deidentified:
            self.model.ask(export.write_deidentified, request, done=self._deidentified)
        else:
            self.model.ask(export.write, request, done=self._exported)

    def _exported(self, outcome: Outcome[int]) -> None:
        told = self.tr("{path} was written: {count} rows.")
        self.window.say(told.format(path=self._export_path, count=outcome.value))

    def _deidentified(self, outcome: Outcome[Statement]) -> None:
        told = self.tr("{path} was written: {count} rows. What was left out and what remains stands beside it.")
        self.window.say(told.format(path=self._export_path, count=outcome.value.rows))
