"""Keeps the ledger told of flags: raised, no longer met, undone. After each commit, and as the clock moves on."""

from collections.abc import Callable
from typing import Any, Protocol

from PySide6.QtCore import QObject, QTimer, Slot

from app.operations import flag as operations
from app.operations.outcome import Outcome
from app.session.runner import Operation
from app.session.state import Changed, Session, What

EVERY_MS = 60_000
"""A gas falls overdue without anything being logged, so the clock is followed too."""


class Followed(Protocol):
    """A session whose episodes' flags are kept, and the way to its store."""

    @property
    def session(self) -> Session: ...
    def ask(self, operation: Operation, request: Any = None, *, done: Callable[[Outcome[Any]], None]) -> int: ...


class FlagKeeper(QObject):
    """Follows a session while it is live and may write; a look back writes nothing.

    Whoever holds the session tells every change to `follow`.
    """

    def __init__(self, followed: Followed, parent: QObject) -> None:
        super().__init__(parent)
        self._followed = followed
        self._known: set[str] = set()
        self._clock = QTimer(self)
        self._clock.setInterval(EVERY_MS)
        self._clock.timeout.connect(self.look)

    def start(self) -> None:
        """Begin to follow the clock."""
        self._clock.start()

    def stop(self) -> None:
        """Follow the clock no more."""
        self._clock.stop()

    @Slot()
    def look(self) -> None:
        """Tell the ledger of every episode's flags."""
        self._ask(frozenset(self._known))

    @Slot(object)
    def follow(self, changed: Changed) -> None:
        """Something of the session has changed."""
        if changed.touches(What.RECORD, What.POLICY):
            self._known |= changed.episodes
            self._ask(changed.episodes if not changed.touches(What.POLICY) else frozenset(self._known))

    def _ask(self, episodes: frozenset[str]) -> None:
        session = self._followed.session
        if episodes and session.is_live and not session.read_only:
            self._followed.ask(operations.keep_transitions, sorted(episodes), done=self._kept)

    def _kept(self, _outcome: Outcome[int]) -> None:
        """What was written comes back as any other commit."""
