"""Scenarios of hypercapnic failure: what kind of patient, and what is done at the bedside."""

from __future__ import annotations

from sample_data.case import Case, altered, bilevel, copd_patient, copd_person, hourly, make_case, opened
from sample_data.dice import Dice
from sample_data.patient import Person

NURSE, THERAPIST, DOCTOR = "MO", "KT", "AL"


def prompt_responder(seed: int, last: int) -> Case:
    """COPD that answers within two hours once the pressure is brought up quickly."""
    d = Dice("prompt_responder", seed, "case")
    p = altered(copd_patient(d), unload=0.55, reset=0.2, course_h=7.0)
    s = opened(last, NURSE, before={"fio2": 0.28}, start=bilevel(15, 4, 0.26), fit_leak=d.between(8, 14))
    s.hidden(0, severity_end=0.2)
    s.event(5, "drug", NURSE, "nebuliser, salbutamol and ipratropium")
    s.settings(d.minute(10, 2), THERAPIST, ipap=18)
    s.settings(d.minute(24, 3), THERAPIST, ipap=20, epap=5)
    s.gas(d.minute(84, 5), NURSE, sent=True)
    s.gas(d.minute(150, 8), NURSE)
    s.settings(d.minute(168, 5), NURSE, fio2=0.24)
    s.gas(d.minute(330, 15), NURSE)
    s.vitals([12, 60, 90], NURSE)
    s.vitals(hourly(150, last), NURSE)
    s.event(232, "skin_check", NURSE, "intact")
    return make_case("prompt_responder", seed, p, copd_person(d), s)


def slow_responder(seed: int, last: int) -> Case:
    """COPD that is given too little at first, and answers over hours as support is raised."""
    d = Dice("slow_responder", seed, "case")
    p = altered(
        copd_patient(d),
        unload=0.85,
        reset=0.55,
        asynchrony=0.18,
        unease=0.55,
        course_h=14.0,
        slow_stores=1.3,
        tires=0.05,
    )
    s = opened(last, NURSE, before={"fio2": 0.28}, start=bilevel(12, 4, 0.27), fit_leak=d.between(12, 18))
    s.hidden(0, severity_end=0.5)
    s.gas(d.minute(62, 5), NURSE)
    s.settings(d.minute(76, 3), THERAPIST, ipap=15)
    s.event(160, "agitation", NURSE, "pulling at the mask, settled with a hand to hold")
    s.gas(d.minute(140, 6), NURSE)
    s.settings(d.minute(156, 4), THERAPIST, ipap=18, epap=5)
    s.hidden(160, asynchrony_extra=-0.10)
    s.gas(d.minute(222, 8), NURSE)
    s.settings(d.minute(240, 4), THERAPIST, ipap=20)
    s.settings(d.minute(252, 3), NURSE, fio2=0.24)
    s.gas(d.minute(305, 8), NURSE)
    s.gas(d.minute(430, 15), NURSE)
    s.vitals([15, 60], NURSE)
    s.vitals(hourly(120, last), NURSE)
    return make_case("slow_responder", seed, p, copd_person(d), s)


def non_responder(seed: int, last: int) -> Case:
    """COPD with pneumonia that tires in spite of support: should be escalated."""
    d = Dice("non_responder", seed, "case")
    p = altered(
        copd_patient(d), ph=d.about(7.22, 0.01, 7.20, 7.245), paco2=d.about(84, 4, 77, 94),
        rr=d.about(32, 1.5, 29, 35),
        unload=0.70, asynchrony=0.40, unease=0.25, tires=0.08, rests=0.1, reset=0.3, vco2=3.4 * 72, course_h=4.0,
        temp=d.about(38.3, 0.3, 37.8, 39.0), hr=d.about(118, 6, 106, 132), tolerance=d.about(43, 3, 37, 49),
        drive=0.45, matched=0.55,
    )  # fmt: skip
    s = opened(last, NURSE, before={"fio2": 0.28}, start=bilevel(15, 5, 0.30), fit_leak=d.between(14, 22))
    s.hidden(0, severity_end=d.between(1.2, 1.7))
    s.settings(d.minute(14, 3), THERAPIST, ipap=18)
    s.settings(d.minute(30, 3), THERAPIST, ipap=20)
    s.gas(d.minute(92, 4), NURSE, sent=True)
    s.settings(d.minute(106, 4), THERAPIST, ipap=24, rate_set=16)
    s.settings(d.minute(110, 2), NURSE, fio2=0.35)
    s.event(112, "review", DOCTOR, "tired, secretions; chest film shows right base")
    s.event(116, "secretions", NURSE, "thick, suctioned")
    s.event(128, "drug", NURSE, "nebuliser, salbutamol")
    s.gas(d.minute(168, 6), NURSE, sent=True)
    s.event(182, "told", NURSE, "medical registrar | busy, will come")
    s.vitals([15, 45, 90, 120, 150, 180, 210], NURSE)
    s.vitals(hourly(240, last, 30), NURSE)
    s.gas(d.minute(240, 6), NURSE)
    return make_case("non_responder", seed, p, copd_person(d), s)


def large_leak(seed: int, last: int) -> Case:
    """COPD whose mask leaks from the second hour: what was gained is lost, until the mask is changed."""
    d = Dice("large_leak", seed, "case")
    p = altered(copd_patient(d), unload=0.55, course_h=14.0, slow_stores=0.9)
    s = opened(last, NURSE, before={"fio2": 0.28}, start=bilevel(15, 5, 0.27), fit_leak=d.between(12, 18))
    s.hidden(0, severity_end=0.6)
    s.settings(d.minute(12, 3), THERAPIST, ipap=18)
    s.settings(d.minute(28, 3), THERAPIST, ipap=20)
    s.gas(d.minute(90, 5), NURSE)
    begins = d.minute(115, 8)
    for step, leak in enumerate((40, 60, 78, 90)):
        s.hidden(begins + 12 * step, fit_leak=leak)
    s.event(begins + 65, "mask_adjusted", NURSE, "straps tightened")
    s.hidden(begins + 65, fit_leak=58)
    s.hidden(begins + 85, fit_leak=88)
    s.gas(begins + 95, NURSE)
    s.event(begins + 70, "skin_check", NURSE, "red on the bridge of the nose")
    s.event(begins + 150, "mask_adjusted", NURSE, "no better")
    s.hidden(begins + 150, fit_leak=66)
    s.hidden(begins + 165, fit_leak=86)
    s.vitals([15, 60], NURSE)
    s.vitals(hourly(120, last), NURSE)
    return make_case("large_leak", seed, p, copd_person(d), s)


def obesity_hypoventilation(seed: int, last: int) -> Case:
    """Obesity hypoventilation: acidotic for hours, answers once EPAP opens the airway and stores empty."""
    d = Dice("obesity_hypoventilation", seed, "case")
    weight = round(d.about(138, 12, 115, 175))
    p = altered(
        copd_patient(d), age=round(d.about(56, 8, 38, 72)), weight=weight, usual=d.about(56, 3, 50, 62),
        paco2=d.about(79, 4, 71, 90), ph=d.about(7.265, 0.012, 7.235, 7.29), rr=d.about(25, 2, 21, 29),
        tidal_ml=d.about(390, 25, 330, 450), vco2=120.0 + weight, compliance=d.about(0.034, 0.003, 0.028, 0.042),
        resistance=d.about(9, 1.5, 6, 13), drive=0.18, reset=0.65, unload=0.85, unease=0.5, airway=0.24,
        slow_stores=3.0, matched=0.4,
        recruitable=0.35, tires=0.02, tolerance=d.about(46, 3, 40, 54), temp=d.about(36.8, 0.3, 36.2, 37.5),
        hr=d.about(96, 7, 80, 112), course_h=16.0,
    )  # fmt: skip
    s = opened(last, NURSE, before={"fio2": 0.35}, start=bilevel(12, 5, 0.29, ti=1.3), fit_leak=d.between(8, 16))
    s.hidden(0, severity_end=0.8)
    s.gas(d.minute(66, 5), NURSE)
    s.settings(d.minute(82, 4), THERAPIST, ipap=16, epap=7)
    s.gas(d.minute(148, 6), NURSE)
    s.settings(d.minute(172, 4), THERAPIST, ipap=20, epap=8)
    s.gas(d.minute(240, 8), NURSE)
    s.settings(d.minute(262, 5), THERAPIST, ipap=24, epap=10, rate_set=16, fio2=0.25)
    s.gas(d.minute(335, 8), NURSE)
    s.gas(d.minute(450, 12), NURSE)
    s.vitals([15, 60], NURSE)
    s.vitals(hourly(120, last), NURSE)
    sex = d.one_of("female", "male")
    person = Person(
        sex, round(d.about(162 if sex == "female" else 172, 5, 150, 184)), "obesity hypoventilation", False, "none",
        (88, 92), "full", "for resuscitation", None,
    )  # fmt: skip
    s.event(228, "skin_check", NURSE, "intact")
    s.event(442, "skin_check", NURSE, "intact")
    return make_case("obesity_hypoventilation", seed, p, person, s)


def weaning(seed: int, last: int) -> Case:
    """COPD on its second night: acidosis long gone, breaks that get longer, the last one a little too long."""
    d = Dice("weaning", seed, "case")
    p = altered(
        copd_patient(d), paco2=d.about(58, 2, 54, 62), ph=d.about(7.365, 0.006, 7.352, 7.378),
        rr=d.about(20, 1, 18, 22),
        hr=d.about(86, 6, 74, 100), course_h=9.0, unload=0.5, unease=0.05, tires=0.02, fio2=0.26,
        spo2=d.about(90, 0.7, 88.5, 91.5),
    )  # fmt: skip
    s = opened(last, NURSE, before={"fio2": 0.26}, start=bilevel(18, 5, 0.26), fit_leak=d.between(7, 12))
    s.hidden(0, severity_end=0.7)
    breaks = ((150, 45, "supper"), (255, 65, "washed, sat out"), (390, 95, "asleep on 2 L/min"))
    for begin, length, text in breaks:
        s.event(begin, "break_start", NURSE, text)
        s.settings(begin, NURSE, o2_flow=2)
        s.event(begin + length, "break_end", NURSE)
        s.settings(begin + length, NURSE, fio2=0.26)
    s.gas(d.minute(68, 4), NURSE)
    s.gas(d.minute(472, 3), NURSE, "capillary")
    s.event(130, "skin_check", NURSE, "intact")
    s.vitals([15, 75], NURSE)
    s.vitals(hourly(120, last), NURSE)
    return make_case("weaning", seed, p, copd_person(d), s)


def overdue_gas(seed: int, last: int) -> Case:
    """COPD: support was raised on a bad gas, then two other patients took all hands; no gas since."""
    d = Dice("overdue_gas", seed, "case")
    p = altered(copd_patient(d), unload=0.70, reset=0.4, asynchrony=0.12, course_h=14.0)
    s = opened(last, NURSE, before={"fio2": 0.28}, start=bilevel(14, 5, 0.28), fit_leak=d.between(9, 16))
    s.hidden(0, severity_end=0.7)
    s.gas(d.minute(72, 4), NURSE)
    s.settings(d.minute(88, 3), THERAPIST, ipap=18)
    s.settings(d.minute(96, 3), THERAPIST, fio2=0.32)
    s.event(100, "note", NURSE, "two admissions at once; back to this bed at 04:00")
    s.vitals([15, 60], NURSE)
    s.vitals(hourly(120, last), NURSE)
    return make_case("overdue_gas", seed, p, copd_person(d, "no intubation"), s)


def kpa_ward(seed: int, last: int) -> Case:
    """COPD that answers within two hours; the ward writes kPa, and an oxygen flow instead of an FiO2."""
    d = Dice("kpa_ward", seed, "case")
    p = altered(copd_patient(d), unload=0.58, reset=0.25, course_h=8.0, fio2=0.27)
    start = bilevel(15, 5, 0.28)
    del start["fio2"]
    start["o2_flow"] = 2.0
    s = opened(last, NURSE, before={"o2_flow": 2.0}, start=start, fit_leak=d.between(9, 14), pressure_unit="kPa")
    s.hidden(0, severity_end=0.4)
    s.settings(d.minute(14, 3), THERAPIST, ipap=18)
    s.settings(d.minute(33, 3), THERAPIST, ipap=20)
    s.gas(d.minute(94, 5), NURSE)
    s.settings(d.minute(112, 4), NURSE, o2_flow=1.5)
    s.gas(d.minute(178, 6), NURSE)
    s.settings(d.minute(205, 5), NURSE, o2_flow=1)
    s.gas(d.minute(350, 10), NURSE)
    s.vitals([15, 60], NURSE)
    s.vitals(hourly(120, last), NURSE)
    s.event(226, "skin_check", NURSE, "intact")
    return make_case("kpa_ward", seed, p, copd_person(d), s)


def already_running(seed: int, last: int) -> Case:
    """Neuromuscular weakness on support since the afternoon; the log starts with the night."""
    d = Dice("already_running", seed, "case")
    weight = round(d.about(64, 7, 48, 82))
    p = altered(
        copd_patient(d), age=round(d.about(47, 9, 28, 68)), weight=weight, usual=d.about(48, 2, 44, 52),
        paco2=d.about(66, 3, 60, 72), ph=d.about(7.30, 0.01, 7.28, 7.325), rr=d.about(27, 2, 24, 31),
        tidal_ml=d.about(250, 15, 220, 290), vco2=110.0 + weight, compliance=d.about(0.045, 0.004, 0.036, 0.055),
        resistance=d.about(5, 1, 3, 8), unload=0.6, matched=0.3, fio2=0.21, spo2=d.about(89.5, 0.7, 88, 91),
        fixed_dead_l=0.07, tires=0.05, course_h=20.0, temp=36.8, hr=d.about(92, 6, 80, 106), recruitable=0.3,
    )  # fmt: skip
    s = opened(
        last, NURSE, before={"fio2": 0.21}, start=bilevel(16, 4, 0.21, rate=16, ti=1.3, interface="nasal"),
        fit_leak=d.between(6, 12), logged_from=180,
    )  # fmt: skip
    s.hidden(0, severity_end=0.8)
    s.settings(181, NURSE, **bilevel(16, 4, 0.21, rate=16, ti=1.3, interface="nasal"))
    s.gas(d.minute(215, 6), NURSE)
    s.event(250, "secretions", NURSE, "assisted cough, cleared")
    s.gas(d.minute(465, 10), NURSE)
    s.vitals(hourly(185, last), NURSE)
    sex = d.one_of("female", "male")
    person = Person(
        sex, round(d.about(163 if sex == "female" else 176, 6, 150, 190)), "neuromuscular", True, "nocturnal BPAP",
        (88, 92), "no intubation", "not for resuscitation", None,
    )  # fmt: skip
    s.event(215, "skin_check", NURSE, "intact")
    s.event(430, "skin_check", NURSE, "intact")
    return make_case("already_running", seed, p, person, s)


def stable(seed: int, last: int) -> Case:
    """COPD long since answered: the mask stays on, nothing happens."""
    d = Dice("stable", seed, "case")
    p = altered(
        copd_patient(d), paco2=d.about(62, 3, 57, 68), ph=d.about(7.325, 0.008, 7.31, 7.34),
        rr=d.about(24, 1.5, 21, 27),
        unload=0.45, course_h=6.0, spo2=d.about(89.5, 0.8, 88, 91),
    )  # fmt: skip
    s = opened(last, NURSE, before={"fio2": 0.28}, start=bilevel(16, 5, 0.26), fit_leak=d.between(7, 12))
    s.hidden(0, severity_end=0.5)
    s.gas(d.minute(65, 5), NURSE)
    s.gas(d.minute(290, 10), NURSE)
    s.event(180, "checked_no_change", THERAPIST)
    # A drink that nobody wrote down: the mask lies beside the patient, the blower runs.
    s.hidden(205, fit_leak=900)
    s.hidden(214, fit_leak=d.between(7, 12))
    s.event(360, "checked_no_change", THERAPIST)
    s.vitals([15, 60], NURSE)
    s.vitals(hourly(120, last), NURSE)
    s.event(236, "skin_check", NURSE, "intact")
    s.event(436, "skin_check", NURSE, "intact")
    return make_case("stable", seed, p, copd_person(d), s)
