"""Operations on entries: reading a typed line, recording it, correcting, withdrawing, moving, undoing."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

from app.operations.episode import check_known, checked_key, load
from app.operations.outcome import Outcome
from app.operations.policy import in_force
from core.judgement.entry_doubts import gas_doubts
from core.judgement.second_value import second_values
from core.record.channels import Group, channel
from core.record.entries import Action, Entry, NewEntry, from_reading
from core.record.episode import Episode
from core.record.instant import Instant
from core.record.local_time import check_not_future
from core.record.log_line import LogLine, read_line
from core.record.message import Message, refuse
from core.record.reading import Reading, read_value
from core.record.settings import SettingsInForce

if TYPE_CHECKING:
    from storage.store import Store


@dataclass(frozen=True, slots=True)
class LineRequest:
    """A line as typed for an episode. `confirmed`: a person has answered its questions with yes.

    `new`: begin the episode if the store does not know it. `gas_unit`: of gas pressures typed without one.
    """

    episode: str
    line: str
    zone: str
    confirmed: bool = False
    new: bool = False
    gas_unit: str = "mmHg"


@dataclass(frozen=True, slots=True)
class Preview:
    """What a line would record, for whom, and what to ask first."""

    episode: str
    label: str
    line: LogLine
    questions: tuple[Message, ...]


@dataclass(frozen=True, slots=True)
class ReadingsRequest:
    """Readings of a form for one moment of an episode."""

    episode: str
    at: Instant
    readings: tuple[Reading, ...]
    zone: str
    confirmed: bool = False
    note: str = ""


@dataclass(frozen=True, slots=True)
class Recorded:
    """Entries that were taken. `episode` and `ids` are what `undo` takes back."""

    episode: str
    ids: tuple[str, ...]
    entries: tuple[NewEntry, ...]


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


def preview(store: Store, who: str, now: Instant, request: LineRequest) -> Outcome[Preview]:
    """What a line would record; nothing is written.

    Raises:
        RecordError: what the line lacks, or `episode.unknown`.
    """
    return Outcome(_previewed(store, now, request), store.head())


def log_line(store: Store, who: str, now: Instant, request: LineRequest) -> Outcome[Recorded]:
    """Record a line as typed.

    Raises:
        RecordError: what is wrong with the line; `line.unconfirmed` where it asks something first.
    """
    made = _previewed(store, now, request)
    if made.questions and not request.confirmed:
        raise refuse("line.unconfirmed", count=len(made.questions), first=made.questions[0].key)
    entries = made.line.entries(made.episode, by=who, zone=request.zone, confirmed=request.confirmed)
    return _append(store, made.episode, entries, who, "entry.log", now)


def questions(store: Store, now: Instant, request: ReadingsRequest) -> tuple[Message, ...]:
    """What to ask before readings are recorded: soft limits, and gases that do not agree."""
    episode = _episode(store, request.episode, new=False)
    return _questions(store, episode, request.at, request.readings)


def log_readings(store: Store, who: str, now: Instant, request: ReadingsRequest) -> Outcome[Recorded]:
    """Record the readings of a form.

    Raises:
        RecordError: `entry.in_future`; `line.unconfirmed` where something is to be asked first.
    """
    check_not_future(request.at, now)
    asked = questions(store, now, request)
    if asked and not request.confirmed:
        raise refuse("line.unconfirmed", count=len(asked), first=asked[0].key)
    entries = tuple(
        from_reading(request.episode, request.at, r, by=who, zone=request.zone, note=request.note,
                     confirmed=request.confirmed)
        for r in request.readings
    )  # fmt: skip
    return _append(store, request.episode, entries, who, "entry.log", now)


def correct(store: Store, who: str, now: Instant, request: CorrectionRequest) -> Outcome[Recorded]:
    """Supersede an entry by a new value, a new time, or both. The old one stays visible as corrected.

    Raises:
        RecordError: `correction.*`, or what is wrong with the value.
    """
    old = _standing_entry(store, request.episode, request.entry_id)
    _check_reason(request.reason)
    at = old.at if request.at is None else request.at
    check_not_future(at, now)
    if request.value is None:
        new = replace(_as_new(old), at=at)
    else:
        reading = read_value(channel(old.channel), request.value, request.unit)
        asked = correction_questions(old, request.value, request.unit)
        if asked and not request.confirmed:
            raise refuse("line.unconfirmed", count=len(asked), first=asked[0].key)
        new = from_reading(old.episode, at, reading, zone=old.zone, note=old.note, confirmed=request.confirmed)
    new = replace(new, by=who, action=Action.CORRECT, replaces=old.id, reason=request.reason.strip())
    return _append(store, old.episode, (new,), who, "entry.correct", now)


def correction_questions(old: Entry, value: str | None, unit: str) -> tuple[Message, ...]:
    """What to ask before a value takes the place of an entry's: the value, its limits.

    Raises:
        RecordError: what is wrong with the value.
    """
    return () if value is None else read_value(channel(old.channel), value, unit).doubts


def withdraw(store: Store, who: str, now: Instant, request: WithdrawalRequest) -> Outcome[Recorded]:
    """Let an entry no longer count; it stays visible as withdrawn.

    Raises:
        RecordError: `correction.*`.
    """
    old = _standing_entry(store, request.episode, request.entry_id)
    _check_reason(request.reason)
    new = replace(_withdrawal(old, who), reason=request.reason.strip())
    return _append(store, old.episode, (new,), who, "entry.withdraw", now)


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
    return _append(store, request.to_episode, (new,), who, "entry.move", now)


TAKEN_BACK: Mapping[Action, Mapping[str | None, str]] = {
    Action.FLAG: {"seen": "not seen", "settled": "reopened"},
    Action.DUE: {"done": "open again", "not needed": "open again"},
}
"""The word that undoes a person's word."""


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
    return _append(store, request.episode, tuple(inverse), who, "entry.undo", now)


def _previewed(store: Store, now: Instant, request: LineRequest) -> Preview:
    episode = _episode(store, request.episode, new=request.new)
    settings = SettingsInForce(episode)
    line = read_line(request.line, now=now, zone=request.zone, in_force=settings.at, gas_unit=request.gas_unit)
    check_not_future(line.at, now)
    return Preview(episode.key, episode.label, line, questions(store, episode, line.at, line.readings))


def _episode(store: Store, key: str, *, new: bool) -> Episode:
    if new and key.strip() not in store.episode_keys():
        return Episode(checked_key(key), (), {}, {}, ())
    return load(store, key)


def _append(
    store: Store, episode: str, entries: tuple[NewEntry, ...], who: str, operation: str, now: Instant
) -> Outcome[Recorded]:
    receipt = store.append(entries, by=who, operation=operation, now=now)
    return Outcome(Recorded(episode, receipt.ids, entries), receipt.last_seq)


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
