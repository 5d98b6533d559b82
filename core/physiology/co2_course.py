"""The course of PaCO2 after a step of ventilation: a closed form of the mass balance of CO2 stores.

Stores S (mL per mmHg) lose what alveolar ventilation carries off and gain production:
S dP/dt = VCO2 - P x VA / 0.863. So P(t) = Pss + (P0 - Pss) x 2^(-t / t_half), Pss = 0.863 VCO2 / VA (the alveolar
ventilation equation) and t_half = ln 2 x 0.863 x S / VA. The body is not one store: a fall uses the fast ones
(half-time 3-4 min; Farhi and Rahn 1955, dogs: 4), a rise fills the slow ones too (about 16 min; Nunn, from
memory), and after a reduction the half-time lengthens (Taskar, Chest 1995).

Expected, never measured: no marker, score or handover uses it, and it crosses no change, break or change of
oxygen. Minutes, mmHg, mL/min, L/min; scalars or arrays that broadcast.
"""

from __future__ import annotations

from math import log
from typing import Final

import numpy as np

from core.physiology.constants import CO2_EQUATION
from core.physiology.domains import Domain
from core.physiology.elementary import N, Values, choose, power_of_ten
from core.physiology.formula import POSITIVE, formula

FALL_HALF_TIME: Final = 3.5
"""min, the middle of 3-4."""
FALL_HALF_TIMES: Final = (3.0, 16.0)
"""min: from a healthy fall to one as slow as a rise, as obstructed lungs may empty (assumption)."""
RISE_HALF_TIME: Final = 16.0
RISE_HALF_TIMES: Final = (4.0, 24.0)
"""min: from the fast store alone to half as slow again as the printed rise (assumption)."""
STEADY_TOLERANCE: Final = 0.10
"""CO2 production and dead space may be off by a tenth (assumption)."""

FARHI_STORE: Final = 1.5
"""mL per kg per mmHg (Farhi and Rahn 1955, dogs)."""

_PAST: Final = Domain("mmHg", 1.0, 1000.0, "undefined.result_outside", "undefined.result_outside")
_LOG_10_2: Final = log(2.0) / log(10.0)


@formula(_PAST)
def steady_paco2(vco2: N, va: N) -> N:
    """Where PaCO2 settles, mmHg: 0.863 x VCO2 (mL/min STPD) / VA (L/min BTPS).

    >>> round(steady_paco2(200.0, 4.3), 1)
    40.1
    """
    return CO2_EQUATION * vco2 / va


@formula(_PAST)
def steady_paco2_after_change(paco2: N, va: N, va_after: N) -> N:
    """Where a steady PaCO2 settles when alveolar ventilation changes at constant production: P x VA / VA after.

    >>> round(steady_paco2_after_change(80.0, 3.0, 4.0), 1)
    60.0
    """
    return paco2 * va / va_after


@formula(POSITIVE)
def half_time_of_store(va: N, weight: N, store: float = FARHI_STORE) -> N:
    """Half-time, min, of one store of `store` mL/kg/mmHg: ln 2 x 0.863 x S / VA.

    >>> round(half_time_of_store(4.3, 70.0), 1)
    14.6
    """
    return log(2.0) * CO2_EQUATION * store * weight / va


@formula()
def paco2_after(start_paco2: N, steady_paco2: N, minutes: N, half_time: N) -> N:
    """PaCO2, mmHg, some minutes after a step: steady + (start - steady) x 2^(-t / t_half).

    >>> round(paco2_after(80.0, 60.0, 30.0, 16.0), 1), round(paco2_after(80.0, 60.0, 60.0, 16.0), 1)
    (65.5, 61.5)
    """
    left = power_of_ten(-_LOG_10_2 * minutes / half_time)
    return steady_paco2 + (start_paco2 - steady_paco2) * left


@formula()
def share_done(minutes: N, half_time: N) -> N:
    """The share of a step that is done after some minutes, 0-1.

    >>> round(share_done(10.0, 3.0), 2)
    0.9
    """
    return 1.0 - power_of_ten(-_LOG_10_2 * minutes / half_time)


@formula()
def expected_paco2(start_paco2: N, steady_paco2: N, minutes: N) -> N:
    """PaCO2, mmHg, expected some minutes after a step: half-time 3.5 min falling, 16 min rising.

    >>> round(expected_paco2(80.0, 60.0, 30.0), 1), round(expected_paco2(60.0, 80.0, 30.0), 1)
    (60.1, 74.5)
    """
    half: N = choose(steady_paco2 < start_paco2, FALL_HALF_TIME, RISE_HALF_TIME)
    left = power_of_ten(-_LOG_10_2 * minutes / half)
    return steady_paco2 + (start_paco2 - steady_paco2) * left


def paco2_band(
    start_paco2: Values, steady: Values, minutes: Values, tolerance: float = STEADY_TOLERANCE
) -> tuple[Values, Values]:
    """The lowest and highest PaCO2, mmHg, for the assumptions: half-times from fast to slow, steady +/- a tenth.

    NaN where `expected_paco2` is undefined. Inputs are arrays (or scalars, then 0-d arrays come back).

    >>> import numpy as np
    >>> low, high = paco2_band(np.array(80.0), np.array(60.0), np.array(30.0))
    >>> round(float(low), 1), round(float(high), 1)
    (54.0, 69.8)
    """
    courses = []
    for factor in (1.0 - tolerance, 1.0, 1.0 + tolerance):
        end: Values = np.asarray(steady, dtype=np.float64) * factor
        falling = end < start_paco2
        for fall, rise in zip(FALL_HALF_TIMES, RISE_HALF_TIMES, strict=True):
            half: Values = np.where(falling, fall, rise)
            courses.append(np.asarray(paco2_after(np.asarray(start_paco2, np.float64), end, minutes, half)))
    return np.minimum.reduce(courses), np.maximum.reduce(courses)
