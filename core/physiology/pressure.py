"""Gas pressures against paired limits: 45 mmHg / 6.0 kPa, 49 / 6.5, 60 / 8.0, so that the unit never decides.

A pressure is compared in tenths of a kPa, rounded half-up: 45 mmHg is 5.9995 kPa and counts as 6.0.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike

from core.physiology.constants import KPA_IN_MMHG
from core.physiology.elementary import Values


def tenths_of_kpa(pressure_mmhg: ArrayLike) -> Values:
    """Whole tenths of a kPa, half-up, of pressures in mmHg; NaN stays NaN.

    >>> float(tenths_of_kpa(45.0)), float(tenths_of_kpa(49.0)), float(tenths_of_kpa(60.0))
    (60.0, 65.0, 80.0)
    """
    tenths = np.asarray(pressure_mmhg, dtype=np.float64) / KPA_IN_MMHG * 10.0
    return np.asarray(np.floor(tenths + 0.5 + 1e-9), dtype=np.float64)


def above_pressure_limit(
    pressure_mmhg: ArrayLike, limit_kpa: float
) -> np.bool_ | np.ndarray[tuple[int, ...], np.dtype[np.bool_]]:
    """Whether pressures in mmHg lie above a limit printed in kPa to one decimal; False for NaN.

    >>> bool(above_pressure_limit(45.0, 6.0)), bool(above_pressure_limit(46.0, 6.0))
    (False, True)
    """
    return tenths_of_kpa(pressure_mmhg) > round(limit_kpa * 10.0)


def below_pressure_limit(
    pressure_mmhg: ArrayLike, limit_kpa: float
) -> np.bool_ | np.ndarray[tuple[int, ...], np.dtype[np.bool_]]:
    """Whether pressures in mmHg lie below a limit printed in kPa to one decimal; False for NaN.

    >>> bool(below_pressure_limit(44.0, 6.0)), bool(below_pressure_limit(45.0, 6.0))
    (True, False)
    """
    return tenths_of_kpa(pressure_mmhg) < round(limit_kpa * 10.0)
