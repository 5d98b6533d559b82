"""Hindsight: what a record says now of a moment that it did not say then. For reviewing a night as it was known."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from enum import StrEnum

from core.record.channels import CHANNELS
from core.record.entries import Action, Entry
from core.record.instant import Instant
from core.record.knowledge import VALUE_ACTIONS, Standing, standing


class Later(StrEnum):
    """What came later."""

    RECORDED = "recorded later"
    CORRECTED = "corrected later"
    WITHDRAWN = "withdrawn later"
    MOVED_AWAY = "moved to another episode later"


@dataclass(frozen=True, slots=True)
class Hindsight:
    """One value that had happened by the moment and was not known then as it is known now.

    `then` is what was known (None: nothing), `now` what counts today (None: nothing), `known_at` when the newest
    word on it was recorded. At least one of both is there.
    """

    what: Later
    then: Entry | None
    now: Entry | None
    known_at: Instant

    @property
    def entry(self) -> Entry:
        """What names it: the entry known then, else the one known now."""
        found = self.then or self.now
        assert found is not None
        return found


def hindsight(entries: Iterable[Entry], episode: str, head: int, until: Instant) -> tuple[Hindsight, ...]:
    """What entries recorded after the sequence `head` changed of what had happened by `until`, by time.

    Only values are compared; flags and due items follow from them. Late entries that were withdrawn again since are
    left out: neither then nor now do they count.

    >>> hindsight([], "E1", 0, 0)
    ()
    """
    every = sorted(entries, key=lambda e: e.seq)
    then, now = _values(standing(every, head), episode), _values(standing(every), episode)
    found = []
    for first in then.keys() | now.keys():
        old, new = then.get(first), now.get(first)
        happened = [s.entry.at for s in (old, new) if s is not None]
        if min(happened) <= until and (old is None or new is None or old.entry.id != new.entry.id):
            found.append(_told(first, old, new, every))
    return tuple(sorted(found, key=lambda h: (h.entry.at, h.entry.seq)))


def _values(found: Iterable[Standing], episode: str) -> dict[str, Standing]:
    """What counts for an episode, by the id that its chain began with."""
    return {s.first: s for s in found if s.entry.episode == episode and s.entry.action in VALUE_ACTIONS
            and s.entry.channel in CHANNELS}  # fmt: skip


def _told(first: str, old: Standing | None, new: Standing | None, every: list[Entry]) -> Hindsight:
    if new is not None:
        what = Later.RECORDED if old is None else Later.CORRECTED
        return Hindsight(what, None if old is None else old.entry, new.entry, new.entry.recorded_at)
    assert old is not None
    last = _last_word(first, every)
    what = Later.WITHDRAWN if last.action is Action.WITHDRAW else Later.MOVED_AWAY
    return Hindsight(what, old.entry, None, last.recorded_at)


def _last_word(first: str, every: list[Entry]) -> Entry:
    """The newest entry of the chain that began with `first`."""
    current = next(e for e in every if e.id == first)
    while followers := [e for e in every if e.replaces == current.id]:
        current = followers[-1]
    return current
