"""One invented patient: what is seen before support, and the hidden properties that decide the course."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, fields
from typing import Generic, TypeVar

import numpy as np

from sample_data.saturation import Values

N = TypeVar("N", float, Values)


@dataclass(frozen=True, slots=True)
class Patient(Generic[N]):
    """Numbers of one patient (floats), or of many at once (arrays of shape (n,)).

    Seen before support: `paco2` mmHg, `ph`, `rr` /min, `tidal_ml`, `spo2` %, `fio2` breathed then, `hr` /min,
    `sbp` mmHg, `temp` degC. The simulation is calibrated so that it begins there.

    Hidden: `vco2` mL/min at rest; `compliance` L/cmH2O; `resistance` cmH2O s/L; `fixed_dead_l` L;
    `drive` share of ventilation per 10 mmHg; `reset` share of the acute rise of
    PaCO2 that the drive has got used to; `tolerance` mmHg of PaCO2 above usual before narcosis; `unload`
    share of the support that the patient's own effort gives back; `reserve` the effort possible over the
    effort made before support (1: at the limit); `asynchrony` share of breaths the machine
    misses, `unease` how much more at first, until the patient has settled; `tires` and
    `rests` per hour; `slow_stores` a scale; `matched` share of admixture that oxygen overcomes; `recruitable`
    share that pressure overcomes; `airway` share of breathing that a closed upper airway takes without EPAP;
    `course_h` h until the illness has gone 63 % of its way; `pressure_heals` how much EPAP speeds that;
    `lactate` mmol/L at the start; `sensor_bias` % of the oximeter.
    """

    age: N
    weight: N
    usual: N
    paco2: N
    ph: N
    rr: N
    tidal_ml: N
    spo2: N
    fio2: N
    hr: N
    sbp: N
    temp: N
    vco2: N
    compliance: N
    resistance: N
    fixed_dead_l: N
    drive: N
    reset: N
    tolerance: N
    unload: N
    reserve: N
    asynchrony: N
    unease: N
    tires: N
    rests: N
    slow_stores: N
    matched: N
    recruitable: N
    airway: N
    course_h: N
    pressure_heals: N
    lactate: N
    sensor_bias: N


def together(patients: Sequence[Patient[float]]) -> Patient[Values]:
    """Many patients as one of arrays, so that a cohort is simulated in one sweep."""
    return Patient(**{f.name: np.array([getattr(p, f.name) for p in patients], np.float64) for f in fields(Patient)})


@dataclass(frozen=True, slots=True)
class Person:
    """What the notes say of the person, beside numbers."""

    sex: str
    height: float
    indication: str
    usual_known: bool
    home_support: str
    target: tuple[int, int]
    ceiling: str
    resuscitation: str
    sofa: int | None
