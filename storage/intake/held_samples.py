"""The device samples that a store already has, to tell hours that are new from hours read before."""

from __future__ import annotations

import numpy as np

from core.record.instant import HOUR
from core.record.samples import Times, Values
from storage.block_cuts import blocks_of
from storage.chunks import Block, decode
from storage.store import Store


class HeldSamples:
    """The samples of one episode and channel in the store, as they stand."""

    def __init__(self, store: Store, episode: str, channel: str) -> None:
        self._store, self._episode, self._channel = store, episode, channel

    def without_held(self, blocks: list[Block]) -> tuple[list[Block], int]:
        """The blocks without the hours that are held just so, and how many samples those have.

        An hour is held where every sample of it is in the store with the same value. `blocks` are in order of time.
        """
        between = (blocks[0].t0, blocks[-1].t1)
        found = self._store.samples(self._episode, channel=self._channel, between=between)
        if not found:
            return blocks, 0
        fresh: list[Block] = []
        known = 0
        for block in blocks:
            new = _new_of(block, found[0].t, found[0].v)
            known += block.n - sum(b.n for b in new)
            fresh += new
        return fresh, known


def _new_of(block: Block, held_t: Times, held_v: Values) -> list[Block]:
    t, v, decimals = decode(block.blob, block.t0)
    at = np.minimum(np.searchsorted(held_t, t), held_t.size - 1)
    same = (held_t[at] == t) & ((held_v[at] == v) | (np.isnan(held_v[at]) & np.isnan(v)))
    hours = np.concatenate(([0], np.flatnonzero(np.diff(t // HOUR)) + 1))
    held = np.logical_and.reduceat(same, hours)
    if not held.any():
        return [block]
    new = ~np.repeat(held, np.diff(np.append(hours, t.size)))
    return list(blocks_of(t[new], v[new], decimals))
