"""When support ran: start, end, breaks and hours on the mask."""

from dataclasses import fields, replace

import pytest

from core.record.entries import Action, NewEntry, recorded
from core.record.episode import build_episode
from core.record.instant import HOUR
from core.record.knowledge import standing
from core.record.log_line import read_line
from core.record.settings import NO_SETTINGS, SettingsInForce
from core.record.support import begins_unseen, support_time
from tests.support.log import device, entries, episode, moment


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


def test_switched_off_again_after_the_mask_went_on_is_off():
    s = found(START + "02:00 mode off\n02:30 mask on\n03:00 mode off\n03:20 mode bpap-st")
    assert [(b.start, b.end) for b in s.breaks] == [
        (moment("02:00"), moment("02:30")), (moment("03:00"), moment("03:20"))
    ]  # fmt: skip


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


@pytest.mark.parametrize(
    ("log", "off"),
    [
        ("02:00 mask off\n02:00 mask on", False),
        ("02:00 mask on\n02:00 mask off", True),
        ("02:00 mask off\n02:00 mask on\n02:00 mask off", True),
        ("02:00 break start\n02:00 break end", False),
        ("02:00 mode off\n02:00 mode bpap-st", False),
        ("02:00 mode bpap-st\n02:00 mode off", True),
        ("02:00 mode off\n02:00 mask on", False),
        ("02:00 mask on\n02:00 mode off", True),
        ("02:00 mask off mask on", False),
        ("02:00 mask on mask off", True),
        ("02:00 stopped\n02:00 mask on", False),
        ("02:00 mask on\n02:00 stopped", True),
    ],
)
def test_of_contrary_entries_of_one_instant_the_later_recorded_wins(log, off):
    s = found(START + log)
    assert s.on_support(moment("02:01")) is not off
    assert [b.start for b in s.off_times] == ([moment("02:00")] if off else [])


@pytest.mark.parametrize(
    ("log", "ended"),
    [
        ("02:00 stopped", True),
        ("02:00 stopped\n02:00 mask on", False),
        ("02:00 stopped\n02:00 ipap 16 epap 6", False),
        ("02:00 ipap 16 epap 6\n02:00 stopped", True),
        ("02:00 stopped\n02:00 mode off", True),
        ("02:00 mode off\n02:00 stopped", True),
        ("02:00 interface oronasal\n02:00 intubated", True),
    ],
)
def test_support_that_stopped_and_went_on_in_one_instant_goes_by_the_later(log, ended):
    assert (found(START + log).end is not None) is ended


def test_a_mask_that_was_on_for_no_time_parts_no_break():
    s = found(START + "02:00 mask off\n02:30 mask on\n02:30 mask off\n03:00 mask on")
    assert [(b.start, b.end) for b in s.breaks] == [(moment("02:00"), moment("03:00"))]


def test_a_corrected_value_keeps_its_place_and_a_corrected_time_is_a_new_one():
    log = entries(START + "02:00 ipap 16\n02:00 stopped\n02:20 mask on")
    ipap, mask = next(e for e in log if e.number == 16), log[-1]
    right = recorded(replace(_new(ipap), number=15.0), 90, "90", moment("03:00"))
    assert support_of([*log[:-1], right]).end == moment("02:00")  # the stop was recorded after that setting
    earlier = recorded(replace(_new(mask), at=moment("02:00")), 91, "91", moment("03:00"))
    assert support_of([*log, earlier]).end is None  # the last word on the mask


def _new(e):
    names = [f.name for f in fields(NewEntry)]
    return replace(NewEntry(**{n: getattr(e, n) for n in names}), action=Action.CORRECT, replaces=e.id)


def support_of(log):
    e = build_episode("E1", standing(log))
    return support_time(e, SettingsInForce(e))


def test_support_that_begins_on_a_line_is_seen_or_not():
    def unseen(log, line, at="02:00"):
        record = episode(log)
        read = read_line(line, now=moment(at), zone="UTC", in_force=NO_SETTINGS)
        return begins_unseen(record, moment(at), read.readings)

    assert unseen("01:55 label Bed_1", "bpap-st 16/5 28")
    assert unseen("01:55 label Bed_1", "hfnc fio2 50%")
    assert not unseen("01:55 label Bed_1", "bpap-st 16/5 28 support started")
    assert not unseen("01:55 label Bed_1", "bpap-st 16/5 28 mask on")
    assert not unseen("01:30 ph 7.25 paco2 70", "bpap-st 16/5 28")
    assert not unseen("01:30 bpap-st 14/5", "16/5 28")  # it has begun
    assert not unseen("01:30 support started", "16/5 28")
    assert not unseen("01:55 label Bed_1", "rr 20")
