"""Acid-base: bicarbonate, hydrogen ion and base excess from pH and PCO2 (Henderson-Hasselbalch).

Shapes: every input is a scalar or an array; arrays broadcast. An undefined figure is NaN; ask
`formula.why_undefined` for the reason. No function raises for a number.
"""

from __future__ import annotations

from core.physiology.constants import CO2_SOLUBILITY, PK_CARBONIC
from core.physiology.elementary import N, log10, power_of_ten
from core.physiology.formula import POSITIVE, formula

_HYDROGEN_CONSTANT: float = 10.0 ** (9.0 - PK_CARBONIC)


@formula(POSITIVE)
def bicarbonate(ph: N, paco2: N, solubility: float = CO2_SOLUBILITY) -> N:
    """Actual bicarbonate, mmol/L: s x PCO2 x 10^(pH - 6.1).

    `paco2` in mmHg; `solubility` 0.0307 mmol/L/mmHg (0.03 at the bedside gives 0.6-0.7 less).
    Source: Henderson-Hasselbalch; constants as in NCCLS/CLSI C46.

    >>> round(bicarbonate(7.25, 60.0), 2)
    26.02
    """
    return solubility * paco2 * power_of_ten(ph - PK_CARBONIC)


@formula()
def ph_from_bicarbonate(paco2: N, hco3: N, solubility: float = CO2_SOLUBILITY) -> N:
    """The pH that belongs to a PCO2 (mmHg) and an actual bicarbonate (mmol/L): 6.1 + log10(HCO3 / (s PCO2)).

    >>> round(ph_from_bicarbonate(60.0, 26.02), 2)
    7.25
    """
    return PK_CARBONIC + log10(hco3 / (solubility * paco2))


@formula(POSITIVE)
def paco2_from_bicarbonate(ph: N, hco3: N, solubility: float = CO2_SOLUBILITY) -> N:
    """The PCO2, mmHg, that belongs to a pH and an actual bicarbonate: HCO3 / (s x 10^(pH - 6.1)).

    >>> round(paco2_from_bicarbonate(7.25, 26.02), 1)
    60.0
    """
    return hco3 / (solubility * power_of_ten(ph - PK_CARBONIC))


@formula(POSITIVE)
def hydrogen_ion(ph: N) -> N:
    """Hydrogen ion, nmol/L: 10^(9 - pH).

    >>> round(hydrogen_ion(7.40), 1)
    39.8
    """
    return power_of_ten(9.0 - ph)


@formula()
def ph_from_hydrogen_ion(hydrogen_ion: N) -> N:
    """The pH of a hydrogen ion concentration in nmol/L: 9 - log10(H+).

    >>> round(ph_from_hydrogen_ion(56.0), 2)
    7.25
    """
    return 9.0 - log10(hydrogen_ion)


@formula(POSITIVE)
def hydrogen_ion_from_gas(paco2: N, hco3: N, solubility: float = CO2_SOLUBILITY) -> N:
    """Hydrogen ion, nmol/L, from PCO2 (mmHg) and bicarbonate: k x PCO2 / HCO3.

    k = s x 10^2.9, which is 24.4 (23.8 at s = 0.03).

    >>> round(hydrogen_ion_from_gas(40.0, 24.5), 1)
    39.8
    """
    return _HYDROGEN_CONSTANT * solubility * paco2 / hco3


@formula()
def standard_base_excess(ph: N, hco3: N) -> N:
    """Standard base excess, mmol/L, CLSI C46 form: HCO3 - 24.8 + 16.2 (pH - 7.40).

    `hco3` is actual bicarbonate; give the one calculated from the same gas. Source: CLSI C46 (NCCLS),
    Siggaard-Andersen extracellular form.

    >>> round(standard_base_excess(7.25, bicarbonate(7.25, 68.0)), 2)
    2.26
    """
    return hco3 - 24.8 + 16.2 * (ph - 7.40)


@formula()
def standard_base_excess_siggaard(ph: N, hco3: N) -> N:
    """Standard base excess, mmol/L, simplified form: 0.93 x (HCO3 - 24.4 + 14.83 (pH - 7.40)).

    Siggaard-Andersen; constants from memory; up to 0.65 apart from the C46 form over common gases.

    >>> round(standard_base_excess_siggaard(7.25, 26.02), 2)
    -0.56
    """
    return 0.93 * (hco3 - 24.4 + 14.83 * (ph - 7.40))


@formula()
def base_excess_zander(ph: N, paco2: N, hb: N | float = 50.0, sao2: N | float = 100.0) -> N:
    """Base excess of whole blood, mmol/L, Lang and Zander.

    (1 - 0.0143 Hb) x [0.0304 PCO2 10^(pH - 6.1) - 24.26 + (9.5 + 1.63 Hb)(pH - 7.4)] - 0.2 Hb (1 - sO2),
    Hb in g/dL inside; here `hb` in g/L (a third of the blood's, about 50, gives a standard base excess: from
    memory) and `sao2` in %. Source: Clin Chem Lab Med 2002;40:404, range -30 to 30.

    >>> round(base_excess_zander(7.25, 60.0), 2)
    -1.06
    """
    hb_g_dl = hb / 10.0
    slope = (9.5 + 1.63 * hb_g_dl) * (ph - 7.4)
    plasma = 0.0304 * paco2 * power_of_ten(ph - PK_CARBONIC) - 24.26 + slope
    return (1.0 - 0.0143 * hb_g_dl) * plasma - 0.2 * hb_g_dl * (1.0 - sao2 / 100.0)
