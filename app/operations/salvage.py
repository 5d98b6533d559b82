"""Saving what can be read of a damaged store. Works on files alone: the damaged store is never opened for writing."""

from __future__ import annotations

from dataclasses import dataclass, field
from pathlib import Path
from typing import TYPE_CHECKING

from app.operations.outcome import Outcome
from core.record.instant import Instant
from core.record.message import Message, Value

if TYPE_CHECKING:
    from storage.salvage import Salvaged


@dataclass(frozen=True, slots=True)
class SalvageRequest:
    """The damaged store, the store to be made, and the passphrase where it is encrypted."""

    old: Path
    new: Path
    passphrase: str | None = field(default=None, repr=False)


def salvage(store: object, who: str, now: Instant, request: SalvageRequest) -> Outcome[Salvaged]:
    """Save what can be read into a new store.

    Raises:
        StoreError: `store.missing`, `store.exists`, `store.damaged`, `store.not_a_store`, `key.*`.
    """
    from storage.salvage import salvage as save

    return Outcome(save(request.old, request.new, request.passphrase, by=who, now=now), 0)


def told(found: Salvaged) -> tuple[Message, ...]:
    """What was saved and what was lost, one message each, the losses after the gains."""
    values: dict[str, Value] = {"episodes": found.episodes, "entries": found.entries, "samples": found.samples,
                                "others": found.others}  # fmt: skip
    lines = [Message("salvage.saved", values)]
    for count, key in (
        (found.lost_rows, "salvage.rows_lost"), (found.lost_batches, "salvage.batches_lost"),
        (found.doubtful, "salvage.doubtful"), (found.unlinked, "salvage.unlinked"),
        (found.withdrawals_lost, "salvage.withdrawals_lost"), (found.lost_kept, "salvage.kept_lost"),
    ):  # fmt: skip
        if count:
            lines.append(Message(key, {"count": count}))
    if found.lost_at is not None:
        lines.append(Message("salvage.lost_between", {"first": found.lost_at[0], "last": found.lost_at[1]}))
    if found.tail_unknown:
        lines.append(Message("salvage.tail_unknown"))
    return tuple(lines)


def lost_nothing(found: Salvaged) -> bool:
    """Whether all that was there is there again, proved."""
    lost = found.lost_rows + found.lost_batches + found.lost_kept + found.doubtful + found.withdrawals_lost
    return not lost and not found.tail_unknown
