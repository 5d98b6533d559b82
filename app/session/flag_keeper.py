"""Keeps the ledger told of flags: raised, no longer met, undone. After each commit, and as the clock moves on."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import QObject, QTimer, Slot

from app.operations import flag as operations

if TYPE_CHECKING:
    from app.operations.outcome import Outcome
    from app.session.model import SessionModel
    from app.session.state import Changed

EVERY_MS = 60_000
"""A gas falls overdue without anything being logged, so the clock is followed too."""


class FlagKeeper(QObject):
    """Follows a session while it is live and may write; a look back writes nothing."""

    def __init__(self, model: SessionModel) -> None:
        super().__init__(model)
        self._model = model
        self._known: set[str] = set()
        self._clock = QTimer(self)
        self._clock.setInterval(EVERY_MS)
        self._clock.timeout.connect(self.look)
        model.changed.connect(self._changed)

    def start(self) -> None:
        """Begin to follow the clock."""
        self._clock.start()

    def stop(self) -> None:
        """Follow nothing any more."""
        self._clock.stop()
        self._model.changed.disconnect(self._changed)

    @Slot()
    def look(self) -> None:
        """Tell the ledger of every episode's flags."""
        self._ask(frozenset(self._known))

    @Slot(object)
    def _changed(self, changed: Changed) -> None:
        from app.session.state import What

        if changed.touches(What.RECORD, What.POLICY):
            self._known |= changed.episodes
            self._ask(changed.episodes if not changed.touches(What.POLICY) else frozenset(self._known))

    def _ask(self, episodes: frozenset[str]) -> None:
        session = self._model.session
        if episodes and session.is_live and not session.read_only:
            self._model.ask(operations.keep_transitions, sorted(episodes), done=self._kept)

    def _kept(self, _outcome: Outcome[int]) -> None:
        """What was written comes back as any other commit."""
