"""Compensation: what bicarbonate, pH or PCO2 the other disturbance makes one expect.

Rules per mmHg of PaCO2 from 40, bicarbonate from 24 (textbook rules, confirmed in print):
acute acidosis +0.1, chronic acidosis +0.35 (range 0.25-0.5), acute alkalosis 0.2, chronic alkalosis 0.4.
The rules of thumb "0.8" and "0.3" that one page prints as pH are H+ in nmol/L per mmHg: not used here.
Shapes: scalars or arrays that broadcast; mmHg and mmol/L; no function raises for a number.
"""

from __future__ import annotations

from dataclasses import replace

from core.physiology.acid_base import ph_from_bicarbonate
from core.physiology.constants import CO2_SOLUBILITY, NORMAL_HCO3, NORMAL_PACO2, PK_CARBONIC
from core.physiology.domains import DOMAINS, Domain
from core.physiology.elementary import N, choose, power_of_ten
from core.physiology.formula import POSITIVE, formula

ACUTE_GAIN = 0.1
CHRONIC_GAIN = 0.35
CHRONIC_GAIN_LOW = 0.25
CHRONIC_GAIN_HIGH = 0.5
ACUTE_ALKALOSIS_GAIN = 0.2
CHRONIC_ALKALOSIS_GAIN = 0.4
WINTERS_TOLERANCE = 2.0
"""mmHg either side of Winters' PCO2, and of the one expected in metabolic alkalosis."""

HYPERCAPNIA = replace(DOMAINS["paco2"], low=NORMAL_PACO2, too_low="undefined.hypercapnia_only")
RETAINING = replace(DOMAINS["hco3"], low=22.0, too_low="undefined.hidden_by_metabolic_acidosis")
USUAL = Domain("mmHg", 30.0, 150.0, "undefined.result_outside", "undefined.result_outside")
_PCO2 = Domain("mmHg", 5.0, 250.0, "undefined.result_outside", "undefined.result_outside")


@formula(POSITIVE)
def expected_hco3_acute(paco2: N) -> N:
    """Bicarbonate expected of an acute change, mmol/L: +1 per +10 mmHg above 40, -2 per -10 below.

    >>> expected_hco3_acute(60.0), expected_hco3_acute(25.0)
    (26.0, 21.0)
    """
    away = paco2 - NORMAL_PACO2
    return NORMAL_HCO3 + away * choose(away > 0, ACUTE_GAIN, ACUTE_ALKALOSIS_GAIN)


@formula(POSITIVE)
def expected_hco3_chronic(paco2: N, expected_gain: float = CHRONIC_GAIN) -> N:
    """Bicarbonate expected of a chronic change, mmol/L: +3.5 per +10 mmHg above 40, -4 per -10 below.

    `expected_gain` (mmol/L per mmHg above 40): 0.35; sources print 0.25-0.5, 0.35-0.4 usual.

    >>> expected_hco3_chronic(60.0), expected_hco3_chronic(25.0)
    (31.0, 18.0)
    """
    away = paco2 - NORMAL_PACO2
    return NORMAL_HCO3 + away * choose(away > 0, expected_gain, CHRONIC_ALKALOSIS_GAIN)


@formula()
def expected_ph_acute(paco2: N) -> N:
    """pH expected of an acute change, by Henderson-Hasselbalch from the expected bicarbonate.

    >>> round(expected_ph_acute(60.0), 2), round(expected_ph_acute(80.0), 2)
    (7.25, 7.16)
    """
    return ph_from_bicarbonate(paco2, expected_hco3_acute(paco2))


@formula()
def expected_ph_chronic(paco2: N, expected_gain: float = CHRONIC_GAIN) -> N:
    """pH expected of a chronic change, by Henderson-Hasselbalch from the expected bicarbonate.

    >>> round(expected_ph_chronic(60.0), 3), round(expected_ph_chronic(80.0), 2)
    (7.326, 7.29)
    """
    return ph_from_bicarbonate(paco2, expected_hco3_chronic(paco2, expected_gain))


@formula()
def expected_ph_acute_linear(paco2: N) -> N:
    """pH expected of an acute change by the bedside rule: -0.08 per +10 mmHg, either way.

    >>> round(expected_ph_acute_linear(60.0), 2), round(expected_ph_acute_linear(80.0), 2)
    (7.24, 7.08)
    """
    return 7.40 - 0.008 * (paco2 - NORMAL_PACO2)


@formula(paco2=HYPERCAPNIA)
def expected_ph_chronic_linear(paco2: N) -> N:
    """pH expected of chronic hypercapnia by the bedside rule: -0.03 per +10 mmHg; none below 40 mmHg.

    >>> round(expected_ph_chronic_linear(60.0), 2), round(expected_ph_chronic_linear(80.0), 2)
    (7.34, 7.28)
    """
    return 7.40 - 0.003 * (paco2 - NORMAL_PACO2)


def _paco2_on_line(ph: N, gain_above: float, gain_below: float) -> N:
    """Where the line HCO3 = 24 + gain (P - 40) meets the pH's own line HCO3 = s P 10^(pH - 6.1)."""
    slope = CO2_SOLUBILITY * power_of_ten(ph - PK_CARBONIC)
    gain: N = choose(slope * NORMAL_PACO2 < NORMAL_HCO3, gain_above, gain_below)
    return (NORMAL_HCO3 - gain * NORMAL_PACO2) / (slope - gain)


@formula(_PCO2)
def paco2_for_ph_acute(ph: N) -> N:
    """The PaCO2, mmHg, that an acute respiratory change alone would need for this pH: the reverse of the rule.

    >>> round(paco2_for_ph_acute(expected_ph_acute(60.0)), 6)
    60.0
    """
    return _paco2_on_line(ph, ACUTE_GAIN, ACUTE_ALKALOSIS_GAIN)


@formula(_PCO2)
def paco2_for_ph_chronic(ph: N) -> N:
    """The PaCO2, mmHg, that a chronic respiratory change alone would need for this pH.

    >>> round(paco2_for_ph_chronic(expected_ph_chronic(60.0)), 6)
    60.0
    """
    return _paco2_on_line(ph, CHRONIC_GAIN, CHRONIC_ALKALOSIS_GAIN)


@formula(_PCO2)
def expected_paco2_metabolic_acidosis(hco3: N) -> N:
    """PCO2 expected of a metabolic acidosis, mmHg: Winters, 1.5 HCO3 + 8, +/-2.

    >>> expected_paco2_metabolic_acidosis(12.0)
    26.0
    """
    return 1.5 * hco3 + 8.0


@formula(_PCO2)
def expected_paco2_metabolic_alkalosis(hco3: N) -> N:
    """PCO2 expected of a metabolic alkalosis, mmHg: 0.7 (HCO3 - 24) + 40, +/-2.

    >>> expected_paco2_metabolic_alkalosis(34.0)
    47.0
    """
    return 0.7 * (hco3 - NORMAL_HCO3) + NORMAL_PACO2


@formula()
def expected_sbe_chronic(paco2: N) -> N:
    """Standard base excess expected of a chronic change, mmol/L: 0.4 x (PaCO2 - 40); acute 0.

    Schlichtig 1998, from memory. Series in COPD are steeper, about 5 mmol/L per 10 mmHg (from memory).

    >>> expected_sbe_chronic(60.0)
    8.0
    """
    return 0.4 * (paco2 - NORMAL_PACO2)


@formula(USUAL, hco3=RETAINING)
def usual_paco2_estimate(hco3: N) -> N:
    """An estimate of the usual PaCO2, mmHg: 40 + (HCO3 - 24) / 0.35. Shown, never judged by.

    The chronic rule read backwards: a heuristic computed here, spoilt by diuretics and by any metabolic
    disturbance; none is given below a bicarbonate of 22 mmol/L.

    >>> usual_paco2_estimate(31.0)
    60.0
    """
    return NORMAL_PACO2 + (hco3 - NORMAL_HCO3) / CHRONIC_GAIN
