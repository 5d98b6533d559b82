"""Operations that compute figures: for one episode, for the ward."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

from app.operations.episode import load, load_if_sound
from app.operations.episode_shelf import shelf_of
from app.operations.outcome import Outcome, report
from app.operations.policy import in_force
from core.figures.episode_figures import episode_figures
from core.figures.stage_cache import StageCache
from core.judgement.policy import Policy
from core.judgement.shapes import EpisodeFigures
from core.record.episode import Episode
from core.record.instant import HOUR, Instant

if TYPE_CHECKING:
    from storage.store import Store

RECENTLY_ENDED = 24 * HOUR
"""Episodes that ended this long before the moment still stand on the ward."""


@dataclass(frozen=True, slots=True)
class EpisodeRequest:
    """One episode as of a moment, as known at a moment (None: all that is recorded)."""

    episode: str
    as_of: Instant
    as_known_at: Instant | None = None


@dataclass(frozen=True, slots=True)
class WardRequest:
    """The ward as of a moment. `episodes` None: every one that is open or ended recently.

    `everything`: closed ones of any age too.
    """

    as_of: Instant
    as_known_at: Instant | None = None
    episodes: tuple[str, ...] | None = None
    everything: bool = False


@dataclass(frozen=True, slots=True)
class EpisodeAnswer:
    """The record of an episode as known, and its figures."""

    record: Episode
    figures: EpisodeFigures


@dataclass(frozen=True, slots=True)
class WardAnswer:
    """The episodes of a ward in order of concern, whom to see first foremost, and the policy they were judged by:
    the one in force as known at the moment asked for.

    `unread`: episodes of a damaged store of which nothing can be told. Who shows the ward says so: the others are not
    hidden for one.
    """

    as_of: Instant
    episodes: tuple[EpisodeAnswer, ...]
    policy: Policy
    unread: tuple[str, ...] = ()

    @property
    def figures(self) -> tuple[EpisodeFigures, ...]:
        """The figures alone."""
        return tuple(e.figures for e in self.episodes)


def of_episode(store: Store, who: str, now: Instant, request: EpisodeRequest) -> Outcome[EpisodeAnswer]:
    """The figures of one episode.

    Raises:
        RecordError: `episode.unknown`.
    """
    record = load(store, request.episode, request.as_known_at)
    policy = in_force(store, _head_for(store, request.as_known_at))
    made = episode_figures(record, request.as_of, policy, _stages(store, request.as_known_at))
    return Outcome(EpisodeAnswer(record, made), store.head())


def of_ward(store: Store, who: str, now: Instant, request: WardRequest) -> Outcome[WardAnswer]:
    """The figures of the ward's episodes in order of concern. Reports progress by episode."""
    head = store.head()
    policy = in_force(store, _head_for(store, request.as_known_at))
    keys, stages = _keys(store, request), _stages(store, request.as_known_at)
    answers: list[EpisodeAnswer] = []
    unread: list[str] = []
    for number, key in enumerate(keys):
        report(number, len(keys))
        record = load_if_sound(store, key, request.as_known_at)
        if record is None:
            unread.append(key)
            continue
        if not _has_begun(record, request):
            continue
        made = episode_figures(record, request.as_of, policy, stages)
        if _stands(made, request):
            answers.append(EpisodeAnswer(record, made))
    answers.sort(key=lambda a: concern_order(a.figures))
    return Outcome(WardAnswer(request.as_of, tuple(answers), policy, tuple(unread)), head)


def concern_order(figures: EpisodeFigures) -> tuple[int, float, str]:
    """The order in which episodes are to be seen: rank, then order inside it, then label."""
    return (figures.concern.rank, figures.concern.order, figures.label)


def _stages(store: Store, as_known_at: Instant | None) -> StageCache | None:
    """The kept stages go with the shelf's own records; a record as known earlier is another one."""
    return shelf_of(store).stages if as_known_at is None else None


def _head_for(store: Store, known_at: Instant | None) -> int | None:
    return None if known_at is None else store.head_known_at(known_at)


def _keys(store: Store, request: WardRequest) -> Sequence[str]:
    if request.episodes is not None:
        return request.episodes
    head = _head_for(store, request.as_known_at)
    if request.everything:
        return store.episode_keys(head)
    return store.standing_keys(request.as_of - RECENTLY_ENDED, head)


def _has_begun(record: Episode, request: WardRequest) -> bool:
    """Whether anything stood of an episode by the moment; one begun and taken back, or not yet known, has not."""
    if record.is_empty or request.episodes is not None:
        return not record.is_empty
    first = record.standing[0].entry.at if record.first_at is None else record.first_at
    return first <= request.as_of


def _stands(figures: EpisodeFigures, request: WardRequest) -> bool:
    """Whether its support had not ended long before the moment."""
    ended = figures.support.ended_at
    named = request.everything or request.episodes is not None
    return named or ended is None or ended > request.as_of - RECENTLY_ENDED
