"""The session: what is looked at, by whom, and as of when. One immutable value, one signal when it changes.

Views read `model.session`, send intents (`select`, `set_as_of`, ...) and ask for figures by `model.ask`. Own
and foreign commits arrive alike, by the changes since the head that the session knows.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from typing import Any

from PySide6.QtCore import QObject, QTimer, Signal, Slot

from app.operations import store as store_operations
from app.operations.outcome import Outcome
from app.policy import names as names_by_policy
from app.session.failure import Failure
from app.session.flag_keeper import FlagKeeper
from app.session.runner import Operation, Runner
from app.session.state import Changed, Session, What
from core.record.instant import Instant

POLL_MS = 800
"""How often another process's commits are looked for: both windows see an entry within a second."""
TICK_MS = 15_000
"""How often a running clock tells that it moved."""


class SessionModel(QObject):
    """Holds the session for the views. Close it (or its runner) before the application ends."""

    changed = Signal(object)
    """`Changed`."""
    failed = Signal(object)
    """A `Failure` that no view took."""

    def __init__(self, session: Session, runner: Runner, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._session = session
        self.runner = runner
        runner.committed.connect(self._committed)
        runner.failed.connect(self.failed)
        self._is_described = False
        self._poll = QTimer(self)
        self._poll.setInterval(POLL_MS)
        self._poll.timeout.connect(self.look_for_changes)
        self._tick = QTimer(self)
        self._tick.setInterval(TICK_MS)
        self._tick.timeout.connect(self._ticked)
        self.flags = FlagKeeper(self, self)
        self.changed.connect(self.flags.follow)

    @property
    def session(self) -> Session:
        """The session as it is now."""
        return self._session

    def start(self) -> None:
        """Begin to follow the clock and other writers; the first look tells `STORE`, `POLICY` and `RECORD`."""
        self.ask(store_operations.describe, None, done=self._described, subject="store facts")
        self._poll.start()
        self._tick.start()
        self.flags.start()

    def close(self) -> None:
        """Stop the timers and the runner."""
        self._poll.stop()
        self._tick.stop()
        self.flags.stop()
        self.changed.disconnect(self.flags.follow)
        self.runner.close()

    def ask(
        self, operation: Operation, request: Any = None, *,
        done: Callable[[Outcome[Any]], None] | None = None,
        failed: Callable[[Failure], None] | None = None, subject: str = "",
    ) -> int:  # fmt: skip
        """Submit an operation as the person and at the moment of the session."""
        now = self._session.now()
        return self.runner.submit(operation, request, who=self._session.person, now=now,
                                  done=done, failed=failed, subject=subject)  # fmt: skip

    def select(self, episode: str | None) -> None:
        """Take an episode in hand."""
        self._become(What.SELECTION, selection=episode)

    def set_person(self, initials: str) -> None:
        """Who enters from now on."""
        self._become(What.PERSON, person=initials.strip())

    def set_as_of(self, at: Instant | None) -> None:
        """Look at a moment, or follow the clock again."""
        self._become(What.AS_OF, as_of=at)

    def set_as_known_at(self, at: Instant | None) -> None:
        """See only what had been recorded by a moment, or all again."""
        self._become(What.AS_KNOWN_AT, as_known_at=at)

    def look_back(self, at: Instant | None) -> None:
        """See a moment as the store knew it then: figures as of it and as known at it. None: live again."""
        made = replace(self._session, as_of=at, as_known_at=at)
        if made != self._session:
            self._session = made
            self.changed.emit(Changed(frozenset({What.AS_OF, What.AS_KNOWN_AT})))

    def set_zone(self, zone: str) -> None:
        """Show and read wall-clock times in a zone."""
        self._become(What.ZONE, zone=zone)

    @Slot()
    def look_for_changes(self) -> None:
        """Ask for what was committed since the head that views have been told."""
        if self._is_described:  # until then every episode that was ever closed would be news
            self.ask(store_operations.changes, self._session.head, done=self._found, subject="changes")

    def _become(self, what: What, **values: Any) -> None:
        made = replace(self._session, **values)
        if made != self._session:
            self._session = made
            self.changed.emit(Changed(frozenset({what})))

    @Slot(int)
    def _committed(self, head: int) -> None:
        if head > self._session.head:
            self.look_for_changes()

    @Slot()
    def _ticked(self) -> None:
        if self._session.as_of is None and self._session.clock.is_running:
            self.changed.emit(Changed(frozenset({What.CLOCK})))

    def _described(self, outcome: Outcome[store_operations.StoreFacts]) -> None:
        facts = outcome.value
        self._is_described = True
        names_by_policy.use(facts.policy)
        self._session = replace(self._session, head=outcome.head, policy=facts.policy,
                                read_only=facts.read_only, layout_revision=facts.layout_revision,
                                encrypted=facts.encrypted, notices=facts.notices,
                                has_people=facts.has_people)  # fmt: skip
        self.changed.emit(Changed(frozenset({What.STORE, What.POLICY, What.RECORD}), facts.episodes))

    def _found(self, outcome: Outcome[store_operations.Changes]) -> None:
        found, known = outcome.value, self._session
        what = {What.RECORD} if outcome.head > known.head else set()
        if found.policy is not None:
            what.add(What.POLICY)
            names_by_policy.use(found.policy)
        if found.layout_revision != known.layout_revision:
            what.add(What.LAYOUT)
        if not what:
            return
        if found.erased:
            what.add(What.STORE)  # views keep nothing of an episode that was removed
        self._session = replace(known, selection=None if found.erased else known.selection,
                                head=max(outcome.head, known.head),
                                policy=found.policy or known.policy,
                                notices=known.notices if found.policy is None else found.notices,
                                layout_revision=found.layout_revision, has_people=found.has_people)  # fmt: skip
        self.changed.emit(Changed(frozenset(what), found.episodes))
