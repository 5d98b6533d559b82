"""What is asked where an entry does not fit the course of the support."""

from dataclasses import replace

import pytest

from core.judgement.order_doubts import order_doubts
from core.record.episode import build_episode
from core.record.knowledge import standing
from core.record.log_line import read_line
from tests.support.log import NO_SETTINGS, entries, episode, moment

ON = "00:50 rr 30\n01:00 mode bpap-st ipap 14 epap 5 fio2 28\n"
OFF = ON + "02:00 mask off\n"
BACK = OFF + "02:30 mask on\n"
GAS = ON + "02:00 ph 7.30 paco2 60 pao2 60\n"


def asked(log, typed, at="02:10"):
    line = read_line(typed, now=moment(at), zone="UTC", in_force=NO_SETTINGS)
    return order_doubts(line.readings, line.at, episode(log))


@pytest.mark.parametrize(
    ("log", "typed", "at", "keys"),
    [
        (ON, "18/5", "02:10", []),
        (OFF, "18/5", "02:10", ["doubt.settings_off_mask"]),
        (OFF, "18/5", "01:59", []),
        (OFF, "mask on 18/5", "02:10", []),
        (OFF, "flow 2", "02:10", []),
        (OFF, "fio2 35", "02:10", []),
        (OFF, "mode high-flow nasal fio2 40", "02:10", []),
        (BACK, "18/5", "02:40", []),
        (OFF, "mask off", "02:10", ["doubt.mask_off_already"]),
        (OFF, "break start", "02:10", ["doubt.mask_off_already"]),
        (OFF, "mask on", "02:10", []),
        (OFF, "mask on", "02:00", ["doubt.mask_both_ways"]),
        (BACK, "mask off", "02:30", ["doubt.mask_both_ways"]),
        (OFF, "mask on mask off", "02:10", ["doubt.mask_off_already", "doubt.mask_both_ways"]),
        (BACK, "mask off", "02:31", []),
        (ON, "mask on", "01:05", []),  # the mask of the start
        (ON, "mask on", "02:10", ["doubt.mask_on_already"]),
        (BACK, "mask on", "02:40", ["doubt.mask_on_already"]),
        ("", "mask on", "02:10", []),
        (ON + "03:00 stopped", "18/5", "03:30", ["doubt.after_the_end"]),
        (ON + "03:00 stopped", "rr 22", "03:30", []),
        (ON, "ph 7.30 mask off", "02:10", ["doubt.gas_with_mask_off"]),
        (OFF, "ph 7.30 paco2 60", "02:00", ["doubt.gas_with_mask_off"]),
        (OFF, "ph 7.30 paco2 60", "02:01", []),
        (GAS, "mask off", "02:00", ["doubt.gas_with_mask_off"]),
        (GAS, "mask off", "02:01", []),
        (ON, "fio2 40 ph 7.30", "02:10", ["doubt.gas_with_new_fio2"]),
        (ON, "fio2 28 ph 7.30", "02:10", []),
        (ON, "fio2 40 ph 7.30 gas fio2 40", "02:10", []),
        (GAS, "fio2 40", "02:00", ["doubt.gas_with_new_fio2"]),
        (GAS, "flow 4", "02:00", ["doubt.gas_with_new_fio2"]),
        (GAS, "fio2 40", "02:01", []),
        (ON + "02:00 fio2 40", "ph 7.30", "02:00", ["doubt.gas_with_new_fio2"]),
        ("", "fio2 40 ph 7.30", "02:00", []),  # nothing was set before
    ],
)
def test_questions(log, typed, at, keys):
    assert [m.key for m in asked(log, typed, at)] == keys


def test_they_say_since_when():
    (off,) = asked(OFF, "18/5")
    assert off.values["since"] == moment("02:00")
    (on,) = asked(BACK, "mask on", "02:40")
    assert on.values["since"] == moment("02:30")
    (fio2,) = asked(ON, "fio2 40 ph 7.30")
    assert fio2.values["fio2"] == 0.28


@pytest.mark.parametrize(
    ("log", "typed", "at", "last"),
    [
        (OFF, "mask on", "02:00", "on"),
        (BACK, "mask off", "02:30", "off"),
        (ON, "mask off mask on", "02:10", "on"),
    ],
)
def test_of_two_ways_in_one_minute_it_says_which_will_count(log, typed, at, last):
    said = next(m for m in asked(log, typed, at) if m.key == "doubt.mask_both_ways")
    assert (said.values["last"], said.values["at"]) == (last, moment(at))


def test_a_minute_typed_without_seconds_lies_before_what_the_clock_stamped_in_it():
    stamped = [replace(e, at=e.at + 20_000_000) if e.channel == "mask_on" else e for e in entries(BACK)]
    line = read_line("mask off", now=moment("02:30"), zone="UTC", in_force=NO_SETTINGS)
    said = order_doubts(line.readings, moment("02:30"), build_episode("E1", standing(stamped)))
    assert [(m.values["last"]) for m in said if m.key == "doubt.mask_both_ways"] == ["on"]
