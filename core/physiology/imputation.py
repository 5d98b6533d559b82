"""P/F imputed from SpO2 and FiO2 by three published methods. One is shown, and named; none above SpO2 97 %.

The methods disagree by a severity class (SpO2 92 on 0.50: 128, 143, 176 mmHg), so an imputed P/F is never
mixed with a measured one. SpO2 in %, FiO2 as a fraction, result in mmHg; scalars or arrays that broadcast.
"""

from __future__ import annotations

from types import MappingProxyType
from typing import Final

from core.physiology.domains import SPO2_BELOW_CEILING
from core.physiology.elementary import N, log10, power_of_ten
from core.physiology.formula import POSITIVE, formula
from core.physiology.saturation import ellis_po2

SF_FOR_PF_200 = 235.0
SF_FOR_PF_300 = 315.0
"""Published S/F cut-offs for P/F 200 and 300 (Rice 2007): stored, because the printed line gives 232 and 316."""


@formula(POSITIVE, spo2=SPO2_BELOW_CEILING)
def imputed_pf_nonlinear(spo2: N, fio2: N) -> N:
    """Imputed P/F, mmHg, non-linear: the PO2 of Ellis' inversion / FiO2. The one that is shown.

    Source: Brown, Chest 2016;150:307, and Crit Care Med 2017;45:1317 (n = 703); better at SpO2 96 % or less.

    >>> round(imputed_pf_nonlinear(88.0, 0.35))
    156
    """
    return ellis_po2(spo2) / fio2


@formula(POSITIVE, spo2=SPO2_BELOW_CEILING)
def imputed_pf_linear(spo2: N, fio2: N) -> N:
    """Imputed P/F, mmHg, linear: (S/F - 64) / 0.84. Source: Rice, Chest 2007;132:410 (n = 672).

    Undefined where the line falls to 0 (S/F of 64 or less).

    >>> round(imputed_pf_linear(88.0, 0.35))
    223
    """
    return (spo2 / fio2 - 64.0) / 0.84


@formula(POSITIVE, spo2=SPO2_BELOW_CEILING)
def imputed_pf_loglinear(spo2: N, fio2: N) -> N:
    """Imputed P/F, mmHg, log-linear: log10 P/F = 0.48 + 0.78 log10 S/F. Pandharipande 2009, secondary source.

    >>> round(imputed_pf_loglinear(88.0, 0.35))
    225
    """
    return power_of_ten(0.48 + 0.78 * log10(spo2 / fio2))


METHODS: Final = MappingProxyType(
    {"non-linear": imputed_pf_nonlinear, "linear": imputed_pf_linear, "log-linear": imputed_pf_loglinear}
)
SHOWN: Final = "non-linear"
"""The method that is shown; the others are out of sight until asked for."""
