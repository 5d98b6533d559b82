"""The robust slope of Theil and Sen: the median of all pairwise slopes, with Sen's interval.

Source: Sen, J Am Stat Assoc 1968;63:1379; interval by the normal approximation of Kendall's S, ties corrected.
Exact and quadratic: for up to about 300 points. Device channels are reduced to 15-min medians first.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache
from math import nan, sqrt
from statistics import NormalDist

import numpy as np

from core.record.samples import Values


@dataclass(frozen=True, slots=True)
class SenLine:
    """slope (y per t), intercept (median y - slope x median t), and the interval of the slope."""

    slope: float
    intercept: float
    low: float
    high: float


NO_LINE = SenLine(nan, nan, nan, nan)


@lru_cache(maxsize=8)
def _quantile(confidence: float) -> float:
    return NormalDist().inv_cdf(0.5 + confidence / 2.0)


def theil_sen(t: Values, y: Values, confidence: float = 0.95) -> SenLine:
    """The Theil-Sen line through points, shapes (n,); pairs of equal t give no slope.

    All NaN for fewer than two distinct t. With two points the interval is NaN: one slope has no spread.

    Raises:
        ValueError: t and y differ in length, or a confidence that is not between 0 and 1.

    >>> t, y = np.array([1.0, 2, 3, 4, 10, 12, 18]), np.array([9.0, 15, 19, 20, 45, 55, 78])
    >>> theil_sen(t, y, 0.93).slope
    4.0
    """
    t, y = np.asarray(t, np.float64), np.asarray(y, np.float64)
    if t.shape != y.shape:
        raise ValueError(f"t has {t.size} points and y {y.size}: they must be as many")
    if not 0.0 < confidence < 1.0:
        raise ValueError(f"confidence {confidence}: accepted is a share between 0 and 1")
    i, j = np.triu_indices(t.size, 1)
    run = t[j] - t[i]
    pairs = run != 0
    slopes = (y[j] - y[i])[pairs] / run[pairs]
    if not slopes.size:
        return NO_LINE
    slopes.sort()
    slope = _middle(slopes)
    intercept = _middle(np.sort(y)) - slope * _middle(np.sort(t))
    low, high = _interval(slopes, t, y, confidence)
    return SenLine(slope, intercept, low, high)


def _middle(ordered: Values) -> float:
    half = ordered.size // 2
    if ordered.size % 2:
        return float(ordered[half])
    return float((ordered[half - 1] + ordered[half]) / 2.0)


def _interval(slopes: Values, t: Values, y: Values, confidence: float) -> tuple[float, float]:
    """Sen's equation 2.6: the slopes at the ranks that S and its variance give."""
    n, pairs = t.size, slopes.size
    if n < 3:
        return nan, nan
    variance = (n * (n - 1) * (2 * n + 5) - _tie_term(t) - _tie_term(y)) / 18.0
    if variance < 0:
        return nan, nan
    spread = _quantile(confidence) * sqrt(variance)
    upper = min(int(np.round((pairs + spread) / 2.0)), pairs - 1)
    lower = max(int(np.round((pairs - spread) / 2.0)) - 1, 0)
    return float(slopes[lower]), float(slopes[upper])


def _tie_term(values: Values) -> int:
    _, counts = np.unique(values, return_counts=True)
    k = counts[counts > 1].astype(np.int64)
    return int((k * (k - 1) * (2 * k + 5)).sum())
