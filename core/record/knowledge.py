"""What stands: which entries count, given all that had been recorded by a sequence.

As known at T is the largest sequence recorded by T; only then is `replaces` resolved. So a correction that
came later changes nothing about what was known before it.

Two corrections of one entry: the later sequence wins and the value is shown as disputed. A correction of a
correction, or a withdrawal of one, acts on the chain: withdrawing a correction brings back nothing, since the
corrected entry was judged wrong when it was corrected. An undo is the inverse entry: a correction that
replaces the correction, or the withdrawal, with the value before it.
"""

from __future__ import annotations

from bisect import bisect_right
from collections.abc import Iterable, Sequence
from dataclasses import dataclass

from core.record.entries import Action, Entry
from core.record.instant import Instant

VALUE_ACTIONS = frozenset({Action.ASSERT, Action.CORRECT, Action.MOVE})
REPLACING_ACTIONS = frozenset({Action.CORRECT, Action.WITHDRAW, Action.MOVE})


@dataclass(frozen=True, slots=True)
class Standing:
    """An entry that counts, with what is known of its past.

    `first` is the id of the entry the chain began with (the same id while it is uncorrected). `place` orders what
    happened at one instant: the sequence by which the value was first put at its time, at `placed_at`. A corrected
    value keeps the place of what it corrects; a corrected time is a new place.
    """

    entry: Entry
    first: str
    corrected: bool = False
    disputed: bool = False
    place: int = 0
    placed_at: Instant = 0


def head_known_at(entries: Sequence[Entry], known_at: Instant) -> int:
    """The largest sequence recorded by `known_at`; 0 when nothing had been. Entries in order of sequence.

    `recorded_at` never steps back, so a search by halves is exact.
    """
    index = bisect_right(entries, known_at, key=lambda e: e.recorded_at)
    return entries[index - 1].seq if index else 0


def standing(entries: Iterable[Entry], head: int | None = None) -> tuple[Standing, ...]:
    """The entries that count, ordered by (at, seq), resolving `replaces` among sequences up to `head`.

    Flag, due, mask and shift entries are returned as they are. The episode of a standing entry is its own:
    a move changes it.

    >>> standing([])
    ()
    """
    known = sorted((e for e in entries if head is None or e.seq <= head), key=lambda e: e.seq)
    by_id = {e.id: e for e in known}
    successors: dict[str, list[Entry]] = {}
    for e in known:
        if e.action in REPLACING_ACTIONS and e.replaces in by_id and by_id[e.replaces].seq < e.seq:
            successors.setdefault(e.replaces, []).append(e)
    out: list[Standing] = []
    for e in known:
        if e.action is Action.ASSERT:
            end = _end_of_chain(e, successors)
            if end is not None:
                out.append(end)
        elif e.action not in REPLACING_ACTIONS:
            out.append(Standing(e, e.id, place=e.seq, placed_at=e.recorded_at))
    out.sort(key=lambda s: (s.entry.at, s.entry.seq))
    return tuple(out)


def _end_of_chain(first: Entry, successors: dict[str, list[Entry]]) -> Standing | None:
    """Follow the replacements of an entry to the one that counts, or None when it was withdrawn."""
    current, placed, disputed, corrected = first, first, False, False
    while followers := successors.get(current.id):
        disputed = disputed or len(followers) > 1
        before, current = current, followers[-1]
        if (current.at, current.episode) != (before.at, before.episode):
            placed = current
        corrected = True
    if current.action is Action.WITHDRAW:
        return None
    return Standing(current, first.id, corrected, disputed, placed.seq, placed.recorded_at)
