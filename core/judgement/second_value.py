"""What to ask where a value is logged already for the very moment of a new one: which of the two is right?"""

from __future__ import annotations

from collections.abc import Sequence

from core.record.channels import Group, Kind
from core.record.entries import Entry
from core.record.instant import MINUTE, Instant
from core.record.knowledge import Standing
from core.record.message import Message
from core.record.reading import Reading


def second_values(readings: Sequence[Reading], at: Instant, known: Sequence[Standing]) -> tuple[Message, ...]:
    """The questions that a second, different value raises. `known`: what stands for the episode.

    A gas is known by its minute. Anything else may change within one and is compared at the same moment.
    """
    asks = []
    for r in readings:
        if r.channel.kind not in (Kind.NUMBER, Kind.CHOICE):
            continue
        width = MINUTE if r.channel.group is Group.GAS else 1
        same = (s.entry for s in known if s.entry.channel == r.channel.key and s.entry.at // width == at // width)
        before = max(same, key=lambda e: e.seq, default=None)
        if before is not None and _value(before) != r.value:
            asks.append(Message("doubt.second_value", {"channel": r.channel.key, "first": _value(before), "at": at}))
    return tuple(asks)


def _value(e: Entry) -> float | str | None:
    return e.words if e.number is None else e.number
