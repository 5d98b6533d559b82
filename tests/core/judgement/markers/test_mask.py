"""Leak, a tidal volume not to be trusted, intolerance. All common practice, no source (10 of 12 minutes, 30 and 60
L/min, a quarter of the hour); the port's own leak: computed from a bench range (Borel, Chest 2009;135:669)."""

import pytest

from tests.support.flag_cases import BEFORE, COPD, START, due, met

BASE = COPD + START
DEFINED = BASE + "01:00 leak_definition unintentional\n"
TOTAL = BASE + "01:00 leak_definition total ti 1.0\ndevice rr_total 01:00 06:00 20 20\n"


@pytest.mark.parametrize(
    ("log", "expected"),
    [
        (DEFINED + "device leak 02:00 02:10 31 31", "02:00-"),
        (DEFINED + "device leak 02:00 02:09 31 31", ""),
        (DEFINED + "device leak 02:00 02:30 30 30", ""),
        (BASE + "device leak 02:00 03:00 90 90", ""),  # definition not known: a trend only
        (DEFINED + "device leak 02:00 02:20 45 45\ndevice leak 02:20 03:00 10 10", "02:00-02:20"),
        (DEFINED + "02:00 mask_off\ndevice leak 02:00 02:30 90 90", ""),
        (DEFINED + "device leak 02:00 02:30 120 120", ""),  # at the device's ceiling: a probable break
        # total leak: 30 + 8.02 x sqrt(5 + 15 x 20/60 s) = 30 + 8.02 x sqrt(10) = 55.4
        (TOTAL + "device leak 02:00 02:30 55 55", ""),
        (TOTAL + "device leak 02:00 02:30 56 56", "02:00-"),
    ],
)
def test_leak_over_its_limit(log, expected):
    assert met("leak_over_limit", log, "06:00") == expected


def test_leak_to_act_on_and_the_check_of_the_mask():
    log = DEFINED + "device leak 02:00 03:00 61 61"
    assert met("leak_large", log, "03:00") == "02:00-"
    assert met("leak_large", DEFINED + "device leak 02:00 03:00 60 60", "03:00") == ""
    (item,) = due(log, "02:14", "mask_check")
    assert (item.state, item.because.values["marker"]) == ("soon", "leak_large")
    (item,) = due(log, "02:30", "mask_check")
    assert item.state == "overdue"
    (item,) = due(log + "\n02:20 mask_adjusted", "02:30", "mask_check")
    assert item.state == "done"


def test_leak_that_flickers_is_one_flag():
    log = DEFINED + "device leak 02:00 02:30 45 45\ndevice leak 02:30 02:42 10 10\ndevice leak 02:42 03:10 45 45"
    assert met("leak_over_limit", log, "03:10") == "02:00-"


def test_a_tidal_volume_that_leak_makes_doubtful():
    volume = "device vte 02:00 03:00 400 400\n"
    assert met("vt_not_trusted", DEFINED + volume + "device leak 02:00 03:00 31 31", "03:00") == "02:00-"
    assert met("vt_not_trusted", DEFINED + volume + "device leak 02:00 03:00 20 20", "03:00") == ""
    assert met("vt_not_trusted", BASE + volume + "device leak 02:00 03:00 90 90", "03:00") == ""
    half = "01:00 ti 1.2\n" + volume.replace("400", "300") + "device leak 02:00 03:00 16 16"
    assert met("vt_not_trusted", DEFINED + half, "03:00") == "02:00-"  # more than half of the volume leaks


@pytest.mark.parametrize(
    ("log", "expected"),
    [
        ("02:00 mask_off\n02:16 mask_on", "02:15-"),
        ("02:00 mask_off\n02:15 mask_on", ""),
        ("02:00 mask_off\n02:10 mask_on\n02:30 mask_off\n02:37 mask_on", "02:35-"),
    ],
)
def test_breaks_over_a_quarter_of_the_hour_while_acidotic(log, expected):
    assert met("intolerance", COPD + BEFORE + START + log, "02:40") == expected
    assert met("intolerance", COPD + BEFORE.replace("7.28", "7.36") + START + log, "02:40") == ""


def test_intolerance_ends_with_the_hour():
    log = COPD + BEFORE + START + "02:00 mask_off\n02:20 mask_on"
    assert met("intolerance", log, "05:00").startswith("02:15-03:0")


def test_not_tolerated():
    assert met("not_tolerated", BASE + "02:00 comfort 'not tolerated'\n03:00 comfort fair") == "02:00-03:00"
    assert met("not_tolerated", BASE + "02:00 comfort poor") == ""
