"""A due item before it has a state: what, why, from when until when, and what has closed it."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, replace

from core.judgement.shapes import DueFigure
from core.record.entries import Action, Entry
from core.record.instant import MINUTE, Instant
from core.record.message import Message

CLOSING = frozenset({"done", "not needed"})
OPEN_AGAIN = "open again"
"""A person's words on a due item, and the one that takes them back."""


RECURRING = frozenset({"skin_check", "reassessment"})


def words_on(transitions: Iterable[Entry], what: str) -> list[Entry]:
    """The words that close a due item and were not taken back, by time."""
    standing: list[Entry] = []
    for entry in transitions:
        if entry.action is not Action.DUE or entry.channel != what:
            continue
        if entry.words in CLOSING:
            standing.append(entry)
        elif entry.words == OPEN_AGAIN and standing:
            standing.pop()
    return standing


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


def closed_by_word(item: Item, transitions: Iterable[Entry]) -> Item:
    """The item closed by a person's word (`done`, `not needed`) at or after its beginning, unless it was taken back.

    What comes again and again counts its words as looks instead: closing one must not silence the next.
    """
    if item.done_at is not None or item.what in RECURRING:
        return item
    begun = item.due_from if item.anchor_at is None else min(item.due_from, item.anchor_at)
    said = next((e for e in words_on(transitions, item.what) if e.at >= begun), None)
    return item if said is None else replace(item, done_at=said.at, done_by=said.by or said.id)
