"""An episode's arrays: values by time, device samples beside typed ones, gases as samples, the cut at a moment."""

import numpy as np

from tests.support.log import device, episode, moment

NIGHT = """
01:00 label Bed 4
01:00 mode bpap-st ipap 14 epap 5 fio2 35
01:05 rr 28 spo2 91
02:00 ph 7.25 paco2 68 pao2 60 site arterial
02:00 hco3 29
03:00 ph 7.30
"""


def test_values_are_kept_by_channel_and_time():
    e = episode(NIGHT)
    assert e.label == "Bed 4"
    assert e.number("ipap").v.tolist() == [14.0]
    assert e.text("mode").at(moment("01:30")) == "BPAP-ST"
    assert e.text("mode").at(moment("00:30")) is None
    assert len(e.number("hr")) == 0


def test_gas_rows_of_one_moment_are_one_sample():
    first, second = episode(NIGHT).gases
    assert (first.ph, first.paco2, first.hco3, first.site, first.site_assumed) == (
        7.25,
        68.0,
        29.0,
        "arterial",
        False,
    )
    assert first.text("ph") == "7.25"
    assert (second.site, second.site_assumed) == ("arterial", True)
    assert np.isnan(second.paco2)


def test_nothing_later_is_left_after_the_cut():
    cut = episode(NIGHT).until(moment("02:00"))
    assert len(cut.gases) == 1
    assert all((s.t <= moment("02:00")).all() for s in cut.series.values())


def test_device_samples_stand_beside_typed_values_in_order_of_time():
    e = episode(NIGHT, samples=[device("spo2", "01:00", [90, 91, np.nan, 92, 93, 94, 95])])
    spo2 = e.number("spo2")
    assert (np.diff(spo2.t) >= 0).all()
    assert spo2.spots.v.tolist() == [91.0]
    assert len(spo2.machine) == 7


def test_device_values_outside_soft_limits_are_doubtful():
    e = episode("01:00 rr 20", samples=[device("leak", "01:00", [20, 130])])
    assert e.number("leak").doubt.tolist() == [False, True]


def test_between_takes_both_ends():
    spo2 = episode("01:00 rr 20\n01:10 rr 21\n01:20 rr 22").number("rr")
    assert spo2.between(moment("01:00"), moment("01:10")).v.tolist() == [20.0, 21.0]
    assert spo2.last_at_or_before(moment("01:09")) == 0
    assert spo2.last_at_or_before(moment("00:59")) == -1


def test_two_values_of_one_channel_for_one_moment_are_disputed_and_the_later_stands():
    (gas,) = episode("02:00 ph 7.30 paco2 60\n02:00 ph 7.10").gases
    assert (gas.ph, gas.disputed) == (7.10, True)
    assert gas.rivals == (("ph", "7.30"),)
    (same,) = episode("02:00 ph 7.30 paco2 60\n02:00 ph 7.30").gases
    assert not same.disputed
