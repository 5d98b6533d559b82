"""Oxygenation bands of the ARDS definitions: Berlin 2012 and the global definition of 2023/24.

Only the oxygenation criterion: timing, imaging and origin of oedema are for a clinician. P/F in mmHg (300, 200,
100 are 39.9, 26.6, 13.3 kPa), PEEP or EPAP or CPAP in cmH2O, flow in L/min. Arrays that broadcast, or scalars
(then a 0-d array, `Band(int(...))`).
"""

from __future__ import annotations

from enum import IntEnum

import numpy as np
from numpy.typing import ArrayLike, NDArray

from core.physiology.constants import SPO2_CEILING

BERLIN_SOURCE = "ARDS Definition Task Force, Berlin definition, 2012"
GLOBAL_SOURCE = "Matthay, AJRCCM 2024;209:37"
LEAST_PEEP = 5.0
LEAST_HIGH_FLOW = 30.0

Codes = NDArray[np.int8]


class Band(IntEnum):
    """An oxygenation band. MET_UNGRADED: the criterion is met and the definition gives no severity."""

    NOT_KNOWN = 0
    NOT_MET = 1
    MILD = 2
    MODERATE = 3
    SEVERE = 4
    MET_UNGRADED = 5


def _graded(ratio: NDArray[np.float64], mild: float, moderate: float, severe: float) -> NDArray[np.int64]:
    """Band codes of a ratio: each edge belongs to the worse band."""
    found = np.select(
        [np.isnan(ratio), ratio <= severe, ratio <= moderate, ratio <= mild],
        [Band.NOT_KNOWN, Band.SEVERE, Band.MODERATE, Band.MILD],
        Band.NOT_MET,
    )
    return np.asarray(found, dtype=np.int64)


def _array(values: ArrayLike | None) -> NDArray[np.float64]:
    return np.asarray(np.nan if values is None else values, dtype=np.float64)


def berlin(pf: ArrayLike | None, peep: ArrayLike | None) -> Codes:
    """Berlin 2012: mild 200 < P/F <= 300, moderate 100 < P/F <= 200, severe <= 100, at PEEP or CPAP >= 5.

    On mask support only `mild` was defined (NIV or CPAP of at least 5): the grade beyond it is shown as the
    band of the P/F. Below 5 cmH2O the criterion is not met; NOT_KNOWN where either is missing.

    >>> berlin([300, 200, 100, 301, 150], [5, 5, 5, 5, 4]).tolist()
    [2, 3, 4, 1, 1]
    """
    ratio, pressure = np.broadcast_arrays(_array(pf), _array(peep))
    codes = np.where(pressure < LEAST_PEEP, Band.NOT_MET, _graded(ratio, 300.0, 200.0, 100.0))
    codes = np.where(np.isnan(pressure) & (codes != Band.NOT_MET), Band.NOT_KNOWN, codes)
    return np.asarray(codes, dtype=np.int8)


def global_not_intubated(
    pf: ArrayLike | None,
    sf: ArrayLike | None,
    spo2: ArrayLike | None,
    peep: ArrayLike | None,
    high_flow: ArrayLike | None,
) -> Codes:
    """Global 2023/24, not intubated: P/F <= 300, or S/F <= 315 with SpO2 <= 97 %; no severity grade.

    On NIV or CPAP with PEEP >= 5 cmH2O, or high-flow nasal oxygen >= 30 L/min. Either criterion suffices;
    NOT_KNOWN where nothing decides.

    >>> nothing = float("nan")
    >>> global_not_intubated([250, nothing, 350], [nothing, 300, 320], [90, 95, 96], 6, None).tolist()
    [5, 5, 1]
    """
    p, s, sat, pressure, flow = np.broadcast_arrays(
        _array(pf), _array(sf), _array(spo2), _array(peep), _array(high_flow)
    )
    s = np.where(sat <= SPO2_CEILING, s, np.nan)
    met = (p <= 300.0) | (s <= 315.0)
    decided = ~np.isnan(p) | ~np.isnan(s)
    supported = (pressure >= LEAST_PEEP) | (flow >= LEAST_HIGH_FLOW)
    support_known = ~np.isnan(pressure) | ~np.isnan(flow)
    codes = np.select(
        [~support_known, ~supported, ~decided, met],
        [Band.NOT_KNOWN, Band.NOT_MET, Band.NOT_KNOWN, Band.MET_UNGRADED],
        Band.NOT_MET,
    )
    return np.asarray(codes, dtype=np.int8)


def global_intubated_sf(sf: ArrayLike | None, spo2: ArrayLike | None) -> Codes:
    """Global 2023/24, intubated, by S/F with SpO2 <= 97 %: mild 235-315, moderate 148-235, severe <= 148.

    >>> global_intubated_sf([315, 235, 148, 316], [95, 90, 88, 96]).tolist()
    [2, 3, 4, 1]
    """
    ratio, sat = np.broadcast_arrays(_array(sf), _array(spo2))
    ratio = np.where(sat <= SPO2_CEILING, ratio, np.nan)
    return np.asarray(_graded(ratio, 315.0, 235.0, 148.0), dtype=np.int8)
