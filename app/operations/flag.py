"""Operations on flags: keeping their transitions in the ledger, and a person's word on one."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from typing import TYPE_CHECKING

from app.operations.episode import check_known, load, load_if_sound
from app.operations.outcome import Outcome
from app.operations.policy import in_force
from app.operations.recording import Recorded
from core.figures.episode_figures import episode_figures
from core.judgement.flag_history import transitions, word_on
from core.judgement.shapes import FlagFigure
from core.record.entries import NewEntry
from core.record.instant import Instant
from core.record.message import refuse

if TYPE_CHECKING:
    from storage.store import Store

SEEN, SETTLED = "seen", "settled"
_OPEN = ("raised", "seen")


@dataclass(frozen=True, slots=True)
class FlagRequest:
    """A flag of an episode by its id. `reason` is needed to settle it."""

    episode: str
    flag_id: str
    reason: str = ""


def keep_transitions(store: Store, who: str, now: Instant, request: Iterable[str]) -> Outcome[int]:
    """Write what happened to the flags of some episodes since the ledger was last told: raised, no longer met,
    undone. How many entries that took; none where the ledger says it already, or where another program holds the
    store: the next look tells it."""
    policy = in_force(store)
    entries: list[NewEntry] = []
    for key in (k for k in request if store.has_episode(k)):  # one may have been removed meanwhile
        record = load_if_sound(store, key)
        if record is None:  # the ward says so; the flags of others are kept all the same
            continue
        flags = episode_figures(record, now, policy).flags
        entries += transitions(flags, record.transitions, key, policy.hash, now)
    if not entries or not store.takes_writing():
        return Outcome(0, store.head())
    receipt = store.append(entries, by=who, operation="flag.transitions", now=now)
    return Outcome(len(entries), receipt.last_seq)


def see(store: Store, who: str, now: Instant, request: FlagRequest) -> Outcome[Recorded]:
    """Say that a person has seen a flag.

    Raises:
        RecordError: `flag.unknown`, `flag.not_open`.
    """
    return _say(store, who, now, request, SEEN)


def settle(store: Store, who: str, now: Instant, request: FlagRequest) -> Outcome[Recorded]:
    """Settle a flag with the reason: what was done, or why it does not hold here. Evidence stays visible.

    Raises:
        RecordError: `flag.unknown`, `flag.not_open`, `flag.no_reason`.
    """
    if not request.reason.strip():
        raise refuse("flag.no_reason", accepted="a few words")
    return _say(store, who, now, request, SETTLED)


def _say(store: Store, who: str, now: Instant, request: FlagRequest, words: str) -> Outcome[Recorded]:
    """Write a person's word; a flag that the ledger does not hold yet is raised in it first."""
    check_known(store, request.episode)
    record, policy = load(store, request.episode), in_force(store)
    flags = episode_figures(record, now, policy).flags
    flag = _open_flag(flags, request)
    raised = transitions(flags, record.transitions, request.episode, policy.hash, now)
    said = word_on(flag, words, who, now, request.episode, request.reason.strip())
    entries = (*raised, said)
    receipt = store.append(entries, by=who, operation=f"flag.{words}", now=now)
    return Outcome(Recorded(request.episode, receipt.ids[-1:], (said,)), receipt.last_seq)


def _open_flag(flags: Iterable[FlagFigure], request: FlagRequest) -> FlagFigure:
    found = next((f for f in flags if f.flag_id == request.flag_id), None)
    if found is None:
        raise refuse("flag.unknown", flag=request.flag_id, episode=request.episode)
    if found.state not in _OPEN:
        raise refuse("flag.not_open", marker=found.marker, state=found.state)
    return found
