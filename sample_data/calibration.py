"""Fits the hidden numbers of a patient so that the steady state before support is what was seen then."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from sample_data.drive import narcosis, oxygen_lack, wanted_ventilation
from sample_data.gas_exchange import ALVEOLAR, hco3_of
from sample_data.mechanics import filling, needed_pressure
from sample_data.oxygen import admixture, alveolar_po2, arterial_po2
from sample_data.patient import Patient
from sample_data.saturation import Values, saturation

OWN_INSPIRATION_S = 0.9
RESTING_RATE = 15.0
LACK_DRIVE = 0.25
SLEEPY_RATE = 0.3
SLEEPY_EFFORT = 0.25
"""Shares of drive: what oxygen lack adds, what narcosis takes from rate and from effort."""
EFFORT_COST = 0.12
"""Share of resting VCO2 that breathing at the limit adds."""


class Fitted(NamedTuple):
    """Calibrated quantities, arrays of shape (n,)."""

    own_pressure: Values
    wasted_share: Values
    illness_drive: Values
    shunt: Values
    hco3_at_usual: Values
    rate_per_distress: Values


def fit(p: Patient[Values]) -> Fitted:
    """Solve the steady state before support for what was not seen.

    Raises:
        ValueError: a presentation that no lung can produce (dead space outside 0.05 to 0.85 of a breath).
    """
    ventilation = ALVEOLAR * p.vco2 * (1.0 + EFFORT_COST) / p.paco2
    tidal = p.tidal_ml / 1000.0
    wasted = 1.0 - (ventilation / p.rr + p.fixed_dead_l) / tidal
    if np.any((wasted < 0.05) | (wasted > 0.85)):
        raise ValueError(
            f"dead space share {wasted} is outside 0.05 to 0.85: tidal volume or rate does not fit PaCO2"
        )
    whole = filling(p.rr, np.full_like(p.rr, OWN_INSPIRATION_S), p.resistance * p.compliance)
    zero = np.zeros_like(p.rr)
    own = needed_pressure(tidal / (p.compliance * whole.gain), whole.trapped, zero) / (1.0 - p.airway)
    asleep, lack = narcosis(p.paco2, p.usual, p.tolerance), oxygen_lack(p.spo2 / 100.0)
    aimed = aimed_paco2(p)
    at_aim = ALVEOLAR * p.vco2 / aimed
    # A patient with reserve breathes what is wanted, so what CO2 and oxygen do not explain is the illness.
    chemical = wanted_ventilation(at_aim, p.paco2, aimed, p.drive, zero, asleep)
    explained = ventilation / chemical - 1.0 - LACK_DRIVE * lack
    illness = np.where(p.reserve <= 1.0, 0.15, np.maximum(explained, 0.0))
    wanted = chemical * (1.0 + illness + LACK_DRIVE * lack)
    distress = distress_of(1.0 - np.minimum(ventilation / wanted, 1.0), illness, lack, zero)
    awake_rate = p.rr / (1.0 - SLEEPY_RATE * asleep)
    per = (awake_rate - RESTING_RATE) / np.maximum(distress, 0.05)
    own = own / (1.0 - SLEEPY_EFFORT * asleep)
    return Fitted(own, wasted, illness, _shunt(p), hco3_of(p.ph, p.paco2) - 0.1 * (p.paco2 - p.usual), per)


def aimed_paco2(p: Patient[Values]) -> Values:
    """The PaCO2 (mmHg) that the drive settles for at first: part of the way up from the usual."""
    return p.usual + p.reset * np.maximum(p.paco2 - p.usual, 0.0)


def distress_of(unmet: Values, illness: Values, lack: Values, fatigue: Values) -> Values:
    """What quickens breathing: want of ventilation, inflamed or wet lung, oxygen lack, tiredness."""
    return np.asarray(unmet + 0.45 * np.minimum(illness, 2.0) + 0.25 * lack + 0.5 * fatigue)


def _shunt(p: Patient[Values]) -> Values:
    """Bisect the admixture that gives the saturation seen on the oxygen breathed, without pressure."""
    low, high = np.full_like(p.spo2, 0.005), np.full_like(p.spo2, 0.75)
    zero = np.zeros_like(p.spo2)
    alveolar = alveolar_po2(p.fio2, p.paco2)
    for _ in range(40):
        middle = 0.5 * (low + high)
        share = admixture(middle * (1.0 - p.matched), middle * p.matched, p.fio2, zero)
        enough = saturation(arterial_po2(alveolar, share, p.ph), p.ph) > p.spo2 / 100.0
        low, high = np.where(enough, middle, low), np.where(enough, high, middle)
    return 0.5 * (low + high)
