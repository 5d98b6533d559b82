"""Oxygen: from the gas breathed, past blood that meets no air, to the artery.

Venous admixture is one number for shunt and for poorly ventilated lung; more oxygen breathed makes the second
part matter less, expiratory pressure reopens a part of the first.
"""

from __future__ import annotations

import numpy as np

from sample_data.saturation import Values, content, pressure_of_content

INSPIRED_DRY = 713.0
"""Barometric pressure less water vapour, mmHg, at sea level and 37 degC."""
RESPIRATORY_QUOTIENT = 0.8
EXTRACTION = 0.27
"""Arterial less mixed venous content, as a share of binding capacity (5 of 18.8 mL/dL)."""
LAG_MIN = 2.5
"""Time constant of the arterial oxygen after a change: 90 % in about 6 min (Cakar 2001: 4.2 to 5.5 min)."""


def alveolar_po2(fio2: Values, paco2: Values) -> Values:
    """The alveolar gas equation in its full form, mmHg.

    >>> round(float(alveolar_po2(np.array(0.21), np.array(40.0))))
    102
    """
    r = RESPIRATORY_QUOTIENT
    return np.asarray(np.maximum(fio2 * INSPIRED_DRY - paco2 * (fio2 + (1.0 - fio2) / r), 20.0))


def admixture(shunt: Values, low_ventilation: Values, fio2: Values, recruited: Values) -> Values:
    """The share of blood that is venous admixture, 0.01 to 0.6."""
    matched = low_ventilation * np.exp(-(fio2 - 0.21) / 0.25)
    return np.asarray(np.clip((shunt + matched) * (1.0 - recruited), 0.01, 0.6))


def arterial_po2(po2_alveolar: Values, share: Values, ph: Values) -> Values:
    """PaO2 in mmHg once steady, from the shunt equation with a fixed extraction."""
    end_capillary = content(po2_alveolar, ph)
    arterial = end_capillary - share / (1.0 - share) * EXTRACTION
    return np.maximum(pressure_of_content(np.maximum(arterial, 0.15), ph), 20.0)


def recruitment(epap: Values, recruitable: Values) -> Values:
    """The part of the admixture that an expiratory pressure (cmH2O) takes away."""
    return np.asarray(recruitable * (1.0 - np.exp(-epap / 6.0)))


def entrained_fio2(flow: Values, machine_flow: Values) -> Values:
    """FiO2 that an oxygen flow bled into a machine's circuit makes, both in L/min; nobody on the ward knows it.

    >>> round(float(entrained_fio2(np.array(4.0), np.array(45.0))), 2)
    0.28
    """
    return np.asarray(np.clip(0.21 + 0.79 * flow / np.maximum(machine_flow, flow + 1.0), 0.21, 0.9))
