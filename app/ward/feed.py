"""Keeps the ward's figures fresh: asks for what changed, merges the answers, tells the views."""

from __future__ import annotations

from PySide6.QtCore import QObject, Signal

from app.keeping.preferences import Preferences
from app.operations import figures as figure_operations
from app.operations.figures import EpisodeAnswer, WardAnswer, WardRequest
from app.operations.outcome import Outcome
from app.session.model import SessionModel
from app.session.shift import shift_of
from app.session.state import Changed, What
from app.telling.support_course import course_of
from app.ward.lane_words import OnWard
from app.ward.moves import moves_of
from app.ward.view import WardContent
from core.judgement.policy import Policy

_ALL_AGAIN = (What.STORE, What.POLICY, What.AS_OF, What.AS_KNOWN_AT, What.CLOCK, What.ZONE)


class WardFeed(QObject):
    """Asks on the worker; a newer question takes an older one's place without losing what that asked for."""

    refreshed = Signal(object)
    """`WardContent`."""
    unread = Signal(object)
    """The keys of episodes that are missing because what is kept of them is not what was written; () when all is well
    again."""

    def __init__(self, model: SessionModel, preferences: Preferences, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._model, self._preferences = model, preferences
        self._answers: dict[str, EpisodeAnswer] = {}
        self._on_ward: dict[str, OnWard] = {}
        self._wanted: set[str] = set()
        self._all_wanted = False
        self._answered_once = False
        self._policy: Policy | None = None
        self._unread: set[str] = set()
        model.changed.connect(self.model_changed)

    @property
    def answers(self) -> dict[str, EpisodeAnswer]:
        """Records and figures by episode."""
        return self._answers

    @property
    def policy(self) -> Policy:
        """The policy that the figures shown were judged by."""
        return self._policy or self._model.session.policy

    @property
    def is_ready(self) -> bool:
        """Whether the first answer has come."""
        return self._answered_once

    def on_ward(self, key: str) -> OnWard | None:
        """What the ward shows of an episode."""
        return self._on_ward.get(key)

    def set_preferences(self, preferences: Preferences) -> None:
        """Units and shift times may have changed: the words are made anew, no figure is."""
        self._preferences = preferences
        if self._answered_once:
            self.refreshed.emit(self.content())

    def model_changed(self, changed: Changed) -> None:
        """Ask for what the change touches."""
        if changed.touches(*_ALL_AGAIN):
            self._all_wanted = True
        elif changed.touches(What.RECORD):
            self._wanted |= changed.episodes
        else:
            return
        self._ask()

    def _ask(self) -> None:
        session = self._model.session
        keys = None if self._all_wanted else tuple(sorted(self._wanted))
        request = WardRequest(session.moment(), session.as_known_at, keys)
        self._model.ask(figure_operations.of_ward, request, done=self._answer, subject="ward figures")

    def _answer(self, outcome: Outcome[WardAnswer]) -> None:
        answer = outcome.value
        self._policy = answer.policy
        asked = tuple(self._answers) if self._all_wanted else tuple(self._wanted)
        for key in asked:  # one of which nothing stands any more gives no answer
            self._answers.pop(key, None)
        unread = (self._unread - set(asked) | set(answer.unread)) if not self._all_wanted else set(answer.unread)
        self._all_wanted = False
        self._wanted.clear()
        for one in answer.episodes:
            self._answers[one.figures.episode] = one
        self._answered_once = True
        self._on_ward = {
            key: OnWard(a.figures, course_of(a.record, a.figures.as_of), moves_of(a.record, a.figures.as_of))
            for key, a in self._answers.items()
        }
        self.refreshed.emit(self.content())
        if unread != self._unread:
            self._unread = unread
            self.unread.emit(tuple(sorted(unread)))

    def content(self) -> WardContent:
        """What the ward view shows now."""
        session = self._model.session
        as_of = session.moment()
        shift = shift_of(as_of, session.zone, self._preferences.shift_starts)
        return WardContent(
            tuple(self._on_ward.values()), as_of, shift, session.zone, self._preferences.gas_unit, session.is_live
        )
