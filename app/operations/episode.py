"""Operations on episodes: which there are, one record, beginning one."""

from __future__ import annotations

import re
from collections.abc import Mapping
from dataclasses import dataclass, field
from difflib import get_close_matches
from typing import TYPE_CHECKING

from app.operations import policy
from app.operations.bed_in_use import label_questions
from app.operations.entry_questions import check_target
from app.operations.episode_shelf import OF_ONE_EPISODE, shelf_of
from app.operations.outcome import Outcome
from app.operations.recording import Recorded, append
from core.judgement.entry_doubts import gas_doubts
from core.record.channels import Kind, channel
from core.record.entries import from_reading
from core.record.episode import Episode
from core.record.instant import Instant
from core.record.local_time import check_not_future
from core.record.message import Message, refuse
from core.record.reading import Reading, read_value
from core.record.settings import NO_SETTINGS
from storage.errors import StoreError

if TYPE_CHECKING:
    from storage.store import Store

MOST_KEY = 60
_NUMBER_UNIT = re.compile(r"([+-]?(?:\d+(?:[.,]\d+)?|[.,]\d+))\s*(.*)")


@dataclass(frozen=True, slots=True)
class BeginRequest:
    """A new episode: its key, and profile facts as typed (channel key to text with its unit).

    `given` are values of other moments: a baseline gas, settings that ran before logging began.
    """

    episode: str
    facts: Mapping[str, str] = field(default_factory=dict)
    at: Instant | None = None
    zone: str = "UTC"
    confirmed: bool = False
    given: tuple[Given, ...] = ()


@dataclass(frozen=True, slots=True)
class Given:
    """Values of one moment as typed, channel key to text with its unit."""

    at: Instant
    values: Mapping[str, str]


@dataclass(frozen=True, slots=True)
class Beginning:
    """What beginning an episode would record: readings by moment, the facts first, and what to ask."""

    episode: str
    read: tuple[tuple[Instant, tuple[Reading, ...]], ...]
    questions: tuple[Message, ...]


@dataclass(frozen=True, slots=True)
class Record:
    """Which record is asked for, as known at a moment (None: all)."""

    episode: str
    as_known_at: Instant | None = None


def keys(store: Store, who: str, now: Instant, request: None) -> Outcome[tuple[str, ...]]:
    """Every episode, in order of first recording."""
    return Outcome(tuple(store.episode_keys()), store.head())


def record(store: Store, who: str, now: Instant, request: Record) -> Outcome[Episode]:
    """One episode's record.

    Raises:
        RecordError: `episode.unknown`.
    """
    return Outcome(load(store, request.episode, request.as_known_at), store.head())


def begin(store: Store, who: str, now: Instant, request: BeginRequest) -> Outcome[Recorded]:
    """Begin an episode with its profile. Undo takes back every entry: nothing of it stands then.

    Raises:
        RecordError: `episode.exists`, `episode.bad_key`, or what is wrong with a fact.
    """
    key = checked_key(request.episode)
    _check_free(store, key)
    entries = [
        from_reading(key, at, reading, by=who, zone=request.zone, confirmed=request.confirmed)
        for at, readings in _read(request, key, now)
        for reading in readings
    ]
    return append(store, key, tuple(entries), who, "episode.begin", now)


def preview_begin(store: Store, who: str, now: Instant, request: BeginRequest) -> Outcome[Beginning]:
    """What `begin` would record, and what to ask first; nothing is written.

    Raises:
        RecordError: as `begin`.
    """
    key = checked_key(request.episode)
    _check_free(store, key)
    read = _read(request, key, now)
    asked = [doubt for _, readings in read for r in readings for doubt in r.doubts]
    for _, readings in read:
        asked += label_questions(store, key, readings)
    for _, readings in read[1:]:
        asked += gas_doubts(readings, NO_SETTINGS, policy.in_force(store))
    return Outcome(Beginning(key, read, tuple(asked)), store.head())


def _check_free(store: Store, key: str) -> None:
    """Refuse a key in use; one whose episode was taken back whole may begin again."""
    if store.has_episode(key) and not load(store, key).is_empty:
        raise refuse("episode.exists", episode=key, accepted="a key that is not in use")


def _read(request: BeginRequest, key: str, now: Instant) -> tuple[tuple[Instant, tuple[Reading, ...]], ...]:
    """The readings of a request by moment, the facts first."""
    at = now if request.at is None else request.at
    moments = [(at, dict(request.facts) or {"label": key}), *((g.at, g.values) for g in request.given)]
    for moment, _ in moments:
        check_not_future(moment, now)
    read = tuple(
        (moment, tuple(typed_reading(name, text) for name, text in values.items())) for moment, values in moments
    )
    for moment, readings in read:
        check_target(Episode(key, (), {}, {}, ()), moment, readings)
    return read


def typed_reading(name: str, text: str) -> Reading:
    """A value as typed, its unit written at the number or behind it."""
    c = channel(name)
    match = _NUMBER_UNIT.fullmatch(text.strip()) if c.kind is Kind.NUMBER else None
    return read_value(c, match[1], match[2]) if match else read_value(c, text)


def checked_key(text: str) -> str:
    """The key of a new episode.

    Raises:
        RecordError: `episode.bad_key`.

    >>> checked_key(" N4-07 ")
    'N4-07'
    """
    key = text.strip()
    if not key or len(key) > MOST_KEY or any(c.isspace() or not c.isprintable() for c in key):
        raise refuse("episode.bad_key", episode=text[:MOST_KEY], accepted=MOST_KEY)
    return key


def check_known(store: Store, key: str) -> None:
    """Refuse a key that the store does not know.

    Raises:
        RecordError: `episode.unknown`, with the keys that are near.
    """
    if not store.has_episode(key):
        known = store.episode_keys()
        near = get_close_matches(key, known, 5, 0.5)
        shown = ", ".join(near or list(known[:8])) or "none yet"
        more = "" if near or len(known) <= 8 else f" and {len(known) - 8} more"
        raise refuse("episode.unknown", episode=key, accepted=f"{shown}{more}", near=bool(near))


def load_if_sound(store: Store, key: str, as_known_at: Instant | None = None) -> Episode | None:
    """As `load`; None where what a damaged store keeps of this one episode is not what was written.

    Raises:
        RecordError: `episode.unknown`.
        StoreError: damage that is not of one episode alone.
    """
    try:
        return load(store, key, as_known_at)
    except StoreError as error:
        if error.message.key not in OF_ONE_EPISODE:
            raise
        return None


def load(store: Store, key: str, as_known_at: Instant | None = None) -> Episode:
    """An episode's record as known at a moment; the shelf serves what is known now.

    Raises:
        RecordError: `episode.unknown`.
    """
    check_known(store, key)
    if as_known_at is None:
        return shelf_of(store).get(store, key)
    return store.episode(key, store.head_known_at(as_known_at))
