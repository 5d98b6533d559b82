"""Operations on episodes: which there are, one record, beginning one."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from difflib import get_close_matches
from typing import TYPE_CHECKING

from app.operations.episode_shelf import shelf_of
from app.operations.outcome import Outcome
from core.record.channels import channel
from core.record.entries import NewEntry, from_reading
from core.record.episode import Episode
from core.record.instant import Instant
from core.record.message import refuse
from core.record.reading import read_value

if TYPE_CHECKING:
    from storage.store import Store

MOST_KEY = 60


@dataclass(frozen=True, slots=True)
class BeginRequest:
    """A new episode: its key, and profile facts as typed (channel key to text, or to text and unit)."""

    episode: str
    facts: Mapping[str, str] = field(default_factory=dict)
    at: Instant | None = None
    zone: str = "UTC"
    confirmed: bool = False


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


def begin(store: Store, who: str, now: Instant, request: BeginRequest) -> Outcome[tuple[str, ...]]:
    """Begin an episode with its profile; the ids of its entries.

    Raises:
        RecordError: `episode.exists`, `episode.bad_key`, or what is wrong with a fact.
    """
    key = checked_key(request.episode)
    if key in store.episode_keys():
        raise refuse("episode.exists", episode=key, accepted="a key that is not in use")
    at = now if request.at is None else request.at
    facts = dict(request.facts) or {"label": key}
    entries: list[NewEntry] = []
    for name, text in facts.items():
        reading = read_value(channel(name), text)
        entries.append(from_reading(key, at, reading, by=who, zone=request.zone, confirmed=request.confirmed))
    receipt = store.append(entries, by=who, operation="episode.begin", now=now)
    return Outcome(receipt.ids, receipt.last_seq)


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
    known = store.episode_keys()
    if key not in known:
        near = ", ".join(get_close_matches(key, known, 5, 0.5) or list(known[:8])) or "none yet"
        raise refuse("episode.unknown", episode=key, accepted=near)


def load(store: Store, key: str, as_known_at: Instant | None = None) -> Episode:
    """An episode's record as known at a moment; the shelf serves what is known now.

    Raises:
        RecordError: `episode.unknown`.
    """
    check_known(store, key)
    if as_known_at is None:
        return shelf_of(store).get(store, key)
    return store.episode(key, store.head_known_at(as_known_at))
