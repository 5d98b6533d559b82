"""Operations that supersede what was logged: correct, withdraw, move, undo. The old stays in the ledger.

The values of one gas go together: one that is moved, withdrawn or given another time takes the rest of its gas with
it, in one batch. A single value of a gas (`alone`) asks first, since half a gas would be left.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

from app.operations.entry_questions import questions, questions_of_change, reading_of
from app.operations.episode import check_known, load
from app.operations.outcome import Outcome
from app.operations.recording import Recorded, append
from core.record.channels import channel
from core.record.entries import Action, Entry, NewEntry, from_reading
from core.record.gas_together import gas_with
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
    """A new value, time or both for an entry, with the reason. The time is that of its whole gas unless `alone`."""

    episode: str
    entry_id: str
    reason: str
    value: str | None = None
    unit: str = ""
    at: Instant | None = None
    confirmed: bool = False
    alone: bool = False


@dataclass(frozen=True, slots=True)
class WithdrawalRequest:
    """An entry, with its whole gas unless `alone`, that must not count, with the reason."""

    episode: str
    entry_id: str
    reason: str
    confirmed: bool = False
    alone: bool = False


@dataclass(frozen=True, slots=True)
class MoveRequest:
    """An entry, with its whole gas unless `alone`, that belongs to another episode, with the reason."""

    episode: str
    entry_id: str
    to_episode: str
    reason: str
    confirmed: bool = False
    alone: bool = False


Request = CorrectionRequest | WithdrawalRequest | MoveRequest


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
    olds, at, reading = _right(store, now, request)
    _check_asked(store, now, request)
    made = []
    for old in olds:
        new = replace(_as_new(old), at=at)
        if old.id == request.entry_id and request.value is not None:
            new = from_reading(old.episode, at, reading, zone=old.zone, note=old.note, confirmed=request.confirmed)
        made.append(replace(new, by=who, action=Action.CORRECT, replaces=old.id, reason=request.reason.strip()))
    return append(store, request.episode, tuple(made), who, "entry.correct", now)


def withdraw(store: Store, who: str, now: Instant, request: WithdrawalRequest) -> Outcome[Recorded]:
    """Let an entry no longer count; it stays visible as withdrawn.

    Raises:
        RecordError: `correction.*`; `line.unconfirmed` where it asks first.
    """
    olds = _superseded(store, request)
    _check_reason(request.reason)
    _check_asked(store, now, request)
    made = tuple(replace(_withdrawal(old, who), reason=request.reason.strip()) for old in olds)
    return append(store, request.episode, made, who, "entry.withdraw", now)


def move(store: Store, who: str, now: Instant, request: MoveRequest) -> Outcome[Recorded]:
    """Take an entry to the episode it belongs to.

    Raises:
        RecordError: `correction.*`, `episode.unknown`; `line.unconfirmed` where it asks first.
    """
    olds = _superseded(store, request)
    _check_reason(request.reason)
    _check_target(store, request)
    _check_asked(store, now, request)
    made = tuple(
        replace(_as_new(old), episode=request.to_episode, by=who, action=Action.MOVE, replaces=old.id,
                reason=request.reason.strip()) for old in olds
    )  # fmt: skip
    return append(store, request.to_episode, made, who, "entry.move", now)


def correction_questions(store: Store, who: str, now: Instant, request: Request) -> Outcome[tuple[Message, ...]]:
    """What to ask before entries are superseded: a value's limits, a gas against itself and the patient's last, the
    course, and whether half a gas is meant.

    Raises:
        RecordError: as the operation itself, but for a reason that is missing.
    """
    return Outcome(_questions(store, now, request), store.head())


def _check_asked(store: Store, now: Instant, request: Request) -> None:
    asked = () if request.confirmed else _questions(store, now, request)
    if asked:
        raise refuse("line.unconfirmed", count=len(asked), first=asked[0].key)


def _questions(store: Store, now: Instant, request: Request) -> tuple[Message, ...]:
    record = load(store, request.episode)
    whole = gas_with(request.entry_id, record.standing)
    half = _half_gas(request, whole)
    if isinstance(request, CorrectionRequest):
        olds, at, reading = _right(store, now, request)
        given = [reading if old.id == request.entry_id else reading_of(old) for old in olds]
        asked = questions_of_change(store, record, olds, at, given)
        return (*half, *asked) if request.at not in (None, olds[0].at) else asked
    olds = _superseded(store, request)
    if isinstance(request, WithdrawalRequest):
        return half
    _check_target(store, request)
    target = load(store, request.to_episode)
    return (*half, *questions(store, target, olds[0].at, [reading_of(old) for old in olds]))


def _half_gas(request: Request, whole: tuple[Entry, ...]) -> tuple[Message, ...]:
    """One value alone of a gas that has more: the rest would be left as another gas."""
    rest = [e for e in whole if e.id != request.entry_id]
    if not request.alone or not rest:
        return ()
    chosen = next(e for e in whole if e.id == request.entry_id)
    left = ",".join(dict.fromkeys(e.channel for e in rest))
    return (Message("correction.half_gas", {"channel": chosen.channel, "left": left, "at": chosen.at}),)


def _superseded(store: Store, request: Request) -> tuple[Entry, ...]:
    """The entries that a request is about: one, or the values of one gas."""
    one = _standing_entry(store, request.episode, request.entry_id)
    if request.alone:
        return (one,)
    return gas_with(one.id, load(store, request.episode).standing) or (one,)


def _right(store: Store, now: Instant, request: CorrectionRequest) -> tuple[tuple[Entry, ...], Instant, Reading]:
    """The entries to be superseded, their right moment, and the right value of the one that was chosen."""
    old = _standing_entry(store, request.episode, request.entry_id)
    at = old.at if request.at is None else request.at
    check_not_future(at, now)
    olds = (old,) if at == old.at else _superseded(store, request)
    if request.value is None:
        return olds, at, reading_of(old)
    return olds, at, read_value(channel(old.channel), request.value, request.unit)


def _check_target(store: Store, request: MoveRequest) -> None:
    check_known(store, request.to_episode)
    if request.to_episode == request.episode:
        raise refuse("correction.same_episode", episode=request.episode, accepted="another episode")


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
