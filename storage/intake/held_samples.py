"""The device samples that a store already has, to tell hours that are new from hours read before."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from core.record.samples import Times, Values
from storage.chunks import Block, decode
from storage.store import Store


@dataclass(frozen=True, slots=True)
class HeldSamples:
    """The samples of one episode and channel in the store."""

    t: Times
    v: Values

    def has(self, block: Block) -> bool:
        """Whether every sample of a block is held with the same value."""
        t, v, _decimals = decode(block.blob, block.t0)
        i = np.searchsorted(self.t, t)
        if i[-1] >= self.t.size:
            return False
        return np.array_equal(self.t[i], t) and np.array_equal(self.v[i], v, equal_nan=True)


def held_samples(store: Store, episode: str, channel: str) -> HeldSamples | None:
    """What the store holds of one episode and channel, as it stands; None where it has nothing."""
    found = store.samples(episode, channel=channel)
    return HeldSamples(found[0].t, found[0].v) if found else None
