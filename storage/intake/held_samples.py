"""The device samples that a store already has, to tell what is new in a file from what was read before."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from core.record.instant import HOUR
from core.record.samples import Flags, Times
from storage.block_cuts import blocks_of
from storage.chunks import Block, decode
from storage.store import Store


@dataclass(frozen=True, slots=True)
class Compared:
    """What is new of some blocks, how many samples the store has just so, and how many others would lie under it."""

    fresh: list[Block]
    known: int = 0
    overlaid: int = 0


class HeldSamples:
    """The samples of one episode and channel in the store, as they stand."""

    def __init__(self, store: Store, episode: str, channel: str) -> None:
        self._store, self._episode, self._channel = store, episode, channel

    def compared(self, blocks: list[Block]) -> Compared:
        """The blocks, in order of time, without what is held just so.

        Of each hour that is left out which stands before its first and behind its last new sample. What is held in
        between comes along: the new block would hide it.
        """
        between = (blocks[0].t0, blocks[-1].t1)
        found = self._store.samples(self._episode, channel=self._channel, between=between)
        if not found:
            return Compared(blocks)
        held_t, held_v = found[0].t, found[0].v
        fresh: list[Block] = []
        known = overlaid = 0
        for block in blocks:
            t, v, decimals = decode(block.blob, block.t0)
            at = np.minimum(np.searchsorted(held_t, t), held_t.size - 1)
            same = (held_t[at] == t) & ((held_v[at] == v) | (np.isnan(held_v[at]) & np.isnan(v)))
            new = _new_of(t, same)
            known += int(t.size - new.sum())
            parts = [block] if new.all() else [b for a, z in _runs(new) for b in blocks_of(t[a:z], v[a:z], decimals)]
            under = sum(int(np.searchsorted(held_t, b.t1, "right") - np.searchsorted(held_t, b.t0)) for b in parts)
            overlaid += under - int((same & new).sum())
            fresh += parts
        return Compared(fresh, known, overlaid)


def _new_of(t: Times, same: Flags) -> Flags:
    """Which samples are to be taken: in each hour from the first to the last that is not held just so."""
    changed = np.flatnonzero(~same)
    if changed.size == 0:
        return ~same
    _hour, first = np.unique(t[changed] // HOUR, return_index=True)
    steps = np.zeros(t.size + 1, np.int64)
    steps[changed[first]] += 1
    steps[changed[np.append(first[1:], changed.size) - 1] + 1] -= 1
    taken: Flags = np.cumsum(steps[:-1]) > 0
    return taken


def _runs(new: Flags) -> list[tuple[int, int]]:
    """From where to where samples behind each other are new."""
    edges = np.flatnonzero(np.diff(np.concatenate(([False], new, [False])).astype(np.int8)))
    return list(zip(edges[::2].tolist(), edges[1::2].tolist(), strict=True))
