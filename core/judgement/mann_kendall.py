"""Mann-Kendall: is there a monotonic trend? Exact for ten points or fewer without ties, else by the normal.

Sources: Mann, Econometrica 1945;13:245; Kendall, Rank Correlation Methods; exact table for n <= 10, Gilbert 1987.
With three to five gases no p below 0.05 (n = 4) is reachable: show slope and band, no significance.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache
from math import erfc, nan, sqrt

import numpy as np

from core.record.samples import Values

EXACT_UP_TO = 10


@dataclass(frozen=True, slots=True)
class MannKendall:
    """S (ups minus downs), its variance, Z with continuity correction, two-sided p, and whether p is exact."""

    s: int
    variance: float
    z: float
    p: float
    exact: bool


def mann_kendall(y: Values) -> MannKendall:
    """The test on values in order of time, shape (n,), NaN left out. NaN figures for fewer than two values.

    Var = [n(n-1)(2n+5) - sum t(t-1)(2t+5)] / 18 over tied groups; Z = (S -/+ 1) / sqrt(Var).

    >>> result = mann_kendall(np.array([1.0, 2.0, 3.0, 4.0]))
    >>> result.s, round(result.p, 3), result.exact
    (6, 0.083, True)
    """
    y = np.asarray(y, np.float64)
    y = y[~np.isnan(y)]
    n = int(y.size)
    if n < 2:
        return MannKendall(0, nan, nan, nan, False)
    i, j = np.triu_indices(n, 1)
    s = int(np.sign(y[j] - y[i]).sum())
    _, counts = np.unique(y, return_counts=True)
    k = counts.astype(np.int64)
    variance = float(n * (n - 1) * (2 * n + 5) - (k * (k - 1) * (2 * k + 5)).sum()) / 18.0
    z = (s - np.sign(s)) / sqrt(variance) if variance > 0 else 0.0
    exact = n <= EXACT_UP_TO and bool((counts == 1).all())
    p = _exact_p(n, abs(s)) if exact else erfc(abs(float(z)) / sqrt(2.0))
    return MannKendall(s, variance, float(z), p, exact)


def _exact_p(n: int, s: int) -> float:
    """Two-sided p of |S| at least `s` among all orders of n different values."""
    counts = _inversions(n)
    pairs = n * (n - 1) // 2
    tail = sum(c for k, c in enumerate(counts) if pairs - 2 * k >= s)
    return min(1.0, 2.0 * tail / sum(counts))


@lru_cache(maxsize=16)
def _inversions(n: int) -> tuple[int, ...]:
    """How many orders of n values have k inversions, for each k (S = pairs - 2k)."""
    counts = np.array([1], dtype=np.int64)
    for size in range(2, n + 1):
        counts = np.convolve(counts, np.ones(size, np.int64))
    return tuple(int(c) for c in counts)
