"""What changes in a patient from one half minute to the next, and how blood follows breathing."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Protocol

import numpy as np

from sample_data.calibration import EFFORT_COST, Fitted
from sample_data.device import Delivered, port_flow
from sample_data.drive import coma_scale, narcosis, oxygen_lack
from sample_data.gas_exchange import buffered, ph_of, step_stores
from sample_data.oxygen import LAG_MIN, admixture, alveolar_po2, arterial_po2, entrained_fio2, recruitment
from sample_data.patient import Patient
from sample_data.saturation import Values, saturation
from sample_data.script import Inputs

STEP_MIN = 0.5
RESETS_MIN = 360.0
"""Time constant in which the drive goes back to aiming at the usual PaCO2, min."""
SETTLES_MIN = 45.0
"""Time constant in which a patient and a mask get used to each other, min on the mask."""
BRAIN_LAG_MIN = 15.0
LACTATE_MIN = 70.0
ILL_CO2 = 0.06
"""Share of CO2 production that an illness twice as bad adds (fever)."""


@dataclass(slots=True)
class State:
    """The state of all patients of a sweep; arrays of shape (n,).

    `fast`, `slow`: PCO2 of the two stores, `fast` being PaCO2; `brain`: PaCO2 as the brain feels it; `aimed`: the
    PaCO2 that the drive settles for; `unease`: share of breaths missed while the mask is new.
    """

    fast: Values
    slow: Values
    brain: Values
    aimed: Values
    pao2: Values
    fio2: Values
    ph: Values
    hco3: Values
    saturation: Values
    lack: Values
    asleep: Values
    own_rate: Values
    effort: Values
    load: Values
    fatigue: Values
    illness: Values
    lactate: Values
    unmet: Values
    unease: Values
    gcs: Values


class Ventilating(Protocol):
    """What blood needs to know of a breath: L/min and L, and what the machine delivers."""

    @property
    def rate(self) -> Values: ...
    @property
    def tidal(self) -> Values: ...
    @property
    def alveolar(self) -> Values: ...
    @property
    def got(self) -> Delivered: ...


def start_state(p: Patient[Values], f: Fitted, aimed: Values) -> State:
    """The steady state before support."""
    zero, one = np.zeros_like(p.paco2), np.ones_like(p.paco2)
    share = admixture(f.shunt * (1.0 - p.matched), f.shunt * p.matched, p.fio2, zero)
    pao2 = arterial_po2(alveolar_po2(p.fio2, p.paco2), share, p.ph)
    return State(
        fast=p.paco2, slow=p.paco2, brain=p.paco2, aimed=aimed, pao2=pao2, fio2=p.fio2, ph=p.ph,
        hco3=buffered(f.hco3_at_usual, p.paco2, p.usual), saturation=saturation(pao2, p.ph), lack=zero, asleep=zero,
        own_rate=p.rr, effort=f.own_pressure, load=one, fatigue=zero, illness=one, lactate=p.lactate, unmet=zero,
        unease=p.unease, gcs=15.0 * one,
    )  # fmt: skip


def settle(p: Patient[Values], s: State, now: Inputs) -> None:
    """What time alone brings: the drive resets, the mask becomes familiar, consciousness follows PaCO2."""
    s.aimed = s.aimed + (p.usual - s.aimed) * (STEP_MIN / RESETS_MIN)
    s.unease = s.unease * (1.0 - now.on * STEP_MIN / SETTLES_MIN)
    s.brain = s.brain + (s.fast - s.brain) * (STEP_MIN / BRAIN_LAG_MIN)
    s.saturation = saturation(s.pao2, s.ph)
    s.lack = oxygen_lack(s.saturation)
    s.asleep = np.clip(narcosis(s.brain, p.usual, p.tolerance) + now.sedation, 0.0, 1.0)
    s.gcs = coma_scale(s.asleep, s.lack)


def blood(p: Patient[Values], f: Fitted, s: State, now: Inputs, breath: Ventilating) -> None:
    """CO2 stores, acid, illness and oxygen after half a minute of that breathing."""
    vco2 = p.vco2 * (1.0 + EFFORT_COST * np.minimum(s.load, 1.5)) * (1.0 + ILL_CO2 * (s.illness - 1.0))
    s.fast, s.slow = step_stores(s.fast, s.slow, vco2, breath.alveolar, p.weight, p.slow_stores, STEP_MIN)
    s.lactate = s.lactate + (1.0 + 2.0 * s.lack - s.lactate) * (STEP_MIN / LACTATE_MIN)
    s.hco3 = np.maximum(buffered(f.hco3_at_usual, s.fast, p.usual) + p.lactate - s.lactate, 3.0)
    s.ph = ph_of(s.hco3, s.fast)

    speed = (1.0 + p.pressure_heals * breath.got.epap / 8.0) / (60.0 * p.course_h)
    s.illness = s.illness + (now.severity_end - s.illness) * np.minimum(speed * STEP_MIN, 1.0)

    s.fio2 = _breathed(now, breath)
    shunt = f.shunt * np.power(np.maximum(s.illness, 0.02), 0.8)
    recruited = recruitment(breath.got.epap, p.recruitable)
    share = admixture(shunt * (1.0 - p.matched), shunt * p.matched, s.fio2, recruited)
    steady = arterial_po2(alveolar_po2(s.fio2, s.fast), share, s.ph)
    s.pao2 = s.pao2 + (steady - s.pao2) * (STEP_MIN / LAG_MIN)


def _breathed(now: Inputs, breath: Ventilating) -> Values:
    """The FiO2 that reaches the patient: as set, or what a flow makes of it, on the machine or by nose."""
    flow = np.nan_to_num(now.o2_flow)
    got = breath.got
    machine = breath.rate * breath.tidal + got.leak + port_flow(0.6 * got.epap + 0.4 * got.ipap)
    by_flow = np.where(now.on > 0, entrained_fio2(flow, machine), 0.21 + 0.03 * flow)
    return np.where(np.isnan(now.fio2), by_flow, np.nan_to_num(now.fio2, nan=0.21))
