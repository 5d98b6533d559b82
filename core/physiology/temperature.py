"""Correction of a gas measured at 37 degC to the patient's temperature. Off by default.

Gases are reported uncorrected (alpha-stat: common practice) and every judgement uses them so. Nothing in this
application calls these on its own: a ward that asks for them sees both values, named.
"""

from __future__ import annotations

from core.physiology.elementary import N, exp, power_of_ten
from core.physiology.formula import POSITIVE, formula
from core.physiology.saturation import severinghaus_temperature_slope

ON_BY_DEFAULT = False


@formula()
def ph_at_temperature(ph: N, temp: N) -> N:
    """pH at the patient's temperature (degC): -0.0147 per degC from 37.

    Some analysers add 0.0065 (7.4 - pH) to the coefficient; not here.

    >>> round(ph_at_temperature(7.30, 39.0), 3)
    7.271
    """
    return ph - 0.0147 * (temp - 37.0)


@formula(POSITIVE)
def paco2_at_temperature(paco2: N, temp: N) -> N:
    """PCO2, mmHg, at the patient's temperature: x 10^(0.019 (T - 37)) (0.021 on some analysers, 0.0185 Bradley).

    >>> round(paco2_at_temperature(60.0, 39.0), 1)
    65.5
    """
    return paco2 * power_of_ten(0.019 * (temp - 37.0))


@formula(POSITIVE)
def pao2_at_temperature(pao2: N, temp: N) -> N:
    """PO2, mmHg, at the patient's temperature: x exp(k (T - 37)), k by Severinghaus' slope (6-7 % per degC).

    >>> round(pao2_at_temperature(60.0, 39.0) / 60.0, 2)
    1.15
    """
    return pao2 * exp(severinghaus_temperature_slope(pao2) * (temp - 37.0))
