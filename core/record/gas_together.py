"""Which entries are one gas: what is done to one of them, a move, a withdrawal, another time, is done to all."""

from __future__ import annotations

from collections import Counter
from collections.abc import Sequence

from core.record.channels import CHANNELS, Group
from core.record.entries import Entry
from core.record.knowledge import VALUE_ACTIONS, Standing


def gas_with(entry_id: str, known: Sequence[Standing]) -> tuple[Entry, ...]:
    """The entries that stand for one gas with an entry, itself among them, in order of recording.

    Of one moment are one sample. Where a channel was given twice for it, two gases share the moment, and only what
    was recorded in one line or file with the entry goes with it. An entry that is no gas value is alone.

    >>> gas_with("1", ())
    ()
    """
    chosen = next((s for s in known if s.entry.id == entry_id), None)
    if chosen is None:
        return ()
    if not _is_gas(chosen):
        return (chosen.entry,)
    one = [s for s in known if _is_gas(s) and s.entry.at == chosen.entry.at]
    if max(Counter(s.entry.channel for s in one).values()) > 1:
        one = [s for s in one if s.placed_at == chosen.placed_at]
    return tuple(s.entry for s in sorted(one, key=lambda s: s.entry.seq))


def _is_gas(s: Standing) -> bool:
    channel = CHANNELS.get(s.entry.channel)
    return channel is not None and channel.group is Group.GAS and s.entry.action in VALUE_ACTIONS
