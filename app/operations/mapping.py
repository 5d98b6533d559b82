"""Operations on mappings: looking at a table and proposing how to read it, keeping what a person answered."""

from __future__ import annotations

from collections.abc import Mapping as Map
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

from app.operations.outcome import Outcome
from core.record.instant import Instant
from core.record.message import RecordError
from storage.intake.mapping import (
    Mapping,
    forget_mapping,
    keep_mapping,
    kept_mapping,
    kept_mappings,
    recognised,
)

if TYPE_CHECKING:
    from storage.intake.proposals import Proposal
    from storage.intake.table import Table
    from storage.store import Store


@dataclass(frozen=True, slots=True)
class LookRequest:
    """A table to look at. `zone` is proposed for times without an offset; what a person says beats what is found."""

    path: Path
    zone: str = ""
    sheet: str = ""
    encoding: str = ""
    header_at: int = 0


@dataclass(frozen=True, slots=True)
class Looked:
    """What a table shows: its beginning, what is proposed, the mapping that was recognised, all that are kept."""

    table: Table
    proposal: Proposal
    recognised: Mapping | None
    kept: Map[str, Mapping]
    episodes: tuple[str, ...]


def look(store: Store, who: str, now: Instant, request: LookRequest) -> Outcome[Looked]:
    """Look at a table's beginning; nothing is written.

    Raises:
        RecordError: it cannot be read, and why.
        OSError: it cannot be opened.
    """
    from storage.intake.findings import UnreadableFileError
    from storage.intake.proposals import propose
    from storage.intake.table import open_table

    try:
        table = open_table(request.path, sheet=request.sheet, encoding=request.encoding, header_at=request.header_at)
    except UnreadableFileError as error:
        raise RecordError(error.message) from error
    kept = kept_mappings(store)
    proposal, known = propose(table, request.zone), recognised(table.header, kept)
    return Outcome(Looked(table, proposal, known, kept, store.open_episode_keys()), store.head())


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
