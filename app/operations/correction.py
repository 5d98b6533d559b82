"""Operations that supersede what was logged: correct, withdraw, move, undo. The old stays in the ledger."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

from app.operations.entry_questions import questions_of_change, reading_of
from app.operations.episode import check_known, load
from app.operations.outcome import Outcome
from app.operations.recording import Recorded, append
from core.record.channels import channel
from core.record.entries import Action, Entry, NewEntry, from_reading
from core.record.instant import Instant
from core.record.local_time import check_not_future
from core.record.message import Message, refuse
from core.record.reading import Reading, read_value

if TYPE_CHECKING:
    from storage.store import Store

TAKEN_BACK: Mapping[Action, Mapping[str | None, str]] = {
    Action.FLAG: {"seen": "not seen", "settled": "reopened"},
    Action.DUE: {"done": "open again", "not needed": "open again"},
}
"""The word that undoes a person's word."""


@dataclass(frozen=True, slots=True)
class CorrectionRequest:
    """A new value, time or both for an entry, with the reason."""

    episode: str
    entry_id: str
    reason: str
    value: str | None = None
    unit: str = ""
    at: Instant | None = None
    confirmed: bool = False


@dataclass(frozen=True, slots=True)
class WithdrawalRequest:
    """An entry that must not count, with the reason."""

    episode: str
    entry_id: str
    reason: str


@dataclass(frozen=True, slots=True)
class MoveRequest:
    """An entry that belongs to another episode, with the reason."""

    episode: str
    entry_id: str
    to_episode: str
    reason: str


@dataclass(frozen=True, slots=True)
class UndoRequest:
    """The entries of one recording, to be taken back."""

    episode: str
    ids: tuple[str, ...]


def correct(store: Store, who: str, now: Instant, request: CorrectionRequest) -> Outcome[Recorded]:
    """Supersede an entry by a new value, a new time, or both. The old one stays visible as corrected.

    Raises:
        RecordError: `correction.*`, or what is wrong with the value; `line.unconfirmed` where it asks first.
    """
    _check_reason(request.reason)
    old, at, reading = _right(store, now, request)
    asked = questions_of_change(store, load(store, request.episode), old, at, reading)
    if asked and not request.confirmed:
        raise refuse("line.unconfirmed", count=len(asked), first=asked[0].key)
    if request.value is None:
        new = replace(_as_new(old), at=at)
    else:
        new = from_reading(old.episode, at, reading, zone=old.zone, note=old.note, confirmed=request.confirmed)
    new = replace(new, by=who, action=Action.CORRECT, replaces=old.id, reason=request.reason.strip())
    return append(store, old.episode, (new,), who, "entry.correct", now)


def correction_questions(
    store: Store, who: str, now: Instant, request: CorrectionRequest
) -> Outcome[tuple[Message, ...]]:
    """What to ask before a value takes the place of an entry's: its limits, a gas against itself, the course.

    Raises:
        RecordError: as `correct`, but for a reason that is missing.
    """
    old, at, reading = _right(store, now, request)
    return Outcome(questions_of_change(store, load(store, request.episode), old, at, reading), store.head())


def _right(store: Store, now: Instant, request: CorrectionRequest) -> tuple[Entry, Instant, Reading]:
    """The entry to be superseded, and the right moment and value."""
    old = _standing_entry(store, request.episode, request.entry_id)
    at = old.at if request.at is None else request.at
    check_not_future(at, now)
    if request.value is None:
        return old, at, reading_of(old)
    return old, at, read_value(channel(old.channel), request.value, request.unit)


def withdraw(store: Store, who: str, now: Instant, request: WithdrawalRequest) -> Outcome[Recorded]:
    """Let an entry no longer count; it stays visible as withdrawn.

    Raises:
        RecordError: `correction.*`.
    """
    old = _standing_entry(store, request.episode, request.entry_id)
    _check_reason(request.reason)
    new = replace(_withdrawal(old, who), reason=request.reason.strip())
    return append(store, old.episode, (new,), who, "entry.withdraw", now)


def move(store: Store, who: str, now: Instant, request: MoveRequest) -> Outcome[Recorded]:
    """Take an entry to the episode it belongs to.

    Raises:
        RecordError: `correction.*`, `episode.unknown`.
    """
    old = _standing_entry(store, request.episode, request.entry_id)
    _check_reason(request.reason)
    check_known(store, request.to_episode)
    if request.to_episode == old.episode:
        raise refuse("correction.same_episode", episode=old.episode, accepted="another episode")
    new = replace(_as_new(old), episode=request.to_episode, by=who, action=Action.MOVE, replaces=old.id,
                  reason=request.reason.strip())  # fmt: skip
    return append(store, request.to_episode, (new,), who, "entry.move", now)


def undo(store: Store, who: str, now: Instant, request: UndoRequest) -> Outcome[Recorded]:
    """Take back a recording by the inverse of each of its entries, the last first.

    Raises:
        RecordError: `undo.superseded` when somebody has changed one of them since; nothing is written then.
    """
    known = {e.id: e for e in store.entries(request.episode)}
    replaced = {e.replaces for e in known.values() if e.replaces}
    inverse = []
    for entry_id in reversed(request.ids):
        entry = known.get(entry_id)
        if entry is None:
            raise refuse("correction.unknown_entry", entry=entry_id, accepted="an entry of this episode")
        if entry_id in replaced:
            raise refuse("undo.superseded", channel=entry.channel)
        inverse.append(_inverse(entry, known, who))
    return append(store, request.episode, tuple(inverse), who, "entry.undo", now)


def _check_reason(reason: str) -> None:
    if not reason.strip():
        raise refuse("correction.no_reason", accepted="a few words")


def _standing_entry(store: Store, episode: str, entry_id: str) -> Entry:
    """The entry that is to be superseded: it must be in the store and still count."""
    check_known(store, episode)
    known = {e.id: e for e in store.entries(episode)}
    entry = known.get(entry_id)
    if entry is None or entry.action not in (Action.ASSERT, Action.CORRECT, Action.MOVE):
        raise refuse("correction.unknown_entry", entry=entry_id, accepted="an entry of this episode")
    if any(e.replaces == entry_id for e in known.values()):
        raise refuse("correction.superseded", channel=entry.channel, accepted="the value that counts now")
    return entry


def _as_new(entry: Entry) -> NewEntry:
    """The same value as a new entry, without what made the old one."""
    return NewEntry(
        entry.episode, entry.channel, entry.at, entry.number, entry.words, entry.raw, entry.raw_unit,
        entry.decimals, entry.zone, entry.by, entry.note, entry.doubt,
    )  # fmt: skip


def _withdrawal(old: Entry, who: str) -> NewEntry:
    return NewEntry(old.episode, old.channel, old.at, zone=old.zone, by=who, action=Action.WITHDRAW,
                    replaces=old.id)  # fmt: skip


def _inverse(entry: Entry, known: dict[str, Entry], who: str) -> NewEntry:
    """The entry that brings back what stood before `entry`. A word on a flag or due item is taken back by a word."""
    if entry.words in TAKEN_BACK.get(entry.action, ()):
        words = TAKEN_BACK[entry.action][entry.words]
        return replace(_as_new(entry), words=words, by=who, action=entry.action, reason="undo")
    before = known.get(entry.replaces)
    if before is None or before.action is Action.WITHDRAW:
        return replace(_withdrawal(entry, who), reason="undo")
    action = Action.MOVE if entry.action is Action.MOVE else Action.CORRECT
    return replace(_as_new(before), by=who, action=action, replaces=entry.id, reason="undo")
