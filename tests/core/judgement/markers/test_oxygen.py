"""Oxygenation at its edges.

Sources: BTS 2017, Thorax 72 S1 (ranges); Antonelli, ICM 2001;27:1718 (P/F at most 146 after 1 h); Thille, Crit
Care 2013;17:R269 (150 in moderate ARDS); Spada, J Crit Care 2011 (S/F below 98.5 at the start); ERJ table of trial
criteria (PaO2 below 6 kPa). Minutes and counts of readings are common practice, no source.
"""

import pytest

from app.words import Reader, sentence
from core.judgement.flags import evaluate
from tests.support.flag_cases import BEFORE, COPD, LUNG, START, ctx, met, spells, told, with_rule

LUNG_START = START.replace("fio2 30", "fio2 50")
LUNG_BEFORE = "00:30 ph 7.45 paco2 34 pao2 60 site arterial gas_fio2 0.4 rr 34 gcs 15\n"


@pytest.mark.parametrize(
    ("log", "expected"),
    [
        ("device spo2 02:00 02:15 87 87", "02:00-"),  # 15 minutes out
        ("device spo2 02:00 02:14 87 87", ""),
        ("device spo2 02:00 03:00 88 88", ""),  # the edge is inside the range
        ("device spo2 02:00 03:00 87 87\ndevice spo2 03:00 04:00 90 90", "02:00-03:00"),
        ("02:00 spo2 85", ""),  # one reading: a recheck is due instead
        ("02:00 spo2 85\n02:20 spo2 86", "02:20-"),
        ("02:00 spo2 85\n02:10 spo2 90\n02:20 spo2 86", ""),
        ("02:00 spo2 85\n02:20 spo2 86\n03:00 spo2 89", "02:20-03:00"),
        ("device spo2 01:50 02:30 90 90\n02:00 spo2 85\n02:10 spo2 85", ""),  # the machine says otherwise
    ],
)
def test_spo2_below_its_range(log, expected):
    assert met("spo2_below_range", COPD + START + log) == expected


@pytest.mark.parametrize(
    ("log", "expected"),
    [
        ("device spo2 02:00 02:02 83 83", "02:00-"),  # 5 below 88 for 2 min
        ("device spo2 02:00 02:01 83 83", ""),
        ("device spo2 02:00 03:00 84 84", ""),  # 4 below
        ("02:00 spo2 80\n02:05 spo2 82", "02:05-"),
    ],
)
def test_spo2_deep_below_its_range(log, expected):
    assert met("spo2_deep", COPD + START + log) == expected


@pytest.mark.parametrize(
    ("base", "log", "marker", "expected"),
    [
        (COPD + START, "device spo2 02:00 02:20 93 93", "over_oxygenation", "02:00-"),
        (COPD + START, "device spo2 02:00 02:20 92 92", "over_oxygenation", ""),
        (COPD + START, "device spo2 02:00 02:20 93 93", "spo2_above_range", ""),  # its own marker at risk
        (COPD + START + "01:10 fio2 21%\n", "device spo2 02:00 02:20 96 96", "over_oxygenation", ""),  # on air
        (COPD + START + "01:10 o2_flow 2\n", "device spo2 02:00 02:20 93 93", "over_oxygenation", "02:00-"),
        (LUNG + START, "device spo2 02:00 02:20 99 99", "spo2_above_range", "02:00-"),
        (LUNG + START, "device spo2 02:00 02:20 99 99", "over_oxygenation", ""),
        (COPD + START, "device spo2 02:00 02:20 97 97", "over_oxygenation_far", "02:00-"),  # 5 above 92
        (COPD + START, "device spo2 02:00 02:20 96 96", "over_oxygenation_far", ""),
        (COPD + START, "device spo2 02:00 02:14 97 97", "over_oxygenation_far", ""),
        (COPD + START, "02:00 spo2 98\n02:20 spo2 97", "over_oxygenation_far", "02:20-"),
        (COPD + START + "01:10 fio2 21%\n", "device spo2 02:00 02:20 98 98", "over_oxygenation_far", ""),
        (LUNG + START, "device spo2 02:00 02:20 99 99", "over_oxygenation_far", ""),
        (LUNG + START, "device spo2 02:00 02:20 98 98", "spo2_above_range", ""),
    ],
)
def test_spo2_above_its_range_only_while_oxygen_is_given(base, log, marker, expected):
    assert met(marker, base + log) == expected


def test_the_range_is_the_one_in_force_then():
    log = LUNG + START + "device spo2 02:00 04:00 91 91\n02:40 target_spo2_low 88 target_spo2_high 92"
    assert met("spo2_below_range", log).startswith("02:00-02:4")


def test_risk_shown_by_a_gas_counts_from_that_gas_on():
    log = "00:20 ceiling_of_care full\n" + START + "device spo2 01:30 02:30 95 95\n02:00 ph 7.30 paco2 60\n"
    assert met("over_oxygenation", log + "device spo2 02:30 03:00 95 95") == "02:00-"


def test_flicker_around_the_edge_stays_one_flag():
    log = COPD + START + "device spo2 02:00 02:30 86 86\ndevice spo2 02:30 02:40 89 89\n"
    log += "device spo2 02:40 03:20 86 86\n"
    assert met("spo2_below_range", log, "03:20") == "02:00-"
    recovered = log + "device spo2 03:20 04:20 90 90"
    assert met("spo2_below_range", recovered, "03:30") == "02:00-"  # not yet for as long as the gap
    assert met("spo2_below_range", recovered, "04:20") == "02:00-03:20"


@pytest.mark.parametrize(
    ("gas", "marker", "expected"),
    [
        ("pao2 60 site arterial", "pao2_below_60", ""),
        ("pao2 59 site arterial", "pao2_below_60", "02:00-"),
        ("pao2 8.0kPa site arterial", "pao2_below_60", ""),
        ("pao2 7.9kPa site arterial", "pao2_below_60", "02:00-"),
        ("pao2 50 site capillary", "pao2_below_60", ""),
        ("pao2 50 site venous", "pao2_below_60", ""),
        ("pao2 45 site arterial", "pao2_below_45", ""),
        ("pao2 44 site arterial", "pao2_below_45", "02:00-"),
        ("pao2 44 site arterial", "pao2_below_45_on_highest_oxygen", ""),  # FiO2 0.50
        ("pao2 44 site arterial gas_fio2 0.8", "pao2_below_45_on_highest_oxygen", "02:00-"),
        ("pao2 44 site arterial gas_fio2 0.79", "pao2_below_45_on_highest_oxygen", ""),
        ("pao2 46 site arterial gas_fio2 1.0", "pao2_below_45_on_highest_oxygen", ""),
    ],
)
def test_pao2_at_its_edges(gas, marker, expected):
    assert met(marker, LUNG + LUNG_START + f"02:00 ph 7.40 {gas}") == expected


def test_a_high_flow_counts_as_the_highest_oxygen_and_an_unknown_one_does_not():
    flow = LUNG + LUNG_START + "01:30 o2_flow {}\n02:00 ph 7.40 pao2 44 site arterial"
    assert met("pao2_below_45_on_highest_oxygen", flow.format(15)) == "02:00-"
    assert met("pao2_below_45_on_highest_oxygen", flow.format(14)) == ""
    unknown = LUNG + START.replace(" fio2 30", "") + "02:00 ph 7.40 pao2 44 site arterial"
    assert met("pao2_below_45_on_highest_oxygen", unknown) == ""
    assert told("pao2_below_45", unknown)["evidence.unknown"].values["quantity"] == "fio2"


@pytest.mark.parametrize(
    ("log", "expected"),
    [
        ("02:00 ph 7.45 paco2 34 pao2 73 site arterial", "02:00-"),  # P/F 146
        ("02:00 ph 7.45 paco2 34 pao2 73.5 site arterial", ""),  # 147
        ("01:45 ph 7.45 paco2 34 pao2 70 site arterial", "01:45-"),
        ("01:44 ph 7.45 paco2 34 pao2 70 site arterial", ""),
        ("02:30 ph 7.45 paco2 34 pao2 70 site arterial", "02:30-"),
        ("02:31 ph 7.45 paco2 34 pao2 70 site arterial", ""),
        ("02:00 ph 7.45 paco2 34 pao2 70 site capillary", ""),
        ("02:00 ph 7.30 paco2 60 pao2 70 site arterial", ""),  # acutely hypercapnic: another population
        ("01:30 o2_flow 10\n02:00 ph 7.45 paco2 34 pao2 70 site arterial", ""),  # FiO2 not known
        ("01:45 ph 7.45 paco2 34 pao2 70 site arterial\n02:02 ph 7.45 paco2 34 pao2 90 site arterial", "01:45-02:02"),
        ("01:58 ph 7.45 paco2 34 pao2 90 site arterial\n02:20 ph 7.45 paco2 34 pao2 70 site arterial", ""),
        ("01:58 ph 7.45 paco2 34 pao2 70 site arterial\n02:20 ph 7.45 paco2 34 pao2 72 site arterial", "01:58-"),
        ("02:00 ph 7.45 paco2 34 pao2 70 site arterial\n05:00 ph 7.45 paco2 34 pao2 80 site arterial", "02:00-05:00"),
    ],
)
def test_pf_at_one_hour_in_hypoxaemic_failure(log, expected):
    assert met("pf_low_at_1h", LUNG + LUNG_BEFORE + LUNG_START + log) == expected


def test_pf_at_one_hour_is_silent_in_hypercapnic_disease_unless_the_ward_wants_a_remark():
    log = COPD + LUNG_BEFORE + LUNG_START + "02:00 ph 7.45 paco2 34 pao2 70 site arterial"
    assert met("pf_low_at_1h", log) == ""


def test_pf_at_or_below_150_in_moderate_ards():
    gas = "02:00 ph 7.45 paco2 34 pao2 {} site arterial"
    ards = LUNG.replace("pneumonia", "ards") + LUNG_START
    assert met("pf_below_150_ards", ards + gas.format(74)) == "02:00-"
    assert met("pf_below_150_ards", ards + gas.format(75)) == "02:00-"  # Thille parts those above 150 from the rest
    assert met("pf_below_150_ards", ards + gas.format(75.1)) == ""
    assert met("pf_below_150_ards", LUNG + LUNG_START + gas.format(74)) == ""
    said = LUNG + "00:21 pulmonary_ards yes\n" + LUNG_START
    assert met("pf_below_150_ards", said + gas.format(74)) == "02:00-"


@pytest.mark.parametrize(
    ("log", "expected"),
    [
        ("device spo2 01:20 01:25 88 88", "01:21-01:25"),  # S/F 97.8 (FiO2 0.90), two samples in a row
        ("device spo2 01:20 01:25 89 89", ""),  # 98.9
        ("device spo2 01:05 01:14 88 88", ""),  # FiO2 steady for less than 15 min
        ("01:10 fio2 95%\ndevice spo2 01:20 01:24 88 88", ""),
        ("device spo2 03:01 03:10 88 88", ""),  # more than 2 h after the start
    ],
)
def test_sf_at_the_start(log, expected):
    start = START.replace("fio2 30", "fio2 90")
    base = LUNG + LUNG_BEFORE + start
    found = met("sf_below_985", base + log, "03:30")
    assert found.partition("-")[0] == expected.partition("-")[0]


def test_sf_above_97_says_nothing_and_other_populations_are_silent():
    start = START.replace("fio2 30", "fio2 100")
    assert met("sf_below_985", LUNG + LUNG_BEFORE + start + "device spo2 01:20 01:40 98 98") == ""
    low = "device spo2 01:20 01:40 90 90"
    assert met("sf_below_985", LUNG + LUNG_BEFORE + start + low) != ""
    assert met("sf_below_985", COPD + BEFORE + start + low) == ""


@pytest.mark.parametrize(
    ("log", "expected"),
    [
        ("03:00 fio2 40%", "03:15-"),  # 0.30 to 0.40, SpO2 held
        ("03:00 fio2 39%", ""),
        ("02:00 fio2 35%\n03:00 fio2 40%", "03:15-"),
        ("03:00 fio2 40%\n04:00 fio2 35%", "03:15-04:15"),
        ("07:00 fio2 35%\n12:00 fio2 41%", ""),  # 0.06 in four hours
    ],
)
def test_fio2_need_rising_with_spo2_held(log, expected):
    spo2 = "device spo2 01:00 10:00 94 94\n"
    assert met("fio2_need_rising", LUNG + START + spo2 + log, "06:00" if "12:00" not in log else "13:00") == expected


def test_fio2_that_raised_spo2_is_no_rising_need():
    log = LUNG + START + "device spo2 01:00 03:00 88 88\ndevice spo2 03:00 06:00 95 95\n03:00 fio2 40%"
    assert met("fio2_need_rising", log, "05:00") == ""
    unknown = LUNG + START + "03:00 fio2 40%"
    assert met("fio2_need_rising", unknown, "05:00") == ""


def test_a_ward_can_ask_for_a_remark_outside_the_population():
    gas = "01:30 ph 7.42 paco2 36 pao2 90 site arterial\n"
    log = COPD + LUNG_BEFORE + LUNG_START + gas + "device vte 02:00 04:00 900 900"
    log = log.replace("indication", "sex male height 175 indication")
    rule = with_rule("vt_high_hypoxaemic", outside="remark")
    assert met("vt_high_hypoxaemic", log, "02:40") == ""
    assert met("vt_high_hypoxaemic", log, "02:40", rule) == "02:30-"
    (flag,) = [f for f in evaluate(ctx(log, "02:40", rule)) if f.marker == "vt_high_hypoxaemic"]
    assert (flag.tier, flag.outside_population) == ("remark", True)
    assert flag.evidence[-1].values["population"] == "hypoxaemic, not hypercapnic"


@pytest.mark.parametrize(
    ("marker", "readings", "said"),
    [
        ("over_oxygenation_far", "02:00 spo2 98\n02:20 spo2 97", "SpO2 97 % at 27-Mar-2026 02:20, at or above 97 %."),
        ("over_oxygenation", "02:00 spo2 94\n02:20 spo2 93", "SpO2 93 % at 27-Mar-2026 02:20, above 92 %."),
        ("spo2_deep", "02:00 spo2 82\n02:20 spo2 83", "SpO2 83 % at 27-Mar-2026 02:20, at or below 83 %."),
        ("spo2_below_range", "02:00 spo2 86\n02:20 spo2 87", "SpO2 87 % at 27-Mar-2026 02:20, below 88 %."),
        ("over_oxygenation_far", "device spo2 02:00 02:20 97 97", "SpO2 at or above 97 % for 20 min in all"),
    ],
)
def test_the_evidence_says_whether_its_limit_itself_counts(marker, readings, said):
    (spell,) = spells(marker, COPD + START + readings)
    assert sentence(spell.evidence[-1], Reader()).startswith(said)


def test_evidence_names_the_range_that_was_in_force_then():
    log = LUNG.replace(" target_spo2_low 94 target_spo2_high 98", "") + START
    log += "02:00 spo2 92\n02:20 spo2 91\n"
    (before,) = spells("spo2_below_range", log)
    assert not any(m.key == "evidence.range_then" for m in before.evidence), "nothing changed"
    (spell,) = spells("spo2_below_range", log + "03:00 ph 7.30 paco2 58\n03:30 spo2 91")
    said = next(m for m in spell.evidence if m.key == "evidence.range_then")
    assert sentence(said, Reader()) == (
        "The range was 94 to 98 % then; since 27-Mar-2026 03:00 it is 88 to 92 %, by a gas that showed hypercapnia, "
        "none prescribed."
    )
    ordered = spells("spo2_below_range", log + "03:00 target_spo2_low 88 target_spo2_high 92\n03:30 spo2 91")[0]
    assert ordered.evidence[-1].values["by"] == "prescribed"
