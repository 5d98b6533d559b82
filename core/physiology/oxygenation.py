"""Oxygenation: the alveolar gas equation, the A-a gradient, P/F and S/F.

Pressures in mmHg, FiO2 as a fraction, SpO2 in %. Where FiO2 is not known every figure here is NaN: an oxygen
flow is not an FiO2. Shapes: scalars or arrays that broadcast; no function raises for a number.
"""

from __future__ import annotations

from core.physiology.constants import BAROMETRIC_SEA_LEVEL, RESPIRATORY_QUOTIENT, WATER_VAPOUR_37
from core.physiology.domains import ON_AIR, SPO2_BELOW_CEILING, Domain
from core.physiology.elementary import N
from core.physiology.formula import POSITIVE, formula

ALVEOLAR = Domain("mmHg", 1.0, 1000.0, "undefined.alveolar_not_positive", "undefined.result_outside")


@formula(POSITIVE)
def inspired_po2(fio2: N, barometric: N | float = BAROMETRIC_SEA_LEVEL) -> N:
    """PO2 of moist inspired gas, mmHg: FiO2 x (PB - 47).

    >>> round(inspired_po2(0.21), 1)
    149.7
    """
    return fio2 * (barometric - WATER_VAPOUR_37)


@formula(ALVEOLAR)
def alveolar_po2(
    fio2: N,
    paco2: N,
    barometric: N | float = BAROMETRIC_SEA_LEVEL,
    rq: N | float = RESPIRATORY_QUOTIENT,
) -> N:
    """Alveolar PO2, mmHg, simple form: FiO2 (PB - 47) - PaCO2 / R.

    R is kept at every FiO2 (dropping it at 0.6 and above, as one answer key does, adds 10 mmHg at PaCO2 40).
    Source: alveolar gas equation, as used in the published worked gases.

    >>> round(alveolar_po2(0.21, 60.0), 1)
    74.7
    """
    return fio2 * (barometric - WATER_VAPOUR_37) - paco2 / rq


@formula(ALVEOLAR)
def alveolar_po2_full(
    fio2: N,
    paco2: N,
    barometric: N | float = BAROMETRIC_SEA_LEVEL,
    rq: N | float = RESPIRATORY_QUOTIENT,
) -> N:
    """Alveolar PO2, mmHg, full form: FiO2 (PB - 47) - PaCO2 [FiO2 + (1 - FiO2) / R].

    Higher than the simple form by PaCO2 x FiO2 x (1 - R) / R. Source: Cochrane review CD010841.

    >>> round(alveolar_po2_full(0.21, 60.0), 1)
    77.9
    """
    return fio2 * (barometric - WATER_VAPOUR_37) - paco2 * (fio2 + (1.0 - fio2) / rq)


GRADIENT = Domain("mmHg", -1000.0, 1000.0)


@formula(GRADIENT)
def aa_gradient(
    pao2: N,
    paco2: N,
    fio2: N,
    barometric: N | float = BAROMETRIC_SEA_LEVEL,
    rq: N | float = RESPIRATORY_QUOTIENT,
) -> N:
    """A-a gradient, mmHg, with the simple alveolar gas equation: PAO2 - PaO2.

    A negative gradient is returned as it is: it says that FiO2 or a pressure is wrong
    (`consistency.gradient_doubt`).

    >>> round(aa_gradient(65.0, 60.0, 0.21), 1)
    9.7
    """
    return fio2 * (barometric - WATER_VAPOUR_37) - paco2 / rq - pao2


@formula(GRADIENT)
def aa_gradient_full(
    pao2: N,
    paco2: N,
    fio2: N,
    barometric: N | float = BAROMETRIC_SEA_LEVEL,
    rq: N | float = RESPIRATORY_QUOTIENT,
) -> N:
    """A-a gradient, mmHg, with the full alveolar gas equation.

    >>> round(aa_gradient_full(65.0, 60.0, 0.21), 1)
    12.9
    """
    return fio2 * (barometric - WATER_VAPOUR_37) - paco2 * (fio2 + (1.0 - fio2) / rq) - pao2


@formula(fio2=ON_AIR)
def aa_gradient_expected(age: N, fio2: N) -> N:
    """The A-a gradient expected for an age, mmHg, on air only: age / 4 + 4.

    NaN on any oxygen: the rule says nothing there. Secondary source; two other published lines are
    `aa_gradient_expected_regression` and `aa_gradient_expected_quarter`.

    >>> aa_gradient_expected(60.0, 0.21)
    19.0
    """
    return age / 4.0 + 4.0 + 0.0 * fio2


@formula(fio2=ON_AIR)
def aa_gradient_expected_quarter(age: N, fio2: N) -> N:
    """The A-a gradient expected for an age, mmHg, on air only: (age + 10) / 4. Secondary source.

    >>> aa_gradient_expected_quarter(60.0, 0.21)
    17.5
    """
    return (age + 10.0) / 4.0 + 0.0 * fio2


@formula(fio2=ON_AIR)
def aa_gradient_expected_regression(age: N, fio2: N) -> N:
    """The A-a gradient expected for an age, mmHg, on air only: 2.5 + 0.21 x age. Secondary source.

    >>> round(aa_gradient_expected_regression(60.0, 0.21), 1)
    15.1
    """
    return 2.5 + 0.21 * age + 0.0 * fio2


@formula(POSITIVE)
def pf_ratio(pao2: N, fio2: N) -> N:
    """P/F, mmHg: PaO2 / FiO2. Arterial samples only: capillary and venous PO2 do not stand for it.

    >>> pf_ratio(60.0, 0.5)
    120.0
    """
    return pao2 / fio2


@formula(POSITIVE)
def pf_ratio_at_altitude(pao2: N, fio2: N, barometric: N) -> N:
    """P/F, mmHg, corrected above 1000 m: PaO2 / FiO2 x PB / 760 (as the 2012 definition does).

    >>> pf_ratio_at_altitude(60.0, 0.5, 608.0)
    96.0
    """
    return pao2 / fio2 * barometric / BAROMETRIC_SEA_LEVEL


@formula(POSITIVE, spo2=SPO2_BELOW_CEILING)
def sf_ratio(spo2: N, fio2: N) -> N:
    """S/F: SpO2 in % / FiO2 as a fraction; none above SpO2 97 %, where the curve is flat.

    Source: Rice, Chest 2007;132:410.

    >>> sf_ratio(92.0, 0.5)
    184.0
    """
    return spo2 / fio2
