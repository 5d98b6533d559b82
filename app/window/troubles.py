"""What goes wrong, told where it belongs: a passphrase that is asked for, the first page with the steps that lead on,
or the line under the log strip."""

from __future__ import annotations

from collections.abc import Callable

from PySide6.QtCore import QObject

from app.keeping.steps import steps_out_of
from app.session.failure import Failure
from app.window.shell import Shell
from app.words import sentence

ASK_PASSPHRASE = ("store.needs_passphrase", "key.wrong_passphrase")


class Troubles(QObject):
    """Stands beside the window."""

    def __init__(self, window: Shell, ask_passphrase: Callable[[str], None]) -> None:
        super().__init__(window)
        self._window, self._ask_passphrase = window, ask_passphrase

    def show(self, failure: Failure) -> None:
        """Say what did not succeed. A store that wants its passphrase asks for it; one that cannot be opened leads
        back to the first page, with what can be done there."""
        window = self._window
        text = sentence(failure.message, window.reader)
        opening = window.opened is not None and not window.opened.feed.is_ready
        if opening and failure.message.key in ASK_PASSPHRASE:
            self._ask_passphrase(text if failure.message.key == "key.wrong_passphrase" else "")
        elif opening and not failure.is_ours:
            window.close_model()
            window.show_first_page()
            if window.first is not None:
                window.first.say(text, steps_out_of(failure.message.key))
        else:
            window.say(text)
