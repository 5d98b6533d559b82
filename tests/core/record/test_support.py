"""When support ran: start, end, breaks and hours on the mask."""

import pytest

from core.record.instant import HOUR
from core.record.settings import SettingsInForce
from core.record.support import support_time
from tests.support.log import device, episode, moment


def found(log):
    e = episode(log)
    return support_time(e, SettingsInForce(e))


START = "00:50 rr 30\n01:00 mode bpap-st ipap 14 epap 5\n"


def test_the_start_is_the_first_support_logged_after_something_else():
    s = found(START)
    assert (s.start, s.start_recorded, s.end) == (moment("01:00"), True, None)


def test_support_that_ran_before_logging_has_no_recorded_start():
    s = found("01:00 mode bpap-st ipap 14 epap 5\n01:10 rr 22")
    assert not s.start_recorded


@pytest.mark.parametrize(
    ("before", "seen"),
    [
        ("00:55 rr 30", False),
        ("00:50 rr 30", True),
        ("00:50 acvpu alert", True),
        ("00:55 acvpu alert", False),
        ("00:59 ph 7.25 paco2 70", True),
        ("00:40 mask on", True),
    ],
)
def test_the_start_was_seen_when_what_came_before_it_says_so(before, seen):
    assert found(before + "\n01:00 mode bpap-st ipap 14 epap 5").start_recorded is seen


def test_a_ventilator_that_wrote_before_its_first_setting_ran_already():
    e = episode("00:30 rr 30\n01:00 mode bpap-st ipap 14 epap 5", samples=[device("leak", "00:59", [20, 20])])
    assert not support_time(e, SettingsInForce(e)).start_recorded


def test_a_stated_start_is_believed():
    s = found("01:00 mode bpap-st ipap 14 epap 5\n01:10 started at 2026-03-27T22:15:00+00:00")
    assert (s.start, s.start_recorded) == (moment("-22:15"), True)


def test_breaks_pair_and_hours_leave_them_out():
    s = found(START + "02:00 break start\n02:30 break end\n03:00 mask off\n03:20 mask on\n04:00 mask off")
    assert [(b.start, b.end) for b in s.breaks] == [
        (moment("02:00"), moment("02:30")), (moment("03:00"), moment("03:20")), (moment("04:00"), None)
    ]  # fmt: skip
    assert s.hours_on_mask(s.start, moment("05:00")) == pytest.approx(3 - 50 / 60)
    assert not s.on_support(moment("02:10"))
    assert s.on_support(moment("02:30"))


def test_off_while_off_changes_nothing():
    s = found(START + "02:00 break start\n02:05 mask off\n02:30 mask on\n02:40 break end")
    assert [(b.start, b.end) for b in s.breaks] == [(moment("02:00"), moment("02:30"))]


def test_a_mode_logged_in_a_break_is_a_plan_and_ends_no_break():
    s = found(START + "02:00 mask off\n02:10 mode bpap-s\n02:30 mask on")
    assert [(b.start, b.end) for b in s.breaks] == [(moment("02:00"), moment("02:30"))]


def test_switched_off_is_a_break_until_a_mode_comes_back():
    s = found(START + "02:00 mode off\n03:00 mode bpap-st")
    assert [(b.start, b.end) for b in s.breaks] == [(moment("02:00"), moment("03:00"))]


def test_a_stop_ends_it_and_a_restart_makes_it_a_break():
    stopped = START + "05:00 stopped"
    assert (found(stopped).end, found(stopped).ended_by) == (moment("05:00"), "stopped")
    again = found(stopped + "\n06:00 mode bpap-st ipap 14 epap 5")
    assert again.end is None


def test_hours_of_the_last_day_are_those_of_the_last_day():
    s = found("01:00 mode bpap-st ipap 14 epap 5\n01:10 started at 2026-03-26T01:00:00+00:00")
    assert s.hours_last_day(moment("05:00")) == pytest.approx(24.0)
    assert s.hours_on_mask(moment("05:00"), moment("05:00") - HOUR) == 0.0
