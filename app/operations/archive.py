"""Operations on ended episodes: which there are, copying them into an archive, removing them in time."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

from app.operations.outcome import Outcome
from app.operations.people import require_lead
from core.record.instant import Instant
from core.record.message import Message
from storage import archive

if TYPE_CHECKING:
    from storage.archive import Archived, Ended, Removed
    from storage.store import Store


@dataclass(frozen=True, slots=True)
class ArchiveRequest:
    """Ended episodes and the archive to be made of them."""

    path: Path
    episodes: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class EndedEpisodes:
    """The ended episodes, for how many days the ward keeps them (None: not said), and how many closed handovers are
    older than that."""

    episodes: tuple[Ended, ...]
    days: int | None
    old_documents: int = 0


def listed(store: Store, who: str, now: Instant, request: None) -> Outcome[EndedEpisodes]:
    """Every ended episode, the longest ended first."""
    found = EndedEpisodes(archive.ended(store), archive.retention_days(store), archive.old_documents(store, now))
    return Outcome(found, store.head())


def write(store: Store, who: str, now: Instant, request: ArchiveRequest) -> Outcome[Archived]:
    """Copy ended episodes into a new archive.

    Raises:
        RecordError: `archive.nothing`, `archive.not_ended`.
        StoreError: `store.exists`, `store.no_folder`, `store.disk_full`, `archive.differs`.
    """
    made = archive.write(store, request.episodes, request.path, by=who, now=now)
    return Outcome(made, store.head())


def set_retention(store: Store, who: str, now: Instant, request: int) -> Outcome[None]:
    """Say for how many days after its end an episode must stay; a ward lead does.

    Raises:
        RecordError: `people.lead_needed`, `archive.bad_retention`.
    """
    require_lead(store, who)
    archive.set_retention(store, request, by=who, now=now)
    return Outcome(None, store.head())


def remove(store: Store, who: str, now: Instant, request: tuple[str, ...]) -> Outcome[tuple[Removed, ...]]:
    """Remove episodes whose retention time is over, for good, with documents as old; a ward lead does. None named:
    such documents alone.

    Raises:
        RecordError: `people.lead_needed`, `archive.no_retention`, `archive.not_ended`, `archive.too_early`: those
            before it are removed.
    """
    require_lead(store, who)
    if not request:
        gone = archive.remove_documents(store, by=who, now=now)
        return Outcome((archive.Removed("", gone),), store.head())
    removed = tuple(archive.remove(store, episode, by=who, now=now) for episode in request)
    return Outcome(removed, store.head())


def told(removed: tuple[Removed, ...]) -> tuple[Message, ...]:
    """What went, and what may still name those who went, in messages."""
    episodes = sum(bool(r.episode) for r in removed)
    lines = [Message("archive.removed", {"episodes": episodes, "documents": sum(r.documents for r in removed)})]
    until = [r.naming_until for r in removed if r.naming_until is not None]
    if until:
        lines.append(Message("archive.still_named", {"count": max(r.naming for r in removed), "until": max(until)}))
    return tuple(lines)
