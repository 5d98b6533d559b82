"""Operations on entries: reading a typed line, recording it."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

from app.operations.entry_questions import check_target, questions
from app.operations.episode import checked_key, load
from app.operations.outcome import Outcome
from app.operations.recording import Recorded, append
from core.judgement.split_gas import moment_of_gas
from core.record.episode import Episode
from core.record.instant import Instant
from core.record.local_time import check_not_future
from core.record.log_line import LogLine, read_line
from core.record.message import Message, refuse
from core.record.settings import SettingsInForce
from core.record.support import begins_unseen

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
    at: Instant | None = None
    """The moment of a line that names no time of its own; now where left out."""


@dataclass(frozen=True, slots=True)
class Preview:
    """What a line would record, for whom, and what to ask first."""

    episode: str
    label: str
    line: LogLine
    questions: tuple[Message, ...]


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
    return append(store, made.episode, entries, who, "entry.log", now)


def _previewed(store: Store, now: Instant, request: LineRequest) -> Preview:
    episode = _episode(store, request.episode, new=request.new)
    settings = SettingsInForce(episode)
    said = now if request.at is None else request.at
    line = read_line(request.line, now=said, zone=request.zone, in_force=settings.at, gas_unit=request.gas_unit)
    if request.at is not None and line.time_typed:
        raise refuse("line.time_twice", accepted="a time on the line or a moment beside it")
    line = replace(line, at=moment_of_gas(line.readings, line.at, episode))
    check_not_future(line.at, now)
    check_target(episode, line.at, line.readings)
    if begins_unseen(episode, line.at, line.readings):
        line = replace(line, notes=(*line.notes, Message("line.start_unseen", {"accepted": "support started"})))
    return Preview(episode.key, episode.label, line, questions(store, episode, line.at, line.readings))


def _episode(store: Store, key: str, *, new: bool) -> Episode:
    if new and not store.has_episode(key.strip()):
        return Episode(checked_key(key), (), {}, {}, ())
    return load(store, key)
