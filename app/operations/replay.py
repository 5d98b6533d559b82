"""Operations that replay: what policies would have flagged in past episodes, as known at each moment."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from app.operations.episode import check_known
from app.operations.outcome import Outcome, report
from core.figures.replay import PastEpisode
from core.figures.replay_summary import ReplayedEpisode, Span, known_at_once
from core.judgement.policy import read_policy
from core.judgement.policy_check import ERROR, check
from core.record.instant import Instant
from core.record.message import RecordError, refuse

if TYPE_CHECKING:
    from storage.store import Store


@dataclass(frozen=True, slots=True)
class ReplayRequest:
    """One or two policies as TOML texts, the episodes (none named: every one), and a span.

    `at_once`: as if all had been recorded when it happened, for records whose recording times are lost.
    `workers` None: as many processes as the computer has cores, none for a few episodes.
    """

    policies: tuple[str, ...]
    episodes: tuple[str, ...] = ()
    start: Instant | None = None
    end: Instant | None = None
    at_once: bool = False
    workers: int | None = None


@dataclass(frozen=True, slots=True)
class ReplayAnswer:
    """The episodes that lie inside the span, in order of beginning."""

    request: ReplayRequest
    episodes: tuple[ReplayedEpisode, ...]


def run(store: Store, who: str, now: Instant, request: ReplayRequest) -> Outcome[ReplayAnswer]:
    """Replay. It writes nothing. Reports by episode; stopped, it leaves no process behind.

    Raises:
        RecordError: `policy.*`, the first fault of a policy; `episode.unknown`; `replay.backwards`;
            `replay.worker_lost`.
    """
    from app.policy.replay_pool import replay_all

    _check(request)
    for key in request.episodes:
        check_known(store, key)
    keys = tuple(dict.fromkeys(request.episodes)) or tuple(store.episode_keys())
    done = 0

    def beat() -> None:
        report(done, len(keys))

    found: list[ReplayedEpisode] = []
    span = Span(request.start, request.end)
    past = (_past(store, key, request.at_once) for key in keys)
    for one in replay_all(past, len(keys), request.policies, span, beat=beat, workers=request.workers):
        done += 1
        beat()
        if one is not None:
            found.append(one)
    found.sort(key=lambda e: (e.begun, e.episode))
    return Outcome(ReplayAnswer(request, tuple(found)), store.head())


def _check(request: ReplayRequest) -> None:
    for text in request.policies:
        faults = [f for f in check(text).findings if f.kind == ERROR]
        if faults:
            raise RecordError(faults[0].message)
        read_policy(text)
    if request.start is not None and request.end is not None and request.end <= request.start:
        raise refuse("replay.backwards", start=request.start, end=request.end)


def _past(store: Store, key: str, at_once: bool) -> PastEpisode:
    past = PastEpisode(key, store.entries(key), tuple(store.samples(key)))
    return known_at_once(past) if at_once else past
