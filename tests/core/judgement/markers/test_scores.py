"""HACOR and NEWS2 as markers. Duan, ICM 2017;43:192 (HACOR above 5 at 1 h; table from a secondary source); NEWS2: RCP
2017. A rise of 2 over the own low is common practice, no source."""

import numpy as np
import pytest

from core.judgement.markers.news2_course import news2_course
from core.judgement.markers.observed import Observed
from core.judgement.policy import read_policy, shipped_text
from core.judgement.scores import breathes_oxygen, news2
from tests.support.flag_cases import COPD, LUNG, START, ctx, due, met, told

BASE = (
    LUNG
    + "00:30 ph 7.42 paco2 36 pao2 60 site arterial gas_fio2 0.4 rr 34 gcs 15 hr 110\n"
    + START.replace("fio2 30", "fio2 50")
)
AT = "02:00 ph 7.42 paco2 36 pao2 {pao2} site arterial {seen}"


def gas(pao2=70, seen="rr 34 hr 110 gcs 15", clock="02:00"):
    return BASE + AT.format(pao2=pao2, seen=seen).replace("02:00", clock)


@pytest.mark.parametrize(
    ("log", "expected"),
    [
        (gas(70, "rr 34 hr 110 gcs 15"), ""),  # P/F 140: 4, rate 1: 5 points are not above 5
        (gas(70, "rr 36 hr 110 gcs 15"), "02:00-"),  # 6 points
        (gas(70, "rr 36 hr 110 gcs 15", "01:44"), ""),
        (gas(70, "rr 36 hr 110 gcs 15", "03:15"), "03:15-"),
        (gas(70, "rr 36 hr 110 gcs 15", "03:16"), ""),
        (gas(70, "rr 36 hr 110"), "02:00-"),  # GCS not taken since the start: 6 points are sure without it
        (gas(70, "rr 34 hr 110"), ""),  # 5 points and a GCS that could add: not sure
        (gas(70, "rr 36 hr 110 gcs 15") + "\n04:00 ph 7.42 paco2 36 pao2 90 site arterial rr 30 hr 90 gcs 15",
         "02:00-04:00"),
    ],
)  # fmt: skip
def test_hacor_above_5_at_one_to_two_hours(log, expected):
    assert met("hacor_above_5", log) == expected


def test_only_the_lowest_possible_points_raise_a_flag_and_the_rest_is_due():
    unsure = gas(70, "rr 34 hr 110")  # 5 points and a GCS that nobody took since the start
    assert met("hacor_above_5", unsure) == ""
    (item,) = due(unsure, "02:10", "complete_score")
    assert (item.state, item.because.values["missing"]) == ("open", "gcs")
    assert item.because.values["lowest"] == 5
    assert due(gas(70, "rr 34 hr 110 gcs 15"), "02:10", "complete_score") == []


def test_what_is_missing_beside_a_sure_flag_is_named():
    sure = gas(60, "rr 36 hr 110")  # P/F 120: 5, rate 2
    assert met("hacor_above_5", sure) == "02:00-"
    assert told("hacor_above_5", sure)["evidence.score"].values["missing"] == "gcs"


@pytest.mark.parametrize(
    "log",
    [
        gas(60, "rr 40 hr 130 gcs 15").replace("pneumonia", "copd"),
        gas(60, "rr 40 hr 130 gcs 15").replace("02:00 ph 7.42 paco2 36", "02:00 ph 7.30 paco2 60"),
        gas(60, "rr 40 hr 130 gcs 15").replace("BPAP-ST ipap 20 epap 5", "'high-flow nasal'"),
        gas(160, "rr 46 hr 130 gcs 12"),  # P/F 320: not hypoxaemic
    ],
)
def test_silent_outside_its_population(log):
    assert met("hacor_above_5", log) == met("hacor_8_or_more", log) == ""
    assert due(log, "02:10", "complete_score") == []


def test_bands_and_later_gases():
    assert met("hacor_8_or_more", gas(60, "rr 36 hr 125 gcs 15")) == "02:00-"  # 5 + 2 + 1
    assert met("hacor_8_or_more", gas(60, "rr 36 hr 110 gcs 15")) == ""  # 7
    later = gas(70, "rr 36 hr 110 gcs 15", "08:00")
    assert met("hacor_above_5", later) == ""
    assert met("hacor_above_5_later", later) == "08:00-"
    assert met("hacor_above_5_later", gas(70, "rr 36 hr 110 gcs 15")) == ""


def test_updated_hacor_is_silent_until_a_ward_switches_it_on():
    facts = "00:20 sofa 8 pneumonia yes pulmonary_ards yes immunosuppression no septic_shock no\n"
    log = facts + gas(60, "rr 36 hr 110 gcs 15")  # 7 + 4 + 2.5 + 3
    assert met("hacor_updated_above_10_5", log) == ""
    switched_on = read_policy(shipped_text().replace("hacor_updated = false", "hacor_updated = true"))
    assert met("hacor_updated_above_10_5", log, policy=switched_on) == "02:00-"
    assert met("hacor_updated_above_10_5", log.replace("sofa 8", "sofa 0").replace("ards yes", "ards no"),
               policy=switched_on) == ""  # fmt: skip
    assert met("hacor_updated_above_10_5", log.replace("sofa 8 ", ""), policy=switched_on) == "02:00-"  # 12.5 is sure
    assert met("hacor_updated_above_10_5", log.replace("sofa 8 pneumonia yes pulmonary_ards yes", "pneumonia yes"),
               policy=switched_on) == ""  # fmt: skip


SET = "{} rr {} spo2 {} hr 80 sbp 120 temp 37.0 acvpu alert\n"


@pytest.mark.parametrize(
    ("log", "expected"),
    [
        (SET.format("02:00", 20, 97) + SET.format("04:00", 22, 97), "04:00-"),  # 2 more for the rate
        (SET.format("02:00", 20, 97) + SET.format("04:00", 20, 95), ""),  # 1 more
        (SET.format("02:00", 20, 97) + SET.format("06:01", 22, 97), ""),  # the low is more than 4 h old
        (SET.format("02:00", 20, 91) + "04:00 rr 24 hr 80 sbp 120 temp 37.0", ""),  # SpO2 missing now: 0 to 3
        (SET.format("02:00", 20, 97) + "04:00 rr 25 hr 80 sbp 120 temp 37.0", "04:00-"),  # sure all the same
        ("02:00 rr 20 hr 80 sbp 120\n" + SET.format("04:00", 25, 97), ""),  # the low could have been higher
        (SET.format("02:00", 20, 97) + "04:00 rr 25", ""),  # one value is no set
    ],
)
def test_news2_rise(log, expected):
    assert met("news2_rise", LUNG + START + log) == expected


def test_the_course_of_news2_is_the_score_at_every_set():
    dice = np.random.default_rng(5)
    lines = [COPD, START, "01:30 spo2_scale 2\n"]
    given = []
    for i in range(40):
        clock = f"{2 + i // 4:02d}:{15 * (i % 4):02d}"
        rr, spo2, hr, sbp = (int(dice.integers(a, b)) for a, b in ((6, 40), (80, 100), (35, 140), (80, 230)))
        temp, word = round(float(dice.uniform(34, 40)), 1), ("alert", "voice")[int(dice.integers(2))]
        lines.append(f"{clock} rr {rr} spo2 {spo2} hr {hr} sbp {sbp} temp {temp} acvpu {word}\n")
        given.append((rr, spo2, hr, sbp, temp, word))
    course = news2_course(Observed(ctx("".join(lines), "d1 00:00")))
    oxygen = breathes_oxygen(0.30, None)
    for k, (rr, spo2, hr, sbp, temp, word) in enumerate(given):
        score = news2(rr=rr, spo2=spo2, hr=hr, sbp=sbp, temp=temp, acvpu=word, on_oxygen=oxygen, scale=2)
        assert course.low[k] == course.high[k] == score.points


def test_the_course_of_news2_reaches_across_no_change_as_the_score_does_not():
    log = COPD + START + "02:10 rr 24 spo2 90 hr 110 sbp 118 temp 37 acvpu confusion\n{}02:30 rr 24 spo2 90 hr 110\n"
    for change, missing in (("", 0), ("02:20 ipap 22\n", 3)):
        seen = Observed(ctx(log.format(change), "02:40"))
        course = news2_course(seen)
        score = seen.ctx.scores["news2"]
        assert int((~course.known[-1]).sum()) == len(score.missing) == missing  # sbp, temp and acvpu
        assert (course.low[-1], course.high[-1]) == (score.lowest, score.highest)


def test_the_course_of_news2_knows_no_oxygen_off_the_mask_as_the_score_does_not():
    log = COPD + START + "02:00 mask_off\n{}02:30 rr 20 spo2 90 hr 90 sbp 120 temp 37 acvpu alert\n"
    for given, span in (("", (3, 5)), ("02:10 o2_flow 2\n", (5, 5)), ("02:10 mask_on\n", (5, 5))):
        seen = Observed(ctx(log.format(given), "02:40"))
        course, score = news2_course(seen), seen.ctx.scores["news2"]
        assert (course.low[-1], course.high[-1]) == (score.lowest, score.highest) == span
