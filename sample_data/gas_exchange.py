"""Carbon dioxide: what the body makes, stores and breathes out, and the pH that follows.

Two stores, one that blood reaches at once and one that it reaches slowly; ventilation empties the first. In a
steady state this is the alveolar ventilation equation, PaCO2 = 0.863 VCO2 / VA.
"""

from __future__ import annotations

import numpy as np

from sample_data.saturation import Values

ALVEOLAR = 0.863
"""mmHg (mL/min STPD)^-1 (L/min BTPS): the constant of the alveolar ventilation equation."""
SOLUBILITY = 0.0307
"""mmol/L of dissolved CO2 per mmHg at 37 degC."""
FAST_ML_PER_MMHG_KG = 0.33
SLOW_ML_PER_MMHG_KG = 1.17
EXCHANGE_ML_PER_MIN_MMHG_KG = 0.030
"""The stores. Together 1.5 mL/kg/mmHg, as Farhi and Rahn found in dogs (1955); how they split,
and how fast they mix, is chosen so that half a fall is done in about 5 min and its tail takes over an hour."""


def steady_paco2(vco2: Values, va: Values) -> Values:
    """PaCO2 in mmHg that VCO2 (mL/min) and alveolar ventilation (L/min) lead to.

    >>> round(float(steady_paco2(np.array(200.0), np.array(4.3))), 1)
    40.1
    """
    return np.asarray(ALVEOLAR * vco2 / np.maximum(va, 0.05))


def step_stores(
    fast: Values, slow: Values, vco2: Values, va: Values, weight: Values, slow_scale: Values, minutes: float
) -> tuple[Values, Values]:
    """The PCO2 of both stores after a short time, by the implicit Euler rule (stable at any ventilation)."""
    c_fast, c_slow = FAST_ML_PER_MMHG_KG * weight, SLOW_ML_PER_MMHG_KG * weight * slow_scale
    mix = EXCHANGE_ML_PER_MIN_MMHG_KG * weight
    # (fast', slow') solve two linear equations of mass balance.
    a = c_fast / minutes + mix + va / ALVEOLAR
    d = c_slow / minutes + mix
    left = c_fast / minutes * fast + vco2
    right = c_slow / minutes * slow
    determinant = a * d - mix * mix
    return (left * d + mix * right) / determinant, (a * right + mix * left) / determinant


def buffered(hco3_at_usual: Values, paco2: Values, usual: Values) -> Values:
    """Bicarbonate with the body's quick buffering: 1 mmol/L up per 10 mmHg of PaCO2 above the usual."""
    return np.asarray(hco3_at_usual + 0.1 * (paco2 - usual))


def ph_of(hco3: Values, paco2: Values) -> Values:
    """Henderson-Hasselbalch.

    >>> round(float(ph_of(np.array(24.5), np.array(40.0))), 2)
    7.4
    """
    return np.asarray(6.1 + np.log10(hco3 / (SOLUBILITY * paco2)))


def hco3_of(ph: Values, paco2: Values) -> Values:
    """The bicarbonate that goes with a pH and a PaCO2."""
    return np.asarray(SOLUBILITY * paco2 * 10.0 ** (ph - 6.1))
