"""Constants of the formulas, each with its source.

Units inside: mmHg, FiO2 as a fraction, mL, L/min, cm, kg, mmol/L.
"""

from __future__ import annotations

from core.record.units import MMHG_PER_KPA

KPA_IN_MMHG = MMHG_PER_KPA
"""1 kPa = 7.50062 mmHg."""
CO2_SOLUBILITY = 0.0307
"""mmol/L per mmHg in plasma at 37 degC (0.0306-0.0307 in print)."""
CO2_SOLUBILITY_BEDSIDE = 0.03
"""The rounded constant of bedside arithmetic; gives 0.6-0.7 mmol/L less bicarbonate."""
PK_CARBONIC = 6.1
"""Apparent pK of carbonic acid in plasma (NCCLS prints 6.105 with 0.0307)."""
BAROMETRIC_SEA_LEVEL = 760.0
WATER_VAPOUR_37 = 47.0
"""Saturated water vapour at 37 degC, mmHg (6.3 kPa)."""
RESPIRATORY_QUOTIENT = 0.8
NORMAL_PACO2 = 40.0
NORMAL_HCO3 = 24.0
NORMAL_PH_LOW = 7.35
NORMAL_PH_HIGH = 7.45
SPO2_CEILING = 97.0
"""Above this SpO2 the dissociation curve is too flat to say anything of PaO2 (all sources agree)."""
CO2_EQUATION = 0.863
"""PaCO2 mmHg = 0.863 x VCO2 (mL/min STPD) / VA (L/min BTPS)."""
