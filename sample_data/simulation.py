"""The course: every half minute, from what acts on the patient to what is true of the patient."""

from __future__ import annotations

from dataclasses import dataclass, fields

import numpy as np

from sample_data.calibration import Fitted, aimed_paco2, fit
from sample_data.lungs import Breath, breathe, seek
from sample_data.patient import Patient
from sample_data.saturation import Values
from sample_data.script import Inputs
from sample_data.state import STEP_MIN, State, blood, settle, start_state

STEPS_PER_MINUTE = round(1.0 / STEP_MIN)


@dataclass(frozen=True, slots=True)
class Trajectory:
    """What is true of the patients each minute: arrays of shape (minutes, n), or (minutes,) for one.

    Units: mmHg, L/min, mL, cmH2O, %; `saturation`, `fio2`, `fatigue`, `unmet` (the share of wanted ventilation
    that is missing) as fractions; `illness` 1 as it began; `gcs` a real number; `pf` is PaO2 over the FiO2 truly
    breathed, which the ward may not know.
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


def simulate_course(p: Patient[Values], inputs: Inputs, wobble: Values) -> Trajectory:
    """Run the model. `wobble` (minutes, n) is how the mask's leak wanders, about 1.

    Raises:
        ValueError: as `calibration.fit`.
    """
    fitted = fit(p)
    shape = (inputs.minutes, p.paco2.shape[0])
    out = Trajectory(**{field.name: np.empty(shape) for field in fields(Trajectory)})
    state = start_state(p, fitted, aimed_paco2(p))
    for minute in range(inputs.minutes):
        now = inputs.at(minute)
        for _ in range(STEPS_PER_MINUTE):
            breath = _step(p, fitted, state, now, wobble[minute])
        for name, value in _seen(state, breath).items():
            getattr(out, name)[minute] = value
    return out


def _step(p: Patient[Values], fitted: Fitted, state: State, now: Inputs, wobble: Values) -> Breath:
    settle(p, state, now)
    breath = breathe(p, fitted, state, now, wobble)
    seek(p, fitted, state, now, breath)
    blood(p, fitted, state, now, breath)
    return breath


def _seen(s: State, b: Breath) -> dict[str, Values]:
    return {
        "paco2": s.fast, "ph": s.ph, "hco3": s.hco3, "pao2": s.pao2, "saturation": s.saturation, "fio2": s.fio2,
        "pf": s.pao2 / s.fio2, "va": b.alveolar, "rate": b.rate, "tidal_ml": 1000.0 * b.tidal, "effort": s.effort,
        "fatigue": s.fatigue, "unmet": s.unmet, "illness": s.illness, "gcs": s.gcs, "lactate": s.lactate,
        "leak": b.got.leak, "attained_ipap": b.got.ipap, "attained_epap": b.got.epap, "triggered": b.triggered,
    }  # fmt: skip
