"""Scenarios of hypoxaemic failure."""

from __future__ import annotations

from sample_data.case import Case, bilevel, hourly, make_case, opened
from sample_data.dice import Dice
from sample_data.patient import Patient, Person

NURSE, THERAPIST = "RP", "KT"


def _lung(d: Dice, **changes: float) -> Patient[float]:
    weight = round(d.about(78, 10, 56, 104))
    numbers: dict[str, float] = {
        "age": round(d.about(64, 10, 40, 84)), "weight": weight, "usual": 40.0, "paco2": d.about(34, 2, 30, 39),
        "ph": d.about(7.44, 0.015, 7.41, 7.47), "rr": d.about(33, 2, 29, 37), "tidal_ml": d.about(500, 30, 440, 580),
        "spo2": d.about(92.5, 1.2, 90, 95), "fio2": 0.4, "hr": d.about(112, 8, 96, 128),
        "sbp": d.about(124, 10, 102, 148),
        "temp": d.about(38.6, 0.4, 37.8, 39.4), "vco2": 120.0 + 1.6 * weight,
        "compliance": d.about(0.042, 0.004, 0.034, 0.052),
        "resistance": d.about(8, 1, 6, 11), "fixed_dead_l": 0.10, "drive": 0.5, "reset": 0.0,
        "tolerance": 42.0, "unload": 0.5,
        "reserve": 1.5, "asynchrony": 0.06, "unease": 0.15, "tires": 0.10, "rests": 0.15,
        "slow_stores": 1.0, "matched": 0.35,
        "recruitable": 0.30, "airway": 0.0, "course_h": 4.0, "pressure_heals": 0.0,
        "lactate": d.about(1.8, 0.4, 1, 3),
        "sensor_bias": d.about(0, 0.7, -1.4, 1.4),
    }  # fmt: skip
    return Patient(**{**numbers, **changes})


def hypoxaemic_failure(seed: int, last: int) -> Case:
    """Pneumonia that gets worse on support: P/F falls, rate and effort stay high."""
    d = Dice("hypoxaemic_failure", seed, "case")
    p = _lung(d)
    s = opened(
        last,
        NURSE,
        before={"fio2": 0.4},
        start=bilevel(14, 6, 0.4, rate=12, ti=0.9),
        fit_leak=d.between(10, 18),
    )
    s.hidden(0, severity_end=d.between(1.1, 2.0))
    s.gas(d.minute(62, 4), NURSE, sent=True)
    s.settings(d.minute(78, 4), THERAPIST, ipap=16, epap=8)
    s.settings(d.minute(98, 3), NURSE, fio2=0.5)
    s.gas(d.minute(165, 6), NURSE)
    s.settings(d.minute(185, 4), NURSE, fio2=0.6)
    s.event(190, "review", "AL", "more oxygen, prone if tolerated; see again with next gas")
    s.event(215, "checked_no_change", THERAPIST, "coughing, mask good")
    s.gas(d.minute(265, 6), NURSE)
    s.settings(d.minute(282, 4), NURSE, fio2=0.7)
    s.gas(d.minute(375, 8), NURSE)
    s.settings(d.minute(395, 4), NURSE, fio2=0.8)
    s.vitals([15, 60, 90], NURSE)
    s.vitals(hourly(120, last, 30), NURSE)
    sex = d.one_of("female", "male")
    person = Person(
        sex, round(d.about(164 if sex == "female" else 177, 6, 150, 192)), "pneumonia", False, "none", (94, 98),
        "full", "for resuscitation", 5,
    )  # fmt: skip
    return make_case("hypoxaemic_failure", seed, p, person, s)


def pulmonary_oedema(seed: int, last: int) -> Case:
    """Cardiogenic pulmonary oedema on CPAP: wet, acid from lactate, better within the hour."""
    d = Dice("pulmonary_oedema", seed, "case")
    p = _lung(
        d, age=round(d.about(74, 8, 56, 90)), paco2=d.about(47, 3, 41, 54), ph=d.about(7.27, 0.02, 7.22, 7.31),
        rr=d.about(34, 2, 30, 38), tidal_ml=d.about(420, 25, 370, 480), spo2=d.about(86, 1.5, 82, 89), fio2=0.5,
        hr=d.about(122, 7, 108, 138), sbp=d.about(176, 14, 150, 206), temp=d.about(36.7, 0.3, 36.1, 37.3),
        lactate=d.about(4.2, 0.7, 2.8, 5.8), recruitable=0.45, course_h=2.4, pressure_heals=1.2, reserve=1.0,
        tires=0.05, rests=0.4,
    )  # fmt: skip
    start: dict[str, float | str] = {"mode": "CPAP", "cpap": 7.5, "fio2": 0.5, "interface": "full face"}
    s = opened(last, NURSE, before={"fio2": 0.5}, start=start, fit_leak=d.between(6, 14), pre_gas=-12)
    s.hidden(0, severity_end=0.25)
    s.settings(d.minute(12, 2), THERAPIST, cpap=10)
    s.event(8, "drug", NURSE, "furosemide and nitrate as charted")
    s.gas(d.minute(54, 4), NURSE)
    s.settings(d.minute(68, 4), NURSE, fio2=0.4)
    s.settings(d.minute(86, 3), NURSE, fio2=0.3)
    s.gas(d.minute(150, 6), NURSE)
    s.settings(d.minute(172, 4), NURSE, fio2=0.28)
    s.gas(d.minute(275, 8), NURSE)
    s.vitals([10, 30, 60, 90], NURSE)
    s.vitals(hourly(120, last), NURSE)
    sex = d.one_of("female", "male")
    person = Person(
        sex, round(d.about(161 if sex == "female" else 174, 6, 148, 188)), "cardiogenic pulmonary oedema",
        False, "none",
        (94, 98), "full", "for resuscitation", 4,
    )  # fmt: skip
    return make_case("pulmonary_oedema", seed, p, person, s)
