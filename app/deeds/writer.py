"""How a file is asked for, written and told of."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

from PySide6.QtWidgets import QFileDialog

from app.deeds.doer import Doer
from app.session.failure import failure_of


class Writer(Doer):
    """Writes files whole, or says why not."""

    def ask_path(self, title: str, name: str, kinds: str) -> Path | None:
        """Where a file is to go; None where the person left it."""
        chosen, _ = QFileDialog.getSaveFileName(self.window, title, str(Path.home() / name), kinds)
        return Path(chosen) if chosen else None

    def write(self, path: Path, data: bytes) -> None:
        """Write a file whole, and say so or say why not."""
        from app.keeping.whole_file import write_whole

        self.attempt(path, lambda: write_whole(path, data))

    def attempt(self, path: Path, work: Callable[[], object]) -> None:
        """Do something that writes `path`, and say so or say why not."""
        try:
            work()
        except OSError as error:
            self.window.show_failure(failure_of(error))
            return
        self.window.say(self.tr("{path} was written.").format(path=path))
