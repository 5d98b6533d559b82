"""Seeded chance. RandomState and not a newer generator, because numpy promises never to change its stream."""

from __future__ import annotations

import zlib

import numpy as np

from sample_data.saturation import Values


class Dice:
    """Draws for one episode; the same kind, seed and purpose always give the same draws.

    >>> Dice("stable", 7, "patient").between(0, 1) == Dice("stable", 7, "patient").between(0, 1)
    True
    """

    def __init__(self, kind: str, seed: int, purpose: str) -> None:
        self._state = np.random.RandomState(zlib.crc32(f"{kind}/{seed}/{purpose}".encode()))

    def about(self, mean: float, sd: float, low: float, high: float) -> float:
        """A normal draw, kept inside limits."""
        return float(np.clip(self._state.normal(mean, sd), low, high))

    def between(self, low: float, high: float) -> float:
        """A uniform draw."""
        return float(self._state.uniform(low, high))

    def minute(self, around: int, spread: int) -> int:
        """A whole minute near `around`."""
        return around + int(self._state.randint(-spread, spread + 1))

    def chance(self, probability: float) -> bool:
        """True with a probability."""
        return bool(self._state.uniform() < probability)

    def one_of(self, *choices: str) -> str:
        """One of the choices."""
        return choices[int(self._state.randint(len(choices)))]

    def noise(self, count: int, sd: float) -> Values:
        """White noise, shape (count,)."""
        return np.asarray(self._state.normal(0.0, sd, count), np.float64)

    def wander(self, count: int, sd: float, memory: float) -> Values:
        """Noise that remembers: a first-order autoregression of standard deviation `sd`, shape (count,)."""
        steps = self.noise(count, sd * float(np.sqrt(1.0 - memory * memory)))
        out = np.empty(count)
        value = float(self._state.normal(0.0, sd))
        for i in range(count):
            value = memory * value + steps[i]
            out[i] = value
        return out
