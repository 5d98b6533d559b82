"""A due item before it has a state: what, why, from when until when, and what has closed it."""

from __future__ import annotations

from dataclasses import dataclass

from core.judgement.shapes import DueFigure
from core.record.instant import MINUTE, Instant
from core.record.message import Message


@dataclass(frozen=True, slots=True)
class Item:
    """One thing that is due. `done_at` is set once it was done; `awaiting_since` where its result is awaited."""

    what: str
    because: Message
    due_from: Instant
    due_until: Instant
    soon_min: float
    anchor_at: Instant | None = None
    done_at: Instant | None = None
    done_by: str | None = None
    awaiting_since: Instant | None = None

    def state(self, as_of: Instant) -> str:
        """open, soon, overdue, awaiting result or done."""
        if self.done_at is not None:
            return "done"
        if self.awaiting_since is not None:
            return "awaiting result"
        if as_of > self.due_until:
            return "overdue"
        return "soon" if as_of >= self.due_until - int(self.soon_min * MINUTE) else "open"

    def figure(self, as_of: Instant) -> DueFigure:
        """The item as it is shown."""
        return DueFigure(self.what, self.because, self.due_from, self.due_until, self.state(as_of), self.done_by,
                         self.done_at, self.anchor_at)  # fmt: skip
