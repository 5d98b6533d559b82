"""Saturation and PO2: Severinghaus and its inverses, Kelman, Ellis. PO2 in mmHg, saturation in %.

Severinghaus, J Appl Physiol 1979;46:599, at pH 7.40, 37 degC, normal 2,3-DPG: within 0.55 % of its table.
Shapes: scalars or arrays that broadcast; no function raises for a number.
"""

from __future__ import annotations

from dataclasses import replace

from core.physiology.constants import NORMAL_PACO2
from core.physiology.domains import DOMAINS, UNSATURATED, Domain
from core.physiology.elementary import N, cube_root, exp, ln, log10, power_of_ten, sqrt
from core.physiology.formula import POSITIVE, formula

BOHR = 0.48
"""log10 PO2 per unit of pH (from memory)."""

_SATURATION = Domain("%", 0.0, 100.0, "undefined.result_outside", "undefined.result_outside")
_KELMAN_PO2 = replace(DOMAINS["pao2"], low=10.0, too_low="undefined.kelman_below_10")


@formula(_SATURATION)
def severinghaus_saturation(pao2: N) -> N:
    """Saturation, %: 100 / (23400 / (P^3 + 150 P) + 1). Severinghaus 1979.

    >>> round(severinghaus_saturation(60.0), 2), round(severinghaus_saturation(100.0), 2)
    (90.58, 97.75)
    """
    return 100.0 / (23400.0 / (pao2 * (pao2 * pao2 + 150.0)) + 1.0)


@formula(_SATURATION)
def severinghaus_saturation_at_ph(pao2: N, ph: N) -> N:
    """Saturation, %, with the pressure shifted by pH first: P x 10^(0.48 (pH - 7.40)) (coefficient from memory).

    >>> round(severinghaus_saturation_at_ph(65.0, 7.25), 1)
    88.2
    """
    shifted = pao2 * power_of_ten(BOHR * (ph - 7.40))
    return 100.0 / (23400.0 / (shifted * (shifted * shifted + 150.0)) + 1.0)


@formula(POSITIVE, sao2=UNSATURATED)
def ellis_po2(sao2: N) -> N:
    """PO2, mmHg, of a saturation: the exact inverse of Severinghaus' equation, in the form of Ellis.

    a = 11700 / (1/S - 1), b = sqrt(50^3 + a^2), PO2 = (b + a)^(1/3) - (b - a)^(1/3). Constants from a
    secondary source, form computed here. One print takes the cube root of a negative number: the real root.

    >>> round(ellis_po2(90.0), 1), round(ellis_po2(97.0), 1)
    (58.7, 90.6)
    """
    a = 11700.0 / (100.0 / sao2 - 1.0)
    b = sqrt(125_000.0 + a * a)
    return cube_root(b + a) - 50.0 / cube_root(b + a)


@formula(POSITIVE, sao2=UNSATURATED)
def severinghaus_po2(sao2: N) -> N:
    """PO2, mmHg, of a saturation by Severinghaus' own approximation (for the exact inverse: `ellis_po2`).

    ln P = 0.385 ln(1 / (1/S - 1)) + 3.32 - 1 / (72 S) - S^6 / 6, S as a fraction. Severinghaus 1979 (the
    abstract prints 0.17 for 1/6).

    >>> round(severinghaus_po2(90.0), 1)
    58.1
    """
    s = sao2 / 100.0
    return exp(0.385 * ln(1.0 / (1.0 / s - 1.0)) + 3.32 - 1.0 / (72.0 * s) - s**6 / 6.0)


@formula()
def severinghaus_ph_slope(pao2: N) -> N:
    """d ln PO2 / d pH at constant saturation: (P / 26.6)^0.184 - 2.2. Severinghaus 1979.

    >>> round(severinghaus_ph_slope(26.6), 2)
    -1.2
    """
    return exp(0.184 * ln(pao2 / 26.6)) - 2.2


@formula()
def severinghaus_temperature_slope(pao2: N) -> N:
    """d ln PO2 / dT per degC: 0.058 / ((0.243 P / 100)^3.88 + 1) + 0.013. Severinghaus 1979.

    >>> round(severinghaus_temperature_slope(60.0), 3)
    0.071
    """
    return 0.058 / (exp(3.88 * ln(0.243 * pao2 / 100.0)) + 1.0) + 0.013


_KELMAN = (-8532.2289, 2121.4010, -67.073989, 935960.87, -31346.258, 2396.1674, -67.104406)


@formula(_SATURATION, pao2=_KELMAN_PO2)
def kelman_saturation(pao2: N, ph: N | float = 7.40, paco2: N | float = NORMAL_PACO2, temp: N | float = 37.0) -> N:
    """Saturation, %, Kelman 1966 (J Appl Physiol 21:1375); PO2 at least 10 mmHg.

    x = P x 10^(0.024 (37 - T) + 0.40 (pH - 7.40) + 0.06 (log10 40 - log10 PCO2)) (exponents from memory);
    S = (a1 x + a2 x^2 + a3 x^3 + x^4) / (a4 + a5 x + a6 x^2 + a7 x^3 + x^4). Undefined where that leaves
    0-100 %, which it does near 0.

    >>> round(kelman_saturation(40.0), 2), round(kelman_saturation(100.0), 2)
    (74.12, 97.49)
    """
    a1, a2, a3, a4, a5, a6, a7 = _KELMAN
    shift = 0.024 * (37.0 - temp) + 0.40 * (ph - 7.40) + 0.06 * (log10(NORMAL_PACO2 / paco2))
    x = pao2 * power_of_ten(shift)
    above = x * (a1 + x * (a2 + x * (a3 + x)))
    below = a4 + x * (a5 + x * (a6 + x * (a7 + x)))
    return 100.0 * above / below


@formula(sao2=DOMAINS["sao2"])
def saturation_difference(sao2: N, pao2: N, ph: N) -> N:
    """Reported saturation minus what PO2 and pH make one expect (Severinghaus, shifted by pH), points of %.

    Beyond about 5 points (common practice) one of the three is wrong, or the haemoglobin is unusual.

    >>> round(saturation_difference(85.0, 65.0, 7.54), 1)
    -10.0
    """
    return sao2 - severinghaus_saturation_at_ph(pao2, ph)
