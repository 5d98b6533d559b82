"""What goes wrong, told where it belongs: a passphrase that is asked for, the first page with the steps that lead on,
or the line under the log strip."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import QObject

from app.keeping.steps import steps_out_of
from app.session.failure import Failure
from app.words import sentence

if TYPE_CHECKING:
    from app.window.main import MainWindow

ASK_PASSPHRASE = ("store.needs_passphrase", "key.wrong_passphrase")


class Troubles(QObject):
    """Stands beside the window."""

    def __init__(self, window: MainWindow) -> None:
        super().__init__(window)
        self._window = window

    def show(self, failure: Failure) -> None:
        """Say what did not succeed. A store that wants its passphrase asks for it; one that cannot be opened leads
        back to the first page, with what can be done there."""
        window = self._window
        text = sentence(failure.message, window.reader)
        if failure.message.key in ASK_PASSPHRASE:
            window.doers.file.ask_passphrase(text if failure.message.key == "key.wrong_passphrase" else "")
        elif window.opened is not None and not window.opened.feed.is_ready and not failure.is_ours:
            window.close_model()
            window.show_first_page()
            if window.first is not None:
                window.first.say(text, steps_out_of(failure.message.key))
        else:
            window.say(text)
