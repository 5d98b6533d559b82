"""The machine and its mask: how leak eats pressure, and what the screen shows instead of the truth."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from sample_data.saturation import Values

PORT_L_PER_MIN = 8.0
"""The exhalation port lets out 8 sqrt(pressure) L/min: about 30 at 14 cmH2O, an orifice."""
REFERENCE_CMH2O = 10.0
TRANSMITTED = 0.6
"""Share of the pressure support that reaches the lung past mouth, throat and a glottis that narrows."""
CEILING_L_PER_MIN = 120.0
"""What the screen shows at most, e.g. with the mask off and the blower running."""


class Delivered(NamedTuple):
    """What reaches the patient. Pressures in cmH2O, leak in L/min, `missed` as a share of breaths."""

    leak: Values
    ipap: Values
    epap: Values
    missed: Values


def delivered(ipap: Values, epap: Values, fit_leak: Values, wobble: Values, asynchrony: Values) -> Delivered:
    """What the machine achieves against a leak.

    `fit_leak` is the leak that the mask's fit makes at 10 cmH2O mean pressure; it grows as the root of
    pressure. Beyond 25 L/min the blower loses pressure, beyond 30 the machine misses efforts.
    """
    mean = np.maximum(epap + 0.35 * (ipap - epap), 0.5)
    leak = np.clip(fit_leak * wobble * np.sqrt(mean / REFERENCE_CMH2O), 0.0, CEILING_L_PER_MIN)
    lost = 0.09 * np.maximum(leak - 25.0, 0.0)
    attained_epap = np.maximum(epap - 0.5 * lost, np.minimum(epap, 1.0))
    attained_ipap = np.maximum(ipap - lost, attained_epap)
    missed = np.clip(asynchrony + 0.011 * np.maximum(leak - 30.0, 0.0), 0.0, 0.75)
    return Delivered(leak, attained_ipap, attained_epap, missed)


def port_flow(mean_pressure: Values) -> Values:
    """Intentional leak through the exhalation port, L/min."""
    return np.asarray(PORT_L_PER_MIN * np.sqrt(np.maximum(mean_pressure, 0.0)))


def shown_tidal_ml(tidal_l: Values, leak: Values) -> Values:
    """Expired volume that the screen shows: gas that leaves past the mask is not counted back.

    With the leak at its ceiling (mask off, blower on) next to nothing comes back.
    """
    counted = np.where(leak >= CEILING_L_PER_MIN - 1.0, 0.04, 1.0 - 0.45 * leak / (leak + 60.0))
    return np.asarray(1000.0 * tidal_l * counted)


def triggered_percent(own_rate: Values, set_rate: Values, missed: Values) -> Values:
    """Share of machine breaths that the patient triggered."""
    margin = (own_rate * (1.0 - missed) - set_rate) / 2.5
    return np.asarray(100.0 / (1.0 + np.exp(-margin)))
