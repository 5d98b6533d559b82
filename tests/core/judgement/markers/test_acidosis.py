"""Absolute limits of pH at their edges: on whom, on which sample, from when until when.

Sources: Confalonieri, ERJ 2005;25:348 (below 7.25); ERJ table of trial criteria after Plant 2000 (below 7.20,
7.20-7.25 twice an hour apart); BTS/ICS 2016 (below 7.15, from memory).
"""

import pytest

from tests.support.flag_cases import BEFORE, COPD, START, met, told


@pytest.mark.parametrize(
    ("gas", "expected"),
    [
        ("02:00 ph 7.25 paco2 70", ""),
        ("02:00 ph 7.249 paco2 70", "02:00-"),
        ("02:00 ph 7.24 paco2 70 site capillary", "02:00-"),
        ("02:00 ph 7.24 paco2 70 site venous", ""),
        ("02:00 paco2 70", ""),
        ("01:10 ph 7.24 paco2 70", "01:10-"),  # early
        ("02:00 mask_off\n02:10 ph 7.20 paco2 70", "02:10-"),  # off support
        ("00:40 ph 7.20 paco2 70\n03:00 ph 7.25 paco2 70", "00:40-03:00"),  # before support; ends
        ("02:00 ph 7.20 paco2 70\n03:00 paco2 60", "02:00-"),  # a gas without pH ends nothing
        ("02:00 ph 7.20 paco2 70\n03:00 ph 7.30 paco2 60 site venous", "02:00-"),  # nor does a venous one
    ],
)
def test_ph_below_725_on_any_arterial_or_capillary_gas(gas, expected):
    assert met("ph_below_severe", COPD + BEFORE + START + gas) == expected


def test_the_value_as_reported_decides_and_its_doubts_are_shown():
    said = told("ph_below_severe", COPD + START + "02:00 ph 7.244 paco2 70 hco3 40")
    assert said["evidence.value"].values["text"] == "7.244"
    assert said["evidence.gas_doubt"].values["doubt"] == "site assumed"


@pytest.mark.parametrize(
    ("marker", "log", "expected"),
    [
        ("ph_below_715", "02:00 ph 7.15 paco2 70", ""),
        ("ph_below_715", "02:00 ph 7.149 paco2 70", "02:00-"),
        ("ph_below_715", "00:40 ph 7.10 paco2 70", ""),  # before support: a contraindication instead
        ("ph_below_715", "02:00 mask_off\n02:20 ph 7.10 paco2 70", "02:20-"),
        ("ph_below_715_before_support", "00:40 ph 7.149 paco2 70", "00:40-"),
        ("ph_below_715_before_support", "00:40 ph 7.15 paco2 70", ""),
        ("ph_below_715_before_support", "00:40 ph 7.10 paco2 70\n02:00 ph 7.10 paco2 70", "00:40-02:00"),
        ("ph_below_720_on_support", "02:00 ph 7.20 paco2 70", ""),
        ("ph_below_720_on_support", "02:00 ph 7.199 paco2 70", "02:00-"),
        ("ph_below_720_on_support", "00:40 ph 7.18 paco2 70", ""),
        ("ph_below_720_on_support", "02:00 mask_off\n02:20 ph 7.18 paco2 70", ""),  # off support
        ("ph_720_725_twice", "02:00 ph 7.22 paco2 70\n02:59 ph 7.22 paco2 70", ""),
        ("ph_720_725_twice", "02:00 ph 7.22 paco2 70\n03:00 ph 7.25 paco2 70", "03:00-"),
        ("ph_720_725_twice", "02:00 ph 7.22 paco2 70\n03:00 ph 7.251 paco2 70", ""),
        ("ph_720_725_twice", "02:00 ph 7.22 paco2 70\n02:30 ph 7.28 paco2 60\n03:00 ph 7.22 paco2 70", ""),
        ("ph_720_725_twice", "00:20 ph 7.22 paco2 70\n02:00 ph 7.22 paco2 70", ""),  # the first before support
        ("acidosis_off_support", "02:00 mask_off\n02:20 ph 7.34 paco2 60", "02:20-"),
        ("acidosis_off_support", "02:00 mask_off\n02:20 ph 7.35 paco2 60", ""),
        ("acidosis_off_support", "02:00 ph 7.30 paco2 60", ""),  # on support
        ("acidosis_off_support", "02:00 mask_off\n02:20 ph 7.30 paco2 60\n02:30 mask_on\n04:00 ph 7.30 paco2 60",
         "02:20-04:00"),
        ("venous_ph_below_severe", "02:00 ph 7.24 paco2 70 site venous", "02:00-"),
        ("venous_ph_below_severe", "02:00 ph 7.25 paco2 70 site venous", ""),
        ("venous_ph_below_severe", "02:00 ph 7.24 paco2 70 site venous\n02:10 ph 7.26 paco2 66", "02:00-02:10"),
    ],
)  # fmt: skip
def test_limits_of_ph_by_where_the_patient_was(marker, log, expected):
    assert met(marker, COPD + START + log) == expected


def test_support_that_ends_ends_the_flag():
    log = COPD + START + "02:00 ph 7.18 paco2 70\n03:00 intubated"
    assert met("ph_below_720_on_support", log) == "02:00-03:00"
