"""A case: a patient, the person in the notes, and the script of the bedside; and how cases are begun."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, replace

from sample_data.calibration import EFFORT_COST
from sample_data.dice import Dice
from sample_data.gas_exchange import ALVEOLAR
from sample_data.patient import Patient, Person
from sample_data.script import Script

FIRST_MINUTE = -45
"""Records begin three quarters of an hour before support."""


@dataclass(frozen=True, slots=True)
class Case:
    """What a scenario makes for a seed, before anything is simulated."""

    kind: str
    seed: int
    patient: Patient[float]
    person: Person
    script: Script


LEAST_WASTED = 0.15


def make_case(kind: str, seed: int, patient: Patient[float], person: Person, script: Script) -> Case:
    """A case whose draws fit together: the breath is made large enough for the CO2 that it must carry."""
    carried = ALVEOLAR * patient.vco2 * (1.0 + EFFORT_COST) / patient.paco2 / patient.rr
    least_ml = 1000.0 * (carried + patient.fixed_dead_l) / (1.0 - LEAST_WASTED)
    return Case(kind, seed, altered(patient, tidal_ml=max(patient.tidal_ml, least_ml)), person, script)


def copd_patient(d: Dice) -> Patient[float]:
    """A hypercapnic exacerbation of COPD: obstructed, at the limit of effort, blunted drive."""
    weight = d.about(72, 12, 48, 105)
    usual = d.about(54, 3, 47, 61)
    paco2 = d.about(80, 5, 70, 94)
    return Patient(
        age=round(d.about(70, 8, 52, 87)), weight=round(weight), usual=usual, paco2=paco2,
        ph=d.about(7.245, 0.015, 7.21, 7.285), rr=d.about(29, 2.5, 24, 34), tidal_ml=d.about(340, 25, 280, 400),
        spo2=d.about(88.5, 1.2, 86, 91), fio2=0.28, hr=d.about(108, 8, 90, 126), sbp=d.about(138, 12, 112, 168),
        temp=d.about(37.3, 0.4, 36.4, 38.2), vco2=3.0 * weight, compliance=d.about(0.055, 0.006, 0.04, 0.07),
        resistance=d.about(16, 2, 11, 21), fixed_dead_l=0.06, drive=d.about(0.35, 0.05, 0.25, 0.5), reset=0.3,
        tolerance=d.about(49, 3, 42, 57), unload=0.45, reserve=1.0, asynchrony=0.06, unease=0.40,
        tires=0.04, rests=0.35,
        slow_stores=1.0, matched=0.7, recruitable=0.12, airway=0.0, course_h=10.0, pressure_heals=0.0,
        lactate=d.about(1.3, 0.3, 0.7, 2.2), sensor_bias=d.about(0, 0.7, -1.4, 1.4),
    )  # fmt: skip


def copd_person(d: Dice, ceiling: str = "full") -> Person:
    """The notes of a person with COPD."""
    sex = d.one_of("female", "male")
    height = round(d.about(163 if sex == "female" else 174, 6, 148, 190))
    dnr = "for resuscitation" if ceiling == "full" else "not for resuscitation"
    return Person(sex, height, "copd", d.chance(0.5), "none", (88, 92), ceiling, dnr, None)


def opened(
    last: int, by: str, *, start: dict[str, float | str], before: dict[str, float | str], fit_leak: float,
    pre_gas: int = -25, first: int = FIRST_MINUTE, pressure_unit: str = "mmHg",
    logged_from: int = FIRST_MINUTE,
) -> Script:  # fmt: skip
    """A script with the usual beginning: vital signs and a gas before, then the mask on and the first settings."""
    s = Script(first, last, logged_from=logged_from, pressure_unit=pressure_unit)
    s.settings(first, by, **before)
    s.vitals([pre_gas + 2], by)
    s.gas(pre_gas, by)
    s.hidden(0, fit_leak=fit_leak)
    s.event(0, "mask_on", by)
    s.settings(0, by, **start)
    return s


def bilevel(
    ipap: float, epap: float, oxygen: float, rate: float = 14, ti: float = 1.0, mode: str = "BPAP-ST",
    interface: str = "oronasal",
) -> dict[str, float | str]:  # fmt: skip
    """Settings of a two-pressure start."""
    return {
        "mode": mode,
        "ipap": ipap,
        "epap": epap,
        "rate_set": rate,
        "ti": ti,
        "fio2": oxygen,
        "interface": interface,
    }


def hourly(first: int, last: int, every: int = 60) -> Iterable[int]:
    """Minutes of a round that comes every so often."""
    return range(first, last + 1, every)


def altered(patient: Patient[float], **changes: float) -> Patient[float]:
    """The same patient with other numbers."""
    return replace(patient, **changes)
