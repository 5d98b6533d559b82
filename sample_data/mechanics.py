"""Lung and chest as one compliance behind one resistance, breathed by square pressures.

The periodic solution is exact: with a = exp(-Ti/RC) and b = exp(-Te/RC) the tidal volume is
C P (1-a)(1-b)/(1-ab), and the volume that stays in at the end of expiration makes the intrinsic pressure. So a
high rate or a high resistance costs tidal volume, as it does at the bedside.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from sample_data.saturation import Values


class Filling(NamedTuple):
    """`gain`: the share of C x P that is breathed; `trapped`: the share that stays in at end expiration."""

    gain: Values
    trapped: Values


def filling(rate: Values, inspiratory_s: Values, time_constant_s: Values) -> Filling:
    """How far a breath of that rate (/min) and inspiratory time (s) fills and empties the lung.

    >>> f = filling(np.array(15.0), np.array(1.0), np.array(0.4))
    >>> 0.9 < float(f.gain) < 1.0
    True
    """
    total = 60.0 / rate
    inspiration = np.minimum(inspiratory_s, 0.6 * total)
    a = np.exp(-inspiration / time_constant_s)
    b = np.exp(-(total - inspiration) / time_constant_s)
    whole = 1.0 - a * b
    return Filling((1.0 - a) * (1.0 - b) / whole, (1.0 - a) * b / whole)


def tidal_volume(compliance: Values, pressure: Values, gain: Values) -> Values:
    """Tidal volume in litres from compliance (L/cmH2O) and driving pressure (cmH2O)."""
    return np.asarray(compliance * np.maximum(pressure, 0.0) * gain)


def flowing_pressure(pressure: Values, trapped: Values, epap: Values) -> Values:
    """The pressure (cmH2O) that moves gas, of all that muscles and machine make.

    Before gas flows in, the pressure of trapped gas must be met, `trapped` x the flowing pressure, less what
    EPAP balances (0.8 of it). Solved for the flowing pressure.
    """
    return np.asarray(np.minimum(pressure, (pressure + 0.8 * epap) / (1.0 + trapped)))


def needed_pressure(flowing: Values, trapped: Values, epap: Values) -> Values:
    """The inverse of `flowing_pressure`.

    >>> x, t, e = (np.array(v) for v in (10.0, 0.2, 1.0))
    >>> round(float(flowing_pressure(needed_pressure(x, t, e), t, e)), 6)
    10.0
    """
    return np.asarray(np.maximum(flowing, flowing * (1.0 + trapped) - 0.8 * epap))


def alveolar_ventilation(rate: Values, tidal_l: Values, fixed_l: Values, wasted_share: Values) -> Values:
    """Alveolar ventilation in L/min: rate x (tidal volume - dead space), dead space a fixed and a shared part.

    >>> round(float(alveolar_ventilation(*(np.array(x) for x in (20.0, 0.45, 0.15, 0.0)))), 1)
    6.0
    """
    return np.asarray(rate * np.maximum(tidal_l * (1.0 - wasted_share) - fixed_l, 0.002))


OVERFILL = 0.35
"""Share of volume beyond the usual breath that goes where no blood is waiting."""


def useful_tidal(tidal_l: Values, usual_l: Values) -> Values:
    """Tidal volume less what overfills lung already full: pressure gains less than volume suggests."""
    return np.asarray(tidal_l - OVERFILL * np.maximum(tidal_l - usual_l, 0.0))


def tidal_for(useful_l: Values, usual_l: Values) -> Values:
    """The inverse of `useful_tidal`."""
    return np.asarray(useful_l + OVERFILL / (1.0 - OVERFILL) * np.maximum(useful_l - usual_l, 0.0))
