"""The course: every half minute, from what acts on the patient to what is true of the patient."""

from __future__ import annotations

from dataclasses import dataclass, fields

import numpy as np

from sample_data.calibration import (
    EFFORT_COST,
    LACK_DRIVE,
    OWN_INSPIRATION_S,
    RESTING_RATE,
    SLEEPY_EFFORT,
    SLEEPY_RATE,
    Fitted,
    aimed_paco2,
    distress_of,
    fit,
)
from sample_data.device import TRANSMITTED, delivered, port_flow, triggered_percent
from sample_data.drive import coma_scale, narcosis, oxygen_lack, tire, wanted_ventilation
from sample_data.gas_exchange import ALVEOLAR, buffered, ph_of, step_stores
from sample_data.mechanics import alveolar_ventilation, filling, flowing_pressure, needed_pressure, tidal_for, tidal_volume, useful_tidal
from sample_data.oxygen import (
    LAG_MIN,
    admixture,
    alveolar_po2,
    arterial_po2,
    entrained_fio2,
    recruitment,
)
from sample_data.patient import Patient
from sample_data.saturation import Values, saturation
from sample_data.script import Inputs

STEP_MIN = 0.5
STEPS_PER_MINUTE = 2
LEAST_EFFORT = 1.0
STIFFNESS = 0.25
"""Share of compliance that an illness twice as bad takes, and that recovery gives back."""
MASK_DEAD_L = 0.01
RESETS_MIN = 360.0
"""Time constant in which the drive goes back to aiming at the usual PaCO2, min."""
SETTLES_MIN = 45.0
"""Time constant in which a patient and a mask get used to each other, min on the mask."""
ILL_DEAD_SPACE = 0.22
"""How much of the lung that gas reaches an illness twice as bad takes away."""


@dataclass(frozen=True, slots=True)
class Trajectory:
    """What is true of the patients each minute: arrays of shape (minutes, n).

    Units: mmHg, L/min, mL, cmH2O, %; `asleep`, `fatigue`, `unmet`, `illness` 0 to 1 or as shares; `gcs` a real
    number; `pf` is PaO2 over the FiO2 truly breathed.
    """

    paco2: Values
    ph: Values
    hco3: Values
    pao2: Values
    saturation: Values
    fio2: Values
    pf: Values
    va: Values
    rate: Values
    tidal_ml: Values
    effort: Values
    fatigue: Values
    unmet: Values
    illness: Values
    gcs: Values
    lactate: Values
    leak: Values
    attained_ipap: Values
    attained_epap: Values
    triggered: Values


@dataclass(slots=True)
class _State:
    fast: Values
    slow: Values
    brain: Values
    pao2: Values
    ph: Values
    own_rate: Values
    effort: Values
    fatigue: Values
    illness: Values
    lactate: Values
    unmet: Values
    unease: Values
    aimed: Values


def simulate_course(p: Patient[Values], inputs: Inputs, wobble: Values) -> Trajectory:
    """Run the model. `wobble` (minutes, n) is how the mask's leak wanders, about 1.

    Raises:
        ValueError: as `calibration.fit`.
    """
    f = fit(p)
    shape = (inputs.minutes, p.paco2.shape[0])
    out = Trajectory(**{field.name: np.empty(shape) for field in fields(Trajectory)})
    state = _begin(p, f)
    for minute in range(inputs.minutes):
        row = {}
        for _ in range(STEPS_PER_MINUTE):
            row = _step(p, f, state, inputs, minute, wobble[minute])
        for name, value in row.items():
            getattr(out, name)[minute] = value
    return out


def _begin(p: Patient[Values], f: Fitted) -> _State:
    zero = np.zeros_like(p.paco2)
    share = admixture(f.shunt * (1.0 - p.matched), f.shunt * p.matched, p.fio2, zero)
    pao2 = arterial_po2(alveolar_po2(p.fio2, p.paco2), share, p.ph)
    return _State(
        fast=p.paco2.copy(), slow=p.paco2.copy(), brain=p.paco2.copy(), pao2=pao2, ph=p.ph.copy(),
        own_rate=p.rr.copy(), effort=f.own_pressure.copy(), fatigue=zero, illness=np.ones_like(zero),
        lactate=p.lactate.copy(), unmet=zero.copy(), unease=p.unease.copy(),
        aimed=aimed_paco2(p),
    )  # fmt: skip


def _step(
    p: Patient[Values], f: Fitted, s: _State, inputs: Inputs, minute: int, wobble: Values
) -> dict[str, Values]:
    on = inputs.on[minute]
    got = delivered(
        inputs.ipap[minute], inputs.epap[minute], inputs.fit_leak[minute] * on, wobble,
        p.asynchrony + inputs.asynchrony_extra[minute] + s.unease,
    )  # fmt: skip
    s.aimed = s.aimed + (p.usual - s.aimed) * (STEP_MIN / RESETS_MIN)
    s.unease = s.unease * (1.0 - on * STEP_MIN / SETTLES_MIN)
    sat = saturation(s.pao2, s.ph)
    lack = oxygen_lack(sat)
    asleep = np.clip(narcosis(s.brain, p.usual, p.tolerance) + inputs.sedation[minute], 0.0, 1.0)

    # Breathing: the patient's own rate, or the machine's where that is faster.
    rate = np.maximum(s.own_rate, inputs.rate_set[minute])
    own_share = np.minimum(s.own_rate / rate, 1.0)
    inspiration = np.where(inputs.ipap[minute] > inputs.epap[minute], inputs.ti[minute], OWN_INSPIRATION_S)
    resistance = p.resistance * (0.55 + 0.45 * s.illness)
    compliance = p.compliance * np.maximum(1.0 + STIFFNESS * (1.0 - s.illness), 0.5)
    whole = filling(rate, inspiration, resistance * compliance)
    support = TRANSMITTED * (got.ipap - got.epap) * (1.0 - got.missed)
    closed = p.airway * np.exp(-got.epap / 4.0)
    useful = np.maximum(s.effort * own_share, 0.0) * (1.0 - closed)
    pressure = flowing_pressure(np.maximum(useful + support, 0.5), whole.trapped, got.epap)
    tidal = tidal_volume(compliance, pressure, whole.gain)
    # Above 92 % oxygen undoes the lung's own matching of blood to air, more so the higher.
    reached = (1.0 - f.wasted_share) * (1.0 - ILL_DEAD_SPACE * (s.illness - 1.0))
    wasted = 1.0 - np.maximum(reached - 0.9 * np.maximum(sat - 0.92, 0.0) * p.matched, 0.1)
    fixed = p.fixed_dead_l + MASK_DEAD_L * on
    usual_breath = p.tidal_ml / 1000.0
    va = alveolar_ventilation(rate, useful_tidal(tidal, usual_breath), fixed, wasted)

    # What is wanted, and the effort made for it.
    extra = f.illness_drive * s.illness + LACK_DRIVE * lack + inputs.drive_extra[minute]
    want = wanted_ventilation(ALVEOLAR * p.vco2 / s.aimed, s.fast, s.aimed, p.drive, extra, asleep)
    s.unmet = np.clip(1.0 - va / want, 0.0, 1.0)
    breath = tidal_for((want / rate + fixed) / (1.0 - wasted), usual_breath)
    needed = needed_pressure(breath / (compliance * whole.gain), whole.trapped, got.epap)
    limit = f.own_pressure * p.reserve * (1.0 - 0.45 * s.fatigue) * (1.0 - SLEEPY_EFFORT * asleep)
    aim = np.minimum(limit - p.unload * support, (needed - support) / np.maximum(1.0 - closed, 0.2))
    s.effort = s.effort + (np.maximum(aim, LEAST_EFFORT) - s.effort) * (STEP_MIN / 2.0)
    load = s.effort / (f.own_pressure * p.reserve) * np.sqrt(s.own_rate / 28.0)
    s.fatigue = tire(s.fatigue, load, p.tires, p.rests, STEP_MIN)

    distress = distress_of(s.unmet, f.illness_drive * s.illness, lack, s.fatigue)
    aim_rate = np.clip(RESTING_RATE + f.rate_per_distress * distress, 8.0, 42.0) * (1.0 - SLEEPY_RATE * asleep)
    s.own_rate = s.own_rate + (aim_rate - s.own_rate) * (STEP_MIN / 6.0)

    # CO2, acid, oxygen.
    vco2 = p.vco2 * (1.0 + EFFORT_COST * np.minimum(load, 1.5)) * (1.0 + 0.06 * (s.illness - 1.0))
    s.fast, s.slow = step_stores(s.fast, s.slow, vco2, va, p.weight, p.slow_stores, STEP_MIN)
    s.brain = s.brain + (s.fast - s.brain) * (STEP_MIN / 15.0)
    s.lactate = s.lactate + (1.0 + 2.0 * lack - s.lactate) * (STEP_MIN / 70.0)
    hco3 = np.maximum(buffered(f.hco3_at_usual, s.fast, p.usual) + p.lactate - s.lactate, 3.0)
    s.ph = ph_of(hco3, s.fast)

    speed = (1.0 + p.pressure_heals * got.epap / 8.0) / (60.0 * p.course_h)
    s.illness = s.illness + (inputs.severity_end[minute] - s.illness) * np.minimum(speed * STEP_MIN, 1.0)
    fio2 = _breathed(inputs, minute, rate * tidal, got, on)
    shunt = f.shunt * np.power(np.maximum(s.illness, 0.02), 0.8)
    share = admixture(
        shunt * (1.0 - p.matched), shunt * p.matched, fio2, recruitment(got.epap, p.recruitable)
    )
    steady = arterial_po2(alveolar_po2(fio2, s.fast), share, s.ph)
    s.pao2 = s.pao2 + (steady - s.pao2) * (STEP_MIN / LAG_MIN)

    return {
        "paco2": s.fast, "ph": s.ph, "hco3": hco3, "pao2": s.pao2, "saturation": sat, "fio2": fio2,
        "pf": s.pao2 / fio2, "va": va, "rate": rate, "tidal_ml": 1000.0 * tidal, "effort": s.effort,
        "fatigue": s.fatigue, "unmet": s.unmet, "illness": s.illness, "gcs": coma_scale(asleep, lack),
        "lactate": s.lactate, "leak": got.leak, "attained_ipap": got.ipap, "attained_epap": got.epap,
        "triggered": triggered_percent(s.own_rate, inputs.rate_set[minute], got.missed),
    }  # fmt: skip


def _breathed(inputs: Inputs, minute: int, ventilation: Values, got: object, on: Values) -> Values:
    """The FiO2 that reaches the patient: as set, or what a flow makes of it."""
    from sample_data.device import Delivered

    assert isinstance(got, Delivered)
    flow = np.nan_to_num(inputs.o2_flow[minute])
    machine = ventilation + got.leak + port_flow(0.6 * got.epap + 0.4 * got.ipap)
    by_flow = np.where(on > 0, entrained_fio2(flow, machine), 0.21 + 0.03 * flow)
    fio2 = inputs.fio2[minute]
    return np.where(np.isnan(fio2), by_flow, np.nan_to_num(fio2, nan=0.21))
