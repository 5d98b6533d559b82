"""A gas typed in two lines is one gas where that is sure, and asked about where it is not."""

import pytest

from core.judgement.split_gas import moment_of_gas, rest_of_gas
from core.record.instant import SECOND
from core.record.log_line import read_line
from tests.support.log import NO_SETTINGS, episode, moment


def readings(typed):
    return read_line(typed, now=moment("03:00"), zone="UTC", in_force=NO_SETTINGS).readings


@pytest.mark.parametrize(
    ("log", "typed", "at", "joins"),
    [
        ("02:00 ph 7.25", "paco2 60", "02:00", True),
        ("02:00 ph 7.25", "paco2 60 pao2 58 site arterial", "02:00", True),
        ("02:00 ph 7.25", "ph 7.26", "02:00", False),  # another pH: not the same gas, or a mistake
        ("02:00 ph 7.25 paco2 60", "ph 7.26 pao2 58", "02:00", False),
        ("02:00 ph 7.25", "rr 30", "02:00", False),
        ("02:00 ph 7.25", "paco2 60", "02:01", False),
        ("02:00 rr 30", "paco2 60", "02:00", False),
    ],
)
def test_the_rest_of_a_gas_of_the_same_minute_joins_it(log, typed, at, joins):
    late = moment(at) + 40 * SECOND
    expected = moment("02:00") if joins else late
    assert moment_of_gas(readings(typed), late, episode(log)) == expected


@pytest.mark.parametrize(
    ("log", "typed", "at", "asks"),
    [
        ("02:00 ph 7.25", "paco2 60", "02:01", "02:00"),
        ("02:00 ph 7.25", "paco2 60", "02:10", "02:00"),
        ("02:00 ph 7.25", "paco2 60", "02:11", None),
        ("02:00 ph 7.25", "paco2 60", "01:55", "02:00"),
        ("02:00 paco2 60", "ph 7.25", "02:02", "02:00"),
        ("02:00 ph 7.25 paco2 60", "paco2 61", "02:02", None),
        ("02:00 ph 7.25", "ph 7.24 paco2 61", "02:02", None),
        ("02:00 ph 7.25", "lactate 2", "02:02", None),
        ("02:00 ph 7.25", "paco2 60", "02:00", None),  # of the same minute: it joins it
        ("01:56 ph 7.25\n02:01 ph 7.27", "paco2 60", "02:02", "02:01"),
        ("", "paco2 60", "02:02", None),
    ],
)
def test_a_half_near_the_other_half_is_asked_about(log, typed, at, asks):
    asked = rest_of_gas(readings(typed), moment(at), episode(log))
    assert [m.values["at"] for m in asked] == ([] if asks is None else [moment(asks)])
