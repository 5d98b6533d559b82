"""What every recording shares: its entries go into one batch; what was taken is told, for undo."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from app.operations.outcome import Outcome
from core.record.entries import NewEntry
from core.record.instant import Instant

if TYPE_CHECKING:
    from storage.store import Store


@dataclass(frozen=True, slots=True)
class Recorded:
    """Entries that were taken. `episode` and `ids` are what `undo` takes back."""

    episode: str
    ids: tuple[str, ...]
    entries: tuple[NewEntry, ...]


def append(
    store: Store, episode: str, entries: tuple[NewEntry, ...], who: str, operation: str, now: Instant
) -> Outcome[Recorded]:
    """Append entries in one batch and say what was taken."""
    receipt = store.append(entries, by=who, operation=operation, now=now)
    return Outcome(Recorded(episode, receipt.ids, entries), receipt.last_seq)
