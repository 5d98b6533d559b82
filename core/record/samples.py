"""Device samples: what a machine wrote by the minute or the second, as arrays and never as entries."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from core.record.instant import Instant

Times = NDArray[np.int64]
Values = NDArray[np.float64]
Flags = NDArray[np.bool_]


@dataclass(frozen=True, slots=True)
class DeviceSamples:
    """One channel of one episode from one source.

    `t` int64 microseconds UTC, strictly increasing; `v` float64 in the canonical unit, NaN where the device
    wrote nothing; `decimals` as written.
    """

    episode: str
    channel: str
    source: str
    t: Times
    v: Values
    decimals: int = 0


def merge_samples(earlier: DeviceSamples, later: DeviceSamples) -> DeviceSamples:
    """Both blocks as one: where they overlap, between the later block's first and last time, the later wins.

    >>> a = DeviceSamples("E", "leak", "s", np.array([0, 1, 2, 3]), np.array([1.0, 1, 1, 1]))
    >>> b = DeviceSamples("E", "leak", "s", np.array([1, 2]), np.array([9.0, 9]))
    >>> merge_samples(a, b).v.tolist()
    [1.0, 9.0, 9.0, 1.0]
    """
    if later.t.size == 0:
        return earlier
    if earlier.t.size == 0:
        return later
    outside = (earlier.t < later.t[0]) | (earlier.t > later.t[-1])
    t = np.concatenate((earlier.t[outside], later.t))
    v = np.concatenate((earlier.v[outside], later.v))
    order = np.argsort(t, kind="stable")
    decimals = max(earlier.decimals, later.decimals)
    return DeviceSamples(earlier.episode, earlier.channel, later.source, t[order], v[order], decimals)


def mask_samples(samples: DeviceSamples, start: Instant, end: Instant) -> DeviceSamples:
    """The samples without those from `start` to `end`, both included."""
    keep = (samples.t < start) | (samples.t > end)
    return DeviceSamples(
        samples.episode, samples.channel, samples.source, samples.t[keep], samples.v[keep], samples.decimals
    )


def shift_samples(samples: DeviceSamples, by: int) -> DeviceSamples:
    """The samples moved in time by `by` microseconds (a device clock that was off)."""
    return DeviceSamples(
        samples.episode, samples.channel, samples.source, samples.t + by, samples.v, samples.decimals
    )
