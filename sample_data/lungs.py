"""A breath: patient and machine together against the lung; and the effort and rate the patient seeks next."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from sample_data.calibration import (
    LACK_DRIVE,
    OWN_INSPIRATION_S,
    RESTING_RATE,
    SLEEPY_EFFORT,
    SLEEPY_RATE,
    Fitted,
    distress_of,
)
from sample_data.device import TRANSMITTED, Delivered, delivered, triggered_percent
from sample_data.drive import tire, wanted_ventilation
from sample_data.gas_exchange import ALVEOLAR
from sample_data.mechanics import (
    alveolar_ventilation,
    filling,
    flowing_pressure,
    needed_pressure,
    tidal_for,
    tidal_volume,
    useful_tidal,
)
from sample_data.patient import Patient
from sample_data.saturation import Values
from sample_data.script import Inputs
from sample_data.state import STEP_MIN, State

LEAST_EFFORT = 1.0
EFFORT_LAG_MIN, RATE_LAG_MIN = 2.0, 6.0
MASK_DEAD_L = 0.01
STIFFNESS = 0.25
"""Share of compliance that an illness twice as bad takes, and that recovery gives back."""
ILL_DEAD_SPACE = 0.22
"""How much of the lung that gas reaches an illness twice as bad takes away."""
OXYGEN_UNMATCHES = 0.9
"""Dead space per unit of saturation above 0.92: oxygen undoes the lung's own matching of air to blood."""
TIRED_SHARE = 0.45
"""Share of strength that complete fatigue takes."""
LOWEST_RATE, HIGHEST_RATE = 8.0, 42.0
QUICKENS_BY = 5.0
"""How far above the rate before support a patient at the limit of effort can go, /min; three times with reserve."""


class Breath(NamedTuple):
    """One breath of each patient: rates in /min, volumes in L, pressures in cmH2O; arrays of shape (n,)."""

    rate: Values
    tidal: Values
    alveolar: Values
    fixed_dead: Values
    wasted: Values
    per_pressure: Values
    trapped: Values
    support: Values
    closed: Values
    got: Delivered
    triggered: Values


def breathe(p: Patient[Values], f: Fitted, s: State, now: Inputs, wobble: Values) -> Breath:
    """What patient and machine move together."""
    missed = p.asynchrony + now.asynchrony_extra + s.unease
    got = delivered(now.ipap, now.epap, now.fit_leak * now.on, wobble, missed)
    # The patient's own rate, or the machine's where that is faster: those breaths come without effort.
    rate = np.maximum(s.own_rate, now.rate_set)
    own_share = np.minimum(s.own_rate / rate, 1.0)
    inspiration = np.where(now.ipap > now.epap, now.ti, OWN_INSPIRATION_S)
    compliance = p.compliance * np.maximum(1.0 + STIFFNESS * (1.0 - s.illness), 0.5)
    whole = filling(rate, inspiration, p.resistance * (0.55 + 0.45 * s.illness) * compliance)
    support = TRANSMITTED * (got.ipap - got.epap) * (1.0 - got.missed)
    closed = p.airway * np.exp(-got.epap / 4.0)
    together = np.maximum(s.effort * own_share * (1.0 - closed) + support, 0.5)
    tidal = tidal_volume(compliance, flowing_pressure(together, whole.trapped, got.epap), whole.gain)
    reached = (1.0 - f.wasted_share) * (1.0 - ILL_DEAD_SPACE * (s.illness - 1.0))
    wasted = 1.0 - np.maximum(reached - OXYGEN_UNMATCHES * np.maximum(s.saturation - 0.92, 0.0) * p.matched, 0.1)
    fixed = p.fixed_dead_l + MASK_DEAD_L * now.on
    alveolar = alveolar_ventilation(rate, useful_tidal(tidal, p.tidal_ml / 1000.0), fixed, wasted)
    triggered = triggered_percent(s.own_rate, now.rate_set, got.missed)
    return Breath(rate, tidal, alveolar, fixed, wasted, compliance * whole.gain, whole.trapped, support, closed, got,
                  triggered)  # fmt: skip


def seek(p: Patient[Values], f: Fitted, s: State, now: Inputs, b: Breath) -> None:
    """Move effort, fatigue and rate towards what the brain wants and the muscles can."""
    extra = f.illness_drive * s.illness + LACK_DRIVE * s.lack + now.drive_extra
    want = wanted_ventilation(ALVEOLAR * p.vco2 / s.aimed, s.fast, s.aimed, p.drive, extra, s.asleep)
    s.unmet = np.clip(1.0 - b.alveolar / want, 0.0, 1.0)
    breath = tidal_for((want / b.rate + b.fixed_dead) / (1.0 - b.wasted), p.tidal_ml / 1000.0)
    needed = needed_pressure(breath / b.per_pressure, b.trapped, b.got.epap)
    limit = f.own_pressure * p.reserve * (1.0 - TIRED_SHARE * s.fatigue) * (1.0 - SLEEPY_EFFORT * s.asleep)
    aim = np.minimum(limit - p.unload * b.support, (needed - b.support) / np.maximum(1.0 - b.closed, 0.2))
    s.effort = s.effort + (np.maximum(aim, LEAST_EFFORT) - s.effort) * (STEP_MIN / EFFORT_LAG_MIN)

    s.load = s.effort / (f.own_pressure * p.reserve) * np.sqrt(s.own_rate / 28.0)
    s.fatigue = tire(s.fatigue, s.load, p.tires, p.rests, STEP_MIN)

    distress = distress_of(s.unmet, f.illness_drive * s.illness, s.lack, s.fatigue)
    ceiling = np.minimum(p.rr + QUICKENS_BY * np.where(p.reserve > 1.0, 3.0, 1.0), HIGHEST_RATE)
    aim_rate = np.clip(RESTING_RATE + f.rate_per_distress * distress, LOWEST_RATE, ceiling)
    s.own_rate = s.own_rate + (aim_rate * (1.0 - SLEEPY_RATE * s.asleep) - s.own_rate) * (STEP_MIN / RATE_LAG_MIN)
