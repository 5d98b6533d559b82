"""One gas that is typed in two lines: half a gas judges nothing, and nobody would see why."""

from __future__ import annotations

from collections.abc import Sequence
from math import isnan
from typing import Final

from core.record.channels import Group
from core.record.episode import Episode
from core.record.gas_sample import GasSample
from core.record.instant import MINUTE, Instant
from core.record.message import Message
from core.record.reading import Reading

HALVES: Final = ("ph", "paco2")
WITHIN: Final = 10 * MINUTE
"""So long a slip is read out at most (common practice, no source)."""


def moment_of_gas(readings: Sequence[Reading], at: Instant, record: Episode) -> Instant:
    """The moment of the readings: of the gas of the same minute where they give of it what it lacks, else `at`.

    A line without a time is of the second in which it was typed; what is read off one slip is one gas.
    """
    new = {r.channel.key for r in readings if r.channel.group is Group.GAS}
    same = [g for g in record.gases if g.at // MINUTE == at // MINUTE]
    joined = next((g for g in same if new and not new & set(g.texts or {})), None)
    return at if joined is None or any(g.at == at for g in same) else joined.at


def rest_of_gas(readings: Sequence[Reading], at: Instant, record: Episode) -> tuple[Message, ...]:
    """The question of a half gas just before or after the other half: one sample, or two?

    >>> rest_of_gas((), 0, Episode("E1", (), {}, {}, ()))
    ()
    """
    new = {r.channel.key for r in readings}
    have = [k for k in HALVES if k in new]
    if len(have) != 1:
        return ()
    lacks = next(k for k in HALVES if k not in new)
    halves = [g for g in record.gases if abs(g.at - at) <= WITHIN and g.at // MINUTE != at // MINUTE
              and _has(g, lacks) and not _has(g, have[0])]  # fmt: skip
    if not halves:
        return ()
    other = min(halves, key=lambda g: abs(g.at - at))
    return (Message("gas.rest_of", {"at": other.at, "channel": have[0], "has": lacks}),)


def _has(gas: GasSample, quantity: str) -> bool:
    return not isnan(float(getattr(gas, quantity)))
