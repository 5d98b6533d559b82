"""The entry: one thing logged. Who, when it happened, when it was recorded, what."""

from __future__ import annotations

from dataclasses import dataclass
from enum import StrEnum

from core.record.instant import Instant
from core.record.reading import Reading


class Action(StrEnum):
    """What an entry does to the record. Nothing is overwritten: a later entry supersedes."""

    ASSERT = "assert"
    CORRECT = "correct"
    """Replaces the entry named in `replaces` by this one."""
    WITHDRAW = "withdraw"
    """The entry named in `replaces` no longer stands; this entry carries no value of its own."""
    MOVE = "move"
    """The entry named in `replaces` belongs to this entry's episode; value and time are repeated here."""
    MASK = "mask"
    """Device samples of (source, channel) between `at` and `number` do not count."""
    SHIFT = "shift"
    """Device samples of (source, channel) are moved in time by `number` microseconds."""
    FLAG = "flag"
    """A transition of a flag: `words` holds its state, `raw` its evidence."""
    DUE = "due"
    """A person's word on a due item."""


@dataclass(frozen=True, slots=True)
class NewEntry:
    """An entry before the ledger has taken it: no sequence, no recording time yet.

    `number` is in the channel's canonical unit; `words` a choice or a text; both None for a bare event.
    `channel` is a key of the registry, except for flag and due entries (the flag's or item's key).
    """

    episode: str
    channel: str
    at: Instant
    number: float | None = None
    words: str | None = None
    raw: str = ""
    raw_unit: str = ""
    decimals: int | None = None
    zone: str = "UTC"
    by: str = ""
    note: str = ""
    doubt: str = ""
    action: Action = Action.ASSERT
    replaces: str = ""
    reason: str = ""
    source: str = ""


@dataclass(frozen=True, slots=True)
class Entry(NewEntry):
    """An entry of the ledger. `seq` orders; `id` names and never orders."""

    seq: int = 0
    id: str = ""
    recorded_at: Instant = 0


def from_reading(
    episode: str, at: Instant, reading: Reading, *, by: str = "", zone: str = "UTC", note: str = "",
    confirmed: bool = False,
) -> NewEntry:  # fmt: skip
    """The entry that a reading makes. An unconfirmed soft limit marks it doubtful."""
    doubt = "" if confirmed or not reading.doubts else reading.doubts[0].key
    return NewEntry(
        episode, reading.channel.key, at, reading.number, reading.words, reading.raw, reading.raw_unit,
        reading.decimals, zone, by, note, doubt,
    )  # fmt: skip


def recorded(new: NewEntry, seq: int, entry_id: str, recorded_at: Instant) -> Entry:
    """The new entry as the ledger keeps it."""
    return Entry(
        new.episode, new.channel, new.at, new.number, new.words, new.raw, new.raw_unit, new.decimals,
        new.zone, new.by, new.note, new.doubt, new.action, new.replaces, new.reason, new.source,
        seq, entry_id, recorded_at,
    )  # fmt: skip
