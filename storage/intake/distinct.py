"""Which rows are of one kind: by slots instead of by sorting, since a block holds few kinds and many rows."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from storage.intake.byte_fields import ByteFields, Offsets, Words

_MIX = np.uint64(0x9E3779B97F4A7C15)
_BITS = 14
_SHIFT = np.uint64(64 - _BITS)
_FEW = 2_000
_FOLD = np.uint64(29)


def slots(words: Words, bits: int = _BITS) -> Offsets:
    """A slot of `2 ** bits` for each word; equal words get equal slots, others seldom do."""
    found: Offsets = ((words * _MIX) >> np.uint64(64 - bits)).astype(np.int64)
    return found


def kinds(words: Words) -> tuple[Offsets, Offsets]:
    """The distinct words, shape (n,): a row of each, and for each row which of them it is.

    >>> first, which = kinds(np.array([7, 9, 7], np.uint64))
    >>> sorted(first.tolist()) in ([0, 1], [1, 2]), bool(which[0] == which[2] != which[1])
    (True, True)
    """
    if words.size < _FEW:
        _values, first, which = np.unique(words, return_index=True, return_inverse=True)
        return first, which
    slot = slots(words)
    held = np.full(1 << _BITS, -1, np.int64)
    held[slot] = np.arange(words.size)
    used = np.flatnonzero(held >= 0)
    number = np.empty(1 << _BITS, np.int64)
    number[used] = np.arange(used.size)
    first, which = held[used], number[slot]
    other = np.flatnonzero(words[first[which]] != words)  # two words in one slot
    if other.size:
        _values, more, of = np.unique(words[other], return_index=True, return_inverse=True)
        which[other] = first.size + of
        first = np.concatenate((first, other[more]))
    return first, which


def groups(fields: ByteFields, columns: Sequence[int], rows: Offsets) -> list[Offsets]:
    """The places in `rows` of each group of rows that have equal fields in some columns."""
    if rows.size == 0:
        return []
    mixed = np.zeros(rows.size, np.uint64)
    parts: list[Words] = []
    for column in columns:
        length = fields.length[column, rows].astype(np.uint64)
        for part in range(fields.parts(column, rows)):
            word = fields.word(column, part, rows)
            parts.append(word)
            mixed = (mixed ^ word) * _MIX
            mixed ^= mixed >> _FOLD
        mixed = (mixed ^ length) * _MIX
    first, which = kinds(mixed)
    if first.size == 1 and all((word == word[0]).all() for word in parts):
        return [np.arange(rows.size)]
    same = np.ones(rows.size, np.bool_)
    for word in parts:  # equal mixes are not yet equal fields
        same &= word == word[first][which]
    counts = np.bincount(which, minlength=first.size)
    small: NDArray[np.uint16] | Offsets = which.astype(np.uint16) if first.size < 1 << 16 else which
    order = np.argsort(small, kind="stable")
    made = [places[same[places]] for places in np.split(order, np.cumsum(counts)[:-1])]
    return made if same.all() else made + _by_text(fields, columns, rows, np.flatnonzero(~same))


def _by_text(fields: ByteFields, columns: Sequence[int], rows: Offsets, places: Offsets) -> list[Offsets]:
    """Groups of the few rows whose mix is that of other fields."""
    found: dict[tuple[str, ...], list[int]] = {}
    for place in places.tolist():
        row = int(rows[place])
        found.setdefault(tuple(fields.text(row, c) for c in columns), []).append(place)
    return [np.array(some, np.int64) for some in found.values()]
