"""Operations that keep a store safe: a backup while others work, and a new store of a backup."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

from app.operations.outcome import Outcome
from core.record.instant import Instant

if TYPE_CHECKING:
    from storage.store import Store


@dataclass(frozen=True, slots=True)
class BackupFacts:
    """A backup that was written: where, how large, and the head it holds."""

    path: Path
    size: int
    printed_head: str


def write(store: Store, who: str, now: Instant, request: Path) -> Outcome[BackupFacts]:
    """Write a backup; an existing file is never overwritten.

    Raises:
        StoreError: `store.exists`, `store.no_folder`, `store.disk_full`, `store.backup_failed`.
    """
    head = store.printed_head()
    store.backup(request)
    return Outcome(BackupFacts(request, request.stat().st_size, head), store.head())


def restore(backup: Path, new: Path) -> None:
    """Make a new store of a backup. Works on files alone: no store is open yet.

    Raises:
        StoreError: `store.exists`, `store.missing`, `store.not_a_store`, `store.damaged`.
    """
    from storage.store import Store

    Store.restore(backup, new)
