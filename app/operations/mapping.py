"""Operations on mappings: looking at a table and proposing how to read it, keeping what a person answered."""

from __future__ import annotations

from collections.abc import Mapping as Map
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

from app.operations.episode_shelf import shelf_of
from app.operations.outcome import Outcome
from core.record.instant import Instant
from core.record.message import RecordError
from storage.intake.mapping import (
    Mapping,
    forget_mapping,
    keep_mapping,
    kept_mapping,
    kept_mappings,
)
from storage.intake.writing import AS_FOUND, Writing

if TYPE_CHECKING:
    from storage.intake.proposals import Proposal
    from storage.intake.recognising import Recognised
    from storage.intake.table import Table
    from storage.store import Store


@dataclass(frozen=True, slots=True)
class LookRequest:
    """A table to look at. `zone` is proposed for times without an offset; what a person says beats what is found.

    `given` is what was answered a moment ago for another part of the same night: it is taken where it fits. `by` is
    the kept mapping that a person chose, an empty text the proposal; None: the one that is recognised.
    """

    path: Path
    zone: str = ""
    said: Writing = AS_FOUND
    given: Mapping | None = None
    by: str | None = None


@dataclass(frozen=True, slots=True)
class Looked:
    """What a table shows: its beginning, what is proposed, the mapping that was recognised, all that are kept.

    `episodes` are what the ward calls those that go on, by key. `said` is how it was opened, by the person or the
    mapping; `several` are mappings that fit and read it otherwise.
    """

    table: Table
    proposal: Proposal
    recognised: Mapping | None
    kept: Map[str, Mapping]
    episodes: Map[str, str]
    said: Writing = AS_FOUND
    several: tuple[str, ...] = ()


def look(store: Store, who: str, now: Instant, request: LookRequest) -> Outcome[Looked]:
    """Look at a table's beginning; nothing is written.

    Raises:
        RecordError: it cannot be read, and why.
        OSError: it cannot be opened.
    """
    from storage.intake.findings import UnreadableFileError
    from storage.intake.proposals import propose

    kept = kept_mappings(store)
    try:
        found = _opened(request, kept)
    except UnreadableFileError as error:
        raise RecordError(error.message) from error
    looked = Looked(found.table, propose(found.table, request.zone), found.mapping, kept, _open_episodes(store),
                    found.said, found.several)  # fmt: skip
    return Outcome(looked, store.head())


def _opened(request: LookRequest, kept: Map[str, Mapping]) -> Recognised:
    """The table with the mapping that a person chose, gave a moment ago for another part, or that is recognised."""
    from storage.intake.recognising import Recognised, recognise
    from storage.intake.table import open_table

    if request.by is not None:
        chosen = kept.get(request.by)
        said = request.said if chosen is None else request.said.over(chosen.written)
        return Recognised(open_table(request.path, said), said, chosen)
    if request.given is not None:
        again = recognise(request.path, {request.given.name: request.given}, request.said)
        if again.mapping is not None:
            return again
    return recognise(request.path, kept, request.said)


def _open_episodes(store: Store) -> dict[str, str]:
    """The episodes that go on, by key what the ward calls them; one of which nothing stands is nobody's."""
    found = (shelf_of(store).get(store, key) for key in store.open_episode_keys())
    return {episode.key: episode.label for episode in found if not episode.is_empty}


def keep(store: Store, who: str, now: Instant, request: Mapping) -> Outcome[str]:
    """Keep a mapping by its name.

    Raises:
        RecordError: `mapping.no_name`.
    """
    keep_mapping(store, request)
    return Outcome(request.name, store.head())


def forget(store: Store, who: str, now: Instant, request: str) -> Outcome[str]:
    """Forget a mapping.

    Raises:
        RecordError: `mapping.unknown`.
    """
    kept_mapping(store, request)
    forget_mapping(store, request)
    return Outcome(request, store.head())


def keep_codes(store: Store, who: str, now: Instant, request: Map[str, str]) -> Outcome[dict[str, str]]:
    """Keep what a person said of senders' own codes: a channel for each, or an empty text where it is not wanted.

    Raises:
        RecordError: `mapping.channel_unknown`.
    """
    from storage.intake.kept_codes import keep_codes as keep_all

    return Outcome(keep_all(store, request), store.head())


def listed(store: Store, who: str, now: Instant, request: None) -> Outcome[dict[str, Mapping]]:
    """The mappings that are kept, by name."""
    return Outcome(kept_mappings(store), store.head())
