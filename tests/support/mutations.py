"""Files that time, a bad cable or an enemy changed, made by hypothesis: a failing one is told at its smallest."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from time import perf_counter

from hypothesis import HealthCheck, Phase, given, seed, settings
from hypothesis import strategies as st

CUT, NOISE, PUT, DOUBLE, DROP, FLIP = range(6)
BITS = (b"\x00\x00", b"\xff\xff", b"\x7f\xff", b"\x80\x00", b'"\n', b",,")
_AT_ONCE = 1000


@dataclass(frozen=True, slots=True)
class Edit:
    """One change: of which kind, where, how long, from which dice."""

    kind: int
    where: int
    length: int
    dice: int


def edits() -> st.SearchStrategy[list[Edit]]:
    """One to four changes."""
    one = st.builds(Edit, st.integers(0, 5), st.integers(0, 2**32), st.integers(1, 4096), st.integers(0, 2**32))
    return st.lists(one, min_size=1, max_size=4)


def changed(sound: bytes, made: list[Edit]) -> bytes:
    """The file with its changes, never empty."""
    data = bytearray(sound)
    for edit in made:
        at = edit.where * 2_654_435_761 % 2**32 % len(data)  # small numbers are as far apart as large ones
        end = at + edit.length
        if edit.kind == CUT:
            del data[at:]
        elif edit.kind == NOISE:
            size = min(edit.length, len(data) - at)
            data[at : at + size] = _noise(edit.dice, size)
        elif edit.kind == PUT:
            put = BITS[edit.dice % len(BITS)]
            data[at : at + len(put)] = put
        elif edit.kind == DOUBLE:
            data[at:at] = data[at:end]
        elif edit.kind == DROP:
            del data[at:end]
        else:
            data[at] ^= 1 << edit.dice % 8
        data = data or bytearray(b"\x00")
    return bytes(data)


def _noise(dice: int, size: int) -> bytes:
    import random

    return random.Random(dice).randbytes(size)


@dataclass(slots=True)
class Tally:
    """How many inputs were tried, how they ended, and the longest that any of them took."""

    counts: dict[str, int]
    slowest: float = 0.0

    def __str__(self) -> str:
        told = ", ".join(f"{count} {name}" for name, count in sorted(self.counts.items()))
        return f"{sum(self.counts.values())} inputs: {told}; slowest {self.slowest:.2f} s"


def fuzz(count: int, first_seed: int, tried: Callable[[list[Edit]], str]) -> Tally:
    """Try `count` sets of changes; `tried` says how each ended and raises where something is wrong."""
    tally = Tally({})
    for start in range(0, count, _AT_ONCE):

        @seed(first_seed + start)
        @settings(
            max_examples=min(_AT_ONCE, count - start), deadline=None, database=None,
            suppress_health_check=list(HealthCheck), phases=[Phase.generate, Phase.shrink],
        )  # fmt: skip
        @given(edits())
        def one(made: list[Edit]) -> None:
            begun = perf_counter()
            ended = tried(made)
            tally.slowest = max(tally.slowest, perf_counter() - begun)
            tally.counts[ended] = tally.counts.get(ended, 0) + 1

        one()
    return tally
