"""Saving what can be read of a damaged store into a new one, with what was lost."""

from __future__ import annotations

from pathlib import Path
from typing import Any

from PySide6.QtWidgets import QWidget

from app.dialogs.file_work import FileWork, free_name
from app.look.theme import Theme
from app.operations import salvage as salvaging
from app.operations.outcome import Outcome
from app.session.clock import Clock
from app.words import Reader, sentence


class SalvageDialog(FileWork):
    """What can be read of a damaged store, in a new one."""

    def __init__(
        self, old: Path | None, who: str, clock: Clock, reader: Reader, theme: Theme, parent: QWidget | None = None
    ) -> None:
        super().__init__("", "", who, clock, reader, theme, parent)
        self.setWindowTitle(self.tr("Save from a damaged store"))
        self.go.setText(self.tr("Save what can be read"))
        self.recovery_code = ""
        if old is not None:
            self.source.setText(str(old))
            self.new.setText(str(free_name(old.with_name(f"{old.stem}-salvaged{old.suffix}"))))
        self.lay_out(
            self.tr("First think of the newest backup: it is whole. This reads what is left of a damaged file into a "
                    "new store and says what was lost. The damaged file is not changed."),
            self.tr("Damaged store"), self.tr("New store"),
        )  # fmt: skip

    def submit(self) -> None:
        if (found := self.paths()) is not None and not self.lacks_passphrase() and not self.lacks_name():
            self.work(salvaging.salvage, salvaging.SalvageRequest(*found, self.passphrase), self._salvaged)

    def _salvaged(self, outcome: Outcome[Any]) -> None:
        found = outcome.value
        lines = [sentence(m, self._reader) for m in salvaging.told(found)]
        if salvaging.lost_nothing(found):
            lines.append(self.tr("Nothing was lost."))
        self.recovery_code = found.recovery_code
        self.show_told(lines)
        if found.recovery_code:
            self._show_code(found.recovery_code)

    def _show_code(self, code: str) -> None:
        """The new store has a key of its own: its code is shown once, and kept before anything goes on."""
        from app.dialogs.passphrase import RecoveryCodeDialog

        self.code_dialog = RecoveryCodeDialog(Path(self.new.text().strip()).name, code, self.theme, self)
        self.code_dialog.open()
