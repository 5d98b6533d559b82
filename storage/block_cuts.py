"""Where device samples are cut into blocks: by hour of the clock, by day where they are few.

A block has a place in the ledger's chain, which costs the same for three samples as for three thousand. So the hours
of a channel that writes once a minute lie together; those of one that writes each second stay alone, and a look at
one hour decodes little. No block spans a long pause: what another file recorded there stays seen.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

from core.record.instant import DAY, HOUR, MINUTE
from core.record.samples import Times, Values
from storage.chunks import BITS, REGULAR, Block, Integers, as_integers, block_head, decode, encode

FEW = 240
"""Samples in an hour that may lie in a block with its neighbours: one each 15 s."""
NEAR = 15 * MINUTE
"""How far two samples behind each other in one block may be apart. Between its first and last sample a block hides
what was recorded before it, so a pause that another file may fill must stay outside."""


def blocks_of(t: Times, v: Values, decimals: int) -> Iterator[Block]:
    """Samples as blocks of an hour of the clock (UTC) or less, or of up to a day where they are few and near.

    `t` is int64 us UTC, strictly increasing, `v` float64, shapes (n,). Joining the blocks gives the samples back.
    """
    if t.size == 0:
        return
    edges = _edges(t)
    few = np.diff(edges) <= FEW
    first, last = t[edges[1:-1]], t[edges[1:-1] - 1]  # on both sides of each border
    together = few[1:] & few[:-1] & (first // DAY == last // DAY) & (first - last <= NEAR)
    found = as_integers(v, np.isnan(v), decimals)  # of all at once: a block alone would mostly find the same
    if found is not None and found[0] != decimals:
        found = None
    for start, end in pairwise(edges[np.concatenate(([True], ~together, [True]))].tolist()):
        of_block = None if found is None else (found[0], found[1][start:end])
        yield encode(t[start:end], v[start:end], decimals, of_block)


def joined(hours: Iterable[Block], decimals: int) -> Iterator[Block]:
    """Blocks of an hour each, in order of time, cut as `blocks_of` cuts their samples."""
    waiting: list[Block] = []
    for hour in hours:
        if waiting and not _go_together(waiting[-1], hour):
            yield _as_one(waiting, decimals)
            waiting = []
        waiting.append(hour)
    if waiting:
        yield _as_one(waiting, decimals)


def _go_together(before: Block, after: Block) -> bool:
    few = before.n <= FEW and after.n <= FEW
    return few and before.t1 // DAY == after.t0 // DAY and after.t0 - before.t1 <= NEAR


def _as_one(blocks: list[Block], decimals: int) -> Block:
    if len(blocks) == 1:
        return blocks[0]
    parts = [decode(b.blob, b.t0) for b in blocks]
    return encode(np.concatenate([p[0] for p in parts]), np.concatenate([p[1] for p in parts]), decimals)


def _edges(t: Times) -> Integers:
    """Where an hour or a pause ends, with both ends of the samples."""
    parted = (np.diff(t // HOUR) > 0) | (np.diff(t) > NEAR)
    return np.concatenate(([0], np.flatnonzero(parted) + 1, [t.size]))


def hour_blocks(t: Times, v: Values, decimals: int) -> Iterator[Block]:
    """Samples, shape (n,), times strictly increasing, as one block per hour of the clock (UTC), parted at pauses."""
    if t.size == 0:
        return
    edges = _edges(t)
    plain = _plain_hours(t, v, decimals, edges)
    for i, (start, end) in enumerate(pairwise(edges.tolist())):
        yield plain.get(i) or encode(t[start:end], v[start:end], decimals)


def _plain_hours(t: Times, v: Values, decimals: int, edges: Integers) -> dict[int, Block]:
    """The hours of few samples in even steps, packed together: the same blocks would cost ten times as much alone.

    Hours with gaps, NaN, many samples or a wide span are left to `encode`.
    """
    sizes, starts = np.diff(edges), edges[:-1]
    found = as_integers(v, np.isnan(v), decimals)
    if found is None or sizes.size < 8:
        return {}
    scale, whole = found
    gaps = np.append(np.diff(t), 0)
    first_gap = gaps[starts]
    odd = gaps != np.repeat(first_gap, sizes)
    odd[edges[1:] - 1] = False  # the gap into the next hour is no matter
    odd |= np.isnan(v)
    low = np.minimum.reduceat(whole, starts)
    span = np.maximum.reduceat(whole, starts) - low
    good = ~np.logical_or.reduceat(odd, starts) & (sizes > 1) & (sizes <= FEW) & (span < 1 << 16)
    bits = np.ceil(np.log2(span + 1.0)).astype(np.int64)
    made: dict[int, Block] = {}
    for n, width in {(int(n), int(b)) for n, b in zip(sizes[good], bits[good], strict=True)}:
        hours = np.flatnonzero(good & (sizes == n) & (bits == width))
        rows = starts[hours, None] + np.arange(n)
        packed = _bit_rows(whole[rows] - low[hours, None], width)
        for k, hour in enumerate(hours.tolist()):
            at = int(starts[hour])
            head = block_head(REGULAR | BITS, scale, decimals, width, n, int(gaps[at]), int(low[hour]))
            made[hour] = Block(int(t[at]), int(t[at + n - 1]), n, head + packed[k].tobytes())
    return made


def _bit_rows(whole: Integers, bits: int) -> NDArray[np.uint8]:
    """Rows of integers, shape (k, n), each row packed to `bits` bits a number."""
    k, n = whole.shape
    as_bits = np.unpackbits(whole.astype(">u2").view(np.uint8).reshape(k, n, 2), axis=2)
    return np.packbits(as_bits[:, :, 16 - bits :].reshape(k, n * bits), axis=1)
