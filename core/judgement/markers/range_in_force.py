"""The SpO2 range in force over time, and when it became another one: prescribed, or by a gas that showed risk."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from core.judgement.markers.observed import Observed
from core.judgement.stretches import FOREVER
from core.record.instant import Instant
from core.record.message import Message


@dataclass(frozen=True, slots=True)
class RangeChange:
    """The newest change of the range in force, in %. `by_gas`: none was prescribed, a gas showed hypercapnic risk."""

    at: Instant
    before: tuple[float, float]
    after: tuple[float, float]
    by_gas: bool


def newest_change(seen: Observed) -> RangeChange | None:
    """The newest moment at which the range became another one; None where it has always been what it is.

    What is in force at the first entry is no change.
    """
    prescribed = {int(t) for c in ("target_spo2_low", "target_spo2_high") for t in seen.episode.number(c).t}
    moments = sorted(prescribed | ({seen.risk_since} if seen.risk_since else set()), reverse=True)
    first = seen.episode.first_at
    for at in moments:
        before, after = _at(seen, at - 1), _at(seen, at)
        if before != after and first is not None and at > first:
            return RangeChange(at, before, after, at not in prescribed)
    return None


def changed_since(seen: Observed, at: Instant) -> tuple[Message, ...]:
    """What a value of a moment has to say of its range, where another one is in force by now."""
    change = seen.once(newest_change)
    then, now = _at(seen, at), _at(seen, FOREVER)
    if change is None or then == now or at >= change.at:
        return ()
    told = {"low": then[0], "high": then[1], "since": change.at, "low_now": now[0], "high_now": now[1]}
    return (Message("evidence.range_then", {**told, "by": "gas" if change.by_gas else "prescribed"}),)


def _at(seen: Observed, at: Instant) -> tuple[float, float]:
    low, high = seen.targets(np.array([at], np.int64))
    return float(low[0]), float(high[0])
