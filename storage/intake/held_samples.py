"""The device samples that a store already has, to tell hours that are new from hours read before."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from core.record.samples import Times, Values
from storage.chunks import Block, decode
from storage.store import Store


class HeldSamples:
    """The samples of one episode and channel in the store, as they stand."""

    def __init__(self, store: Store, episode: str, channel: str) -> None:
        self._store, self._episode, self._channel = store, episode, channel

    def have(self, blocks: Sequence[Block]) -> list[bool]:
        """Whether every sample of each block is held with the same value. The blocks are in order of time."""
        between = (blocks[0].t0, blocks[-1].t1)
        found = self._store.samples(self._episode, channel=self._channel, between=between)
        if not found:
            return [False] * len(blocks)
        return [_has(found[0].t, found[0].v, block) for block in blocks]


def _has(held_t: Times, held_v: Values, block: Block) -> bool:
    first = int(np.searchsorted(held_t, block.t0))
    if first + block.n > held_t.size or held_t[first] != block.t0:
        return False
    t, v, _decimals = decode(block.blob, block.t0)
    i = first + np.searchsorted(held_t[first:], t)
    if i[-1] >= held_t.size:
        return False
    return np.array_equal(held_t[i], t) and np.array_equal(held_v[i], v, equal_nan=True)
