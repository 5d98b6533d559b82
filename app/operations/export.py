"""Operations that write what the store holds into files that intake takes."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

from app.operations.episode import check_known
from app.operations.outcome import Outcome
from core.record.instant import Instant

if TYPE_CHECKING:
    from storage.store import Store


@dataclass(frozen=True, slots=True)
class ExportRequest:
    """Where to, and which episodes (empty: all). `as_known_at` None: all that is recorded."""

    path: Path
    episodes: tuple[str, ...] = ()
    as_known_at: Instant | None = None


def write(store: Store, who: str, now: Instant, request: ExportRequest) -> Outcome[int]:
    """Write a log file (CSV) of what stands; the number of its rows.

    Raises:
        RecordError: `episode.unknown`.
        StoreError: `store.exists`, `store.export_failed`.
    """
    from storage.export.log_csv import write_log_csv

    for key in request.episodes:
        check_known(store, key)
    head = None if request.as_known_at is None else store.head_known_at(request.as_known_at)
    rows = write_log_csv(store, request.path, episodes=request.episodes or None, head=head)
    return Outcome(rows, store.head())
