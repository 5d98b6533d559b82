"""Pressure, lactate, arrest, a fall after a raised pressure; contraindications that appear; readiness to wean.

Sources: common trial criteria (systolic below 90: secondary); BTS/ICS 2016 (contraindications: partly from memory);
Sellares, ERJ 2017;50:1601448 (readiness, from memory). Lactate limits and falls after a raised pressure are common
practice, no source.
"""

import pytest

from core.figures.episode_figures import judged
from core.judgement.flags import evaluate
from core.judgement.policy import shipped_policy
from core.record.entries import NewEntry, recorded
from tests.support.flag_cases import COPD, LUNG, START, flags, met, told
from tests.support.log_cases import at, build, entries

BASE = COPD + START


@pytest.mark.parametrize(
    ("marker", "log", "expected"),
    [
        ("sbp_below_90", "02:00 sbp 90", ""),
        ("sbp_below_90", "02:00 sbp 89\n03:00 sbp 92\n04:00 sbp 95", "02:00-04:00"),  # hysteresis
        ("lactate_above_2", "02:00 ph 7.30 lactate 2.0", ""),
        ("lactate_above_2", "02:00 ph 7.30 lactate 2.1", "02:00-"),
        ("lactate_above_2", "02:00 ph 7.30 lactate 2.1 site venous", "02:00-"),
        ("lactate_above_4", "02:00 ph 7.30 lactate 4.0", ""),
        ("lactate_above_4", "02:00 ph 7.30 lactate 4.1\n04:00 ph 7.30 lactate 3", "02:00-04:00"),
        ("lactate_rising", "02:00 lactate 1.8\n04:00 lactate 2.3", "04:00-"),
        ("lactate_rising", "02:00 lactate 1.9\n04:00 lactate 2.3", ""),
        ("lactate_rising", "02:00 lactate 1.0\n04:00 lactate 2.0", ""),
        ("vomiting", "02:00 vomiting", "02:00-06:00"),
        ("vomiting", "00:50 vomiting", ""),  # before support
        ("agitation", "02:00 agitation\n05:00 agitation", "02:00-09:00"),
        ("apnoea", "02:00 apnoea", "02:00-03:00"),
        ("undrained_pneumothorax", "02:00 pneumothorax yes\n04:00 pneumothorax no", "02:00-04:00"),
        ("undrained_pneumothorax", "02:00 pneumothorax 'not known'", ""),
    ],
)
def test_circulation_and_contraindications_at_their_edges(marker, log, expected):
    assert met(marker, BASE + log) == expected


def test_lactate_after_a_nebuliser_says_so():
    def said(text, clock):
        made = entries(BASE + "02:00 ph 7.30 lactate 3")
        drug = NewEntry("E", "drug", at(clock), words=text)
        record = build([*made, recorded(drug, len(made) + 1, "drug", at(clock))])
        found = [f for f in evaluate(judged(record, at("03:00"), shipped_policy())) if f.marker == "lactate_above_2"]
        return {m.key for m in found[0].evidence}

    key = "evidence.after_beta_agonist"
    assert key in said("nebuliser: salbutamol 5 mg", "01:30")
    assert key in said("nebuliser", "01:30")  # may have held one
    assert key not in said("nebuliser: ipratropium", "01:30")
    assert key not in said("morphine 2 mg", "01:30")
    assert key not in said("salbutamol", "02:01")  # after the sample
    assert told("lactate_above_2", BASE + "02:00 ph 7.30 lactate 3").keys() == {"evidence.value"}


def test_an_arrest_ends_support_and_outlives_it():
    (flag,) = [f for f in flags(BASE + "02:00 arrest", "03:00") if f.marker == "arrest"]
    assert (flag.tier, flag.ended_at) == ("escalate", None)
    assert [m.key for m in flag.evidence] == ["evidence.event", "evidence.support_ends"]
    assert met("arrest", BASE + "02:00 arrest\n02:30 mask_on") == "02:00-02:30"


RAISED = "03:00 ipap 24\n"


@pytest.mark.parametrize(
    ("log", "expected"),
    [
        (RAISED + "device spo2 02:00 03:20 92 92\ndevice spo2 03:20 03:40 86 86", "03:20-"),
        (RAISED + "device spo2 02:00 03:20 91 91\ndevice spo2 03:20 03:40 87 87", ""),  # 4 points: inside noise
        (RAISED + "device spo2 02:00 03:20 96 96\ndevice spo2 03:20 03:40 90 90", ""),  # still in range
        (RAISED + "device spo2 02:00 04:01 92 92\ndevice spo2 04:01 04:30 86 86", ""),  # more than an hour later
        (RAISED.replace("24", "18") + "device spo2 02:00 03:20 92 92\ndevice spo2 03:20 03:40 86 86", ""),
        (RAISED + "device spo2 02:00 03:20 92 92\n03:20 mask_off\ndevice spo2 03:20 03:40 80 80", ""),
    ],
)
def test_a_sudden_fall_of_spo2_after_a_raised_pressure(log, expected):
    assert met("spo2_fall_after_pressure", BASE + log, "03:40" if "04:01" not in log else "04:30") == expected


@pytest.mark.parametrize(
    ("log", "expected"),
    [
        ("02:50 sbp 130\n03:30 sbp 100", "03:30-"),
        ("02:50 sbp 130\n03:30 sbp 101", ""),
        ("02:50 sbp 130\n04:01 sbp 90", ""),
        ("02:50 sbp 130\n03:30 sbp 95\n04:30 sbp 120", "03:30-04:30"),
        ("03:30 sbp 95", ""),  # nothing known before
    ],
)
def test_a_fall_of_blood_pressure_after_a_raised_pressure(log, expected):
    assert met("sbp_fall_after_pressure", BASE + RAISED + log) == expected


WEANED = "12:00 ph 7.38 paco2 50 rr 20 spo2 90\n"


@pytest.mark.parametrize(
    ("log", "expected"),
    [
        (WEANED + "d1 02:00 ph 7.38 paco2 50 rr 20 spo2 90", "d1 02:00-"),
        (WEANED + "d1 00:30 ph 7.38 paco2 50 rr 20 spo2 90", ""),  # not yet a day
        ("d1 02:00 ph 7.38 paco2 50 rr 20 spo2 90", ""),  # one gas
        (WEANED + "d1 02:00 ph 7.38 paco2 50 rr 25 spo2 90", ""),
        (WEANED + "d1 02:00 ph 7.38 paco2 50 rr 20 spo2 87", ""),
        (WEANED + "d1 02:00 ph 7.38 paco2 50 spo2 90", ""),  # rate not known
        (WEANED + "d1 01:30 fio2 45%\nd1 02:00 ph 7.38 paco2 50 rr 20 spo2 90", ""),
    ],
)
def test_readiness_to_wean_is_a_remark(log, expected):
    assert met("weaning_ready", BASE + log, "d1 12:00") == expected


def test_a_ceiling_changes_the_words_and_not_the_evidence():
    gas = "02:00 ph 7.18 paco2 80"
    plain = [f for f in flags(LUNG + START + gas) if f.marker == "ph_below_720_on_support"]
    limited = [f for f in flags(LUNG.replace("care full", "care 'no intubation'") + START + gas)
               if f.marker == "ph_below_720_on_support"]  # fmt: skip
    assert (plain[0].tier, plain[0].evidence) == (limited[0].tier, limited[0].evidence[:-1])
    assert limited[0].evidence[-1].values == {"ceiling": "no intubation"}
