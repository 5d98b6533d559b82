"""Holds a plain store against its chain while the window is open: nothing else would tell a changed value.

An encrypted store proves every page as it is read. The check runs on a reading connection of its own, so that no
entry waits for it.
"""

from __future__ import annotations

from functools import partial
from typing import TYPE_CHECKING

from PySide6.QtCore import QObject, QTimer, Signal

from app.operations import store as operations
from app.operations.outcome import Outcome
from app.session.failure import Failure
from app.session.runner import Runner
from core.record.message import Message
from storage.store import Store

if TYPE_CHECKING:
    from app.session.model import SessionModel

FIRST_MS, EVERY_MS = 3_000, 3_600_000
"""Soon after the first screen, and once an hour."""


class ChainWatch(QObject):
    """Follows one open store. `unsound` with what was found; silent while all is well."""

    unsound = Signal(object)
    """A tuple of `Message`, never empty."""

    def __init__(self, model: SessionModel, parent: QObject) -> None:
        super().__init__(parent)
        self._model = model
        self._runner: Runner | None = None
        self.found: tuple[Message, ...] = ()
        self._first, self._again = QTimer(self), QTimer(self)
        self._first.setSingleShot(True)
        self._first.setInterval(FIRST_MS)
        self._again.setInterval(EVERY_MS)
        for timer in (self._first, self._again):
            timer.timeout.connect(self.look)

    def start(self) -> None:
        """Begin to look, where the file could be changed unseen. The sample is thrown away."""
        session = self._model.session
        if session.encrypted is False and not session.is_demo:
            self._first.start()
            self._again.start()

    def stop(self) -> None:
        """Look no more; a check under way is given up."""
        self._first.stop()
        self._again.stop()
        if self._runner is not None:
            self._runner.close()
            self._runner = None

    def look(self) -> None:
        """Check now, beside everything else."""
        session = self._model.session
        if self._runner is None:
            self._runner = Runner(partial(Store.open, session.store_path, read_only=True), self)
        self._runner.submit(operations.verify, None, now=session.now(), done=self._done, failed=self._not_done,
                            subject="chain watch")  # fmt: skip

    def _done(self, outcome: Outcome[tuple[Message, ...]]) -> None:
        self.found = outcome.value
        if self.found:
            self.unsound.emit(self.found)

    def _not_done(self, failure: Failure) -> None:
        """A store that cannot be opened a second time is told of by those who work on it."""
