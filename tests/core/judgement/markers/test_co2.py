"""PaCO2 rising and tiring. Noise of PaCO2: Thorson, Chest 1983;84:14 (3.3 mmHg or 8 %); 45 mmHg is 6.0 kPa
(BTS, Thorax 2017;72:588). That a falling rate with a worse gas is tiring is common practice, no source."""

import pytest

from tests.support.flag_cases import BEFORE, COPD, LUNG, START, met, told

BASE = COPD + START
MARK = "paco2_rising"


@pytest.mark.parametrize(
    ("log", "expected"),
    [
        ("02:00 paco2 60\n04:00 paco2 64.8", ""),  # 8 % exactly is noise
        ("02:00 paco2 60\n04:00 paco2 64.9", "04:00-"),
        ("02:00 paco2 60\n08:01 paco2 70", ""),  # the earlier gas is more than 6 h old
        ("02:00 paco2 60\n08:00 paco2 70", "08:00-"),
        ("02:00 paco2 60\n03:00 paco2 63\n04:00 paco2 66", "04:00-"),  # a creep: against the lowest, not the last
        ("02:00 paco2 60\n04:00 paco2 70\n05:00 paco2 63", "04:00-05:00"),
        ("02:00 paco2 60 site venous\n04:00 paco2 70", ""),
        ("02:00 paco2 60\n04:00 mask_off\n04:10 paco2 70", ""),  # off support
        ("02:00 paco2 36\n04:00 paco2 45", ""),  # not above 45, rate not known
        ("02:00 paco2 36\n04:00 paco2 46", "04:00-"),
        ("02:00 paco2 36 rr 30\n04:00 paco2 42 rr 30", "04:00-"),  # rate not better
        ("02:00 paco2 36 rr 30\n04:00 paco2 42 rr 20", ""),  # rate better, value low
        ("02:00 paco2 36 rr 30\n04:00 paco2 42", ""),  # rate not known then
    ],
)
def test_paco2_rising_at_its_edges(log, expected):
    assert met(MARK, BASE + log) == expected


def test_the_usual_paco2_raises_the_limit():
    usual = COPD + "00:20 usual_paco2 60\n" + START + "02:00 paco2 50\n04:00 paco2 "
    assert met(MARK, usual + "58") == ""
    assert met(MARK, usual + "60") == ""
    assert met(MARK, usual + "61") == "04:00-"
    assert told(MARK, usual + "61")["evidence.above_usual"].values["usual"] == 60


def test_a_pf_that_is_not_better_counts_beside_a_low_value():
    base = LUNG + START.replace("fio2 30", "fio2 50")
    log = "02:00 ph 7.45 paco2 32 pao2 70 site arterial\n04:00 ph 7.40 paco2 38 pao2 {} site arterial"
    assert met(MARK, base + log.format(75)) == "04:00-"
    assert met(MARK, base + log.format(100)) == ""  # P/F up beyond noise


def test_the_unit_never_decides():
    mmhg = "02:00 paco2 36\n04:00 paco2 45"
    kpa = "02:00 paco2 4.8kPa\n04:00 paco2 6.0kPa"
    over = "02:00 paco2 4.8kPa\n04:00 paco2 6.1kPa"
    assert [met(MARK, BASE + log) for log in (mmhg, kpa, over)] == ["", "", "04:00-"]


@pytest.mark.parametrize(
    ("log", "expected"),
    [
        ("02:00 ph 7.32 paco2 60 rr 30\n04:00 ph 7.28 paco2 62 rr 23", "04:00-"),
        ("02:00 ph 7.32 paco2 60 rr 30\n04:00 ph 7.28 paco2 62 rr 24", ""),  # rate inside noise
        ("02:00 ph 7.32 paco2 60 rr 30\n04:00 ph 7.29 paco2 62 rr 20", ""),  # gas inside noise
        ("02:00 ph 7.32 paco2 60 rr 30\n04:00 ph 7.32 paco2 66 rr 20", "04:00-"),
        ("02:00 ph 7.32 paco2 60 rr 30\n04:00 ph 7.28 paco2 66", ""),  # rate not known
        ("02:00 ph 7.32 paco2 60 rr 30\n08:01 ph 7.28 paco2 66 rr 20", ""),  # too far apart
        ("02:00 ph 7.32 paco2 60 rr 30\n04:00 ph 7.28 paco2 66 rr 20\n05:00 ph 7.30 paco2 62 rr 20", "04:00-05:00"),
    ],
)
def test_a_falling_rate_with_a_worse_gas(log, expected):
    assert met("rate_falling_worse_gas", BASE + BEFORE.replace("rr 30 ", "") + log) == expected


@pytest.mark.parametrize(
    ("log", "expected"),
    [
        ("02:00 rr 30 gcs 15\n03:00 rr 23 gcs 14", "03:00-"),
        ("02:00 rr 30 gcs 15\n03:00 rr 24 gcs 14", ""),
        ("02:00 rr 30 gcs 15\n03:00 rr 20 gcs 15", ""),
        ("02:00 rr 30 gcs 15\n03:00 gcs 13", ""),  # rate not known
        ("02:00 rr 30 gcs 15\n08:01 rr 20 gcs 13", ""),
    ],
)
def test_a_falling_rate_with_a_lower_gcs(log, expected):
    assert met("rate_falling_worse_gcs", COPD + START + log) == expected
