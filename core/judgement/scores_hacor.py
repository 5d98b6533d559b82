"""HACOR 2017 (Duan, Intensive Care Med 2017;43:192-199): failure of mask ventilation in hypoxaemic failure.

Inputs: heart rate /min, pH, GCS, PaO2/FiO2 mmHg, respiratory rate /min. The published table has whole-number
bins; pH is rounded half-up to 2 decimals, the others to whole numbers, and then binned. Range 0-25.
Several public re-tabulations carry wrong bins (GCS "<15 = 10", P/F "<=150 = 6", HR ">=120"): not these.
"""

from __future__ import annotations

from collections.abc import Mapping
from typing import Final

import numpy as np
from numpy.typing import ArrayLike, NDArray

from core.judgement.scores_binning import Input, half_up, half_up_array
from core.judgement.scores_population import hypoxaemic_not_hypercapnic
from core.judgement.scores_result import Part, Score, frozen, known, missing_part, total

SOURCE: Final = "Duan, Intensive Care Med 2017;43:192-199; doi 10.1007/s00134-016-4601-3"
CERTAINTY: Final = "secondary"
CUT_OFF: Final = 5.0
"""Above 5 at 1 h: failure likely (accuracy 81.8 % and 86 %)."""

Bins = tuple[tuple[float, float], ...]
"""Upper edges, each included, with their points; the last edge is infinite."""

_INFINITE: Final = float("inf")
BINS: Final[Mapping[str, tuple[int, Bins]]] = {
    "hr": (0, ((120, 0), (_INFINITE, 1))),
    "ph": (2, ((7.24, 4), (7.29, 3), (7.34, 2), (_INFINITE, 0))),
    "gcs": (0, ((10, 10), (12, 5), (14, 2), (_INFINITE, 0))),
    "pf": (0, ((100, 6), (125, 5), (150, 4), (175, 3), (200, 2), (_INFINITE, 0))),
    "rr": (0, ((30, 0), (35, 1), (40, 2), (45, 3), (_INFINITE, 4))),
}
"""Per input: decimals it is rounded to, and its bins."""

FAILURE_PERCENT: Final = ((1, 8), (3, 17), (5, 32), (7, 74), (9, 91), (11, 96), (25, 100))
"""Upper edge of points at 1 h, and the percentage that failed (secondary source)."""


def points_of(name: str, binned: float) -> float:
    """The points of a value that is already rounded.

    >>> points_of("ph", 7.34), points_of("ph", 7.35), points_of("pf", 201.0)
    (2, 0, 0)
    """
    return next(points for upper, points in BINS[name][1] if binned <= upper + 1e-9)


def part(name: str, value: Input, text: str | None = None) -> Part:
    """One input of the score as a part, missing or known."""
    decimals, bins = BINS[name]
    binned = half_up(value, decimals, text)
    if binned is None or value is None:
        every = [points for _, points in bins]
        return missing_part(min(every), max(every))
    return known(float(value), binned, points_of(name, binned))


def hacor(
    *,
    hr: Input = None,
    ph: Input = None,
    gcs: Input = None,
    pf: Input = None,
    rr: Input = None,
    paco2: Input = None,
    texts: Mapping[str, str | None] | None = None,
    on_mask: bool | None = True,
) -> Score:
    """HACOR with its bounds.

    Args:
        hr, ph, gcs, pf, rr: the inputs, None or NaN where not known.
        paco2: mmHg; only tells whether the failure is acutely hypercapnic (outside the population).
        texts: the inputs as typed, by name, in the same unit; they decide a rounding edge.
        on_mask: False on high-flow oxygen or nothing: outside the population.

    Returns:
        A score; `points` None where anything is missing, `lowest` and `highest` then bound it.

    >>> hacor(hr=128, ph=7.28, gcs=14, pf=140, rr=34).points
    11
    >>> s = hacor(hr=128, ph=7.28, pf=140, rr=34)
    >>> s.points, s.lowest, s.highest, s.missing
    (None, 9, 19, ('gcs',))
    """
    texts = texts or {}
    given: dict[str, Input] = {"hr": hr, "ph": ph, "gcs": gcs, "pf": pf, "rr": rr}
    parts = {name: part(name, value, texts.get(name)) for name, value in given.items()}
    points, lowest, highest, missing = total(parts)
    population, reason = hypoxaemic_not_hypercapnic(pf=pf, ph=ph, paco2=paco2, on_mask=on_mask)
    return Score("hacor", points, lowest, highest, missing, frozen(parts), population, reason, CERTAINTY, SOURCE)


def hacor_points(hr: ArrayLike, ph: ArrayLike, gcs: ArrayLike, pf: ArrayLike, rr: ArrayLike) -> NDArray[np.float64]:
    """HACOR points for arrays that broadcast; NaN where any input is NaN.

    Rounded half-up within a billionth (`scores_binning.half_up_array`): for a value whose text decides an
    edge use `hacor`.

    >>> hacor_points([128, 120], [7.28, 7.35], [14, 15], [140, 201], [34, float("nan")]).tolist()
    [11.0, nan]
    """
    given = {"hr": hr, "ph": ph, "gcs": gcs, "pf": pf, "rr": rr}
    parts = [_points_array(name, np.asarray(value, dtype=np.float64)) for name, value in given.items()]
    return np.asarray(sum(np.broadcast_arrays(*parts)), dtype=np.float64)


def _points_array(name: str, values: NDArray[np.float64]) -> NDArray[np.float64]:
    decimals, bins = BINS[name]
    rounded = half_up_array(values, decimals)
    edges = np.array([upper for upper, _ in bins[:-1]]) + 1e-9
    points = np.array([p for _, p in bins], dtype=np.float64)
    return np.where(np.isnan(values), np.nan, points[np.searchsorted(edges, rounded, side="left")])


def failure_percent(points: float) -> float:
    """The percentage that failed at that HACOR 1 h after the start in the source; NaN outside 0-25.

    >>> failure_percent(6), failure_percent(12)
    (74.0, 100.0)
    """
    if not 0 <= points <= 25:
        return float("nan")
    return float(next(percent for upper, percent in FAILURE_PERCENT if points <= upper))
