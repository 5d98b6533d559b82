"""Oxygen on haemoglobin: how saturation, oxygen pressure and pH belong together.

Severinghaus, J Appl Physiol 1979;46:599, for the curve; the Bohr shift by log10 P50 falling 0.48 per pH
(from memory). Pressures in mmHg, saturations as fractions.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

Values = NDArray[np.float64]

BOHR = 0.48
DISSOLVED = 0.0031 / (1.34 * 14.0)
"""Dissolved oxygen per mmHg, as a share of what 14 g/dL haemoglobin can bind."""


def saturation(po2: Values, ph: Values) -> Values:
    """The saturation at an oxygen pressure and pH.

    >>> round(float(saturation(np.array([60.0]), np.array([7.4]))[0]), 3)
    0.906
    """
    p = np.maximum(po2, 1.0) * 10.0 ** (BOHR * (ph - 7.4))
    cubic = p * p * p + 150.0 * p
    return np.asarray(cubic / (cubic + 23400.0))


_PRESSURES = np.concatenate([np.arange(1.0, 150.0, 0.5), np.arange(150.0, 720.0, 5.0)])
_CONTENTS = saturation(_PRESSURES, np.full(_PRESSURES.shape, 7.4)) + DISSOLVED * _PRESSURES


def content(po2: Values, ph: Values) -> Values:
    """Bound and dissolved oxygen, as a share of full binding capacity."""
    return saturation(po2, ph) + DISSOLVED * po2


def pressure_of_content(amount: Values, ph: Values) -> Values:
    """The oxygen pressure at which blood holds an amount: the inverse of `content`, by table.

    The table stands at pH 7.4; what is dissolved follows the pressure at the true pH, in a few rounds.

    >>> p, ph = np.array([45.0, 62.0, 110.0]), np.array([7.25, 7.3, 7.4])
    >>> bool(np.allclose(pressure_of_content(content(p, ph), ph), p, atol=0.2))
    True
    """
    shift = 10.0 ** (BOHR * (ph - 7.4))
    at_standard = np.interp(amount, _CONTENTS, _PRESSURES)
    for _ in range(3):
        at_standard = np.interp(amount + DISSOLVED * (at_standard - at_standard / shift), _CONTENTS, _PRESSURES)
    return np.asarray(at_standard / shift)
