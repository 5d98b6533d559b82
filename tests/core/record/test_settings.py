"""Settings in force, and the oxygen that is known."""

from dataclasses import replace
from math import isnan, nan

import pytest
from hypothesis import given
from hypothesis import strategies as st

from core.record.episode import build_episode
from core.record.knowledge import standing
from core.record.settings import SettingsInForce
from tests.support.log import entries, episode, moment


def in_force(log, at):
    return SettingsInForce(episode(log)).at(moment(at))


def test_a_setting_stands_until_it_is_changed():
    log = "01:00 mode bpap-st ipap 14 epap 5\n02:00 ipap 18"
    assert in_force(log, "01:59").pressure_support == 9.0
    assert in_force(log, "02:00").pressure_support == 13.0
    assert isnan(in_force(log, "00:59").pressure_support)


def test_an_oxygen_flow_ends_the_known_fio2_and_an_fio2_ends_the_flow():
    log = "01:00 fio2 35\n02:00 o2 flow 4\n03:00 fio2 40\n04:00 fio2 30 o2 flow 2"
    known = [in_force(log, at).fio2 for at in ("01:30", "02:30", "03:30", "04:30")]
    assert (known[0], known[2], known[3]) == (0.35, 0.40, 0.30)
    assert isnan(known[1])
    assert isnan(in_force(log, "03:30").o2_flow)
    assert in_force(log, "04:30").o2_flow == 2.0


def test_no_flow_is_room_air():
    assert in_force("01:00 o2 flow 0", "01:30").fio2 == 0.21


@pytest.mark.parametrize(
    ("log", "support", "low"),
    [
        ("01:00 mode cpap cpap 8", 0.0, 8.0),
        ("01:00 cpap 10", 0.0, 10.0),
        ("01:00 mode bpap-st ipap 16 epap 6", 10.0, 6.0),
        ("01:00 ipap 16 epap 6", 10.0, 6.0),
        ("01:00 mode high-flow nasal", 0.0, None),
        ("01:00 mode off", 0.0, None),
    ],
)
def test_pressure_support_by_mode(log, support, low):
    now = in_force(log, "02:00")
    assert now.pressure_support == support
    assert isnan(now.low_pressure) if low is None else now.low_pressure == low


def test_changing_to_bilevel_from_cpap_had_no_support_before():
    settings = SettingsInForce(episode("01:00 cpap 8\n02:00 mode bpap-st ipap 16 epap 8"))
    assert settings.before(moment("02:00")).pressure_support == 0.0
    assert settings.at(moment("02:00")).pressure_support == 8.0


@given(st.lists(st.tuples(st.integers(0, 300), st.integers(6, 30)), min_size=1, max_size=12))
def test_the_step_function_equals_a_walk_through_the_log(changes):
    changes = sorted(dict(changes).items())
    log = "\n".join(f"{m // 60:02d}:{m % 60:02d} ipap {v}" for m, v in changes)
    steps = SettingsInForce(episode(log)).steps("ipap")
    for minute in range(0, 301, 7):
        expected = [v for m, v in changes if m <= minute]
        got = steps.at(moment(f"{minute // 60:02d}:{minute % 60:02d}"))
        assert (isnan(got) and not expected) or got == expected[-1]


@pytest.mark.parametrize(
    ("first", "second", "fio2", "flow"),
    [
        ("fio2 40", "flow 4", nan, 4),
        ("flow 4", "fio2 40", 0.4, nan),
        ("fio2 40", "flow 0", 0.21, 0),
        ("fio2 40", "fio2 50", 0.5, nan),
    ],
)
def test_of_oxygen_said_twice_for_one_moment_the_later_recorded_counts(first, second, fio2, flow):
    log = entries(f"02:00 {first}\n02:00 {second}")
    later = [*log[:-1], replace(log[-1], recorded_at=moment("02:01"))]
    now = SettingsInForce(build_episode("E1", standing(later))).at(moment("02:00"))
    assert (now.fio2, now.o2_flow) == pytest.approx((fio2, flow), nan_ok=True)


@pytest.mark.parametrize(
    "log", ["02:00 fio2 40\n02:00 flow 4", "02:00 flow 4\n02:00 fio2 40", "02:00 fio2 40 flow 4"]
)
def test_an_fio2_and_a_flow_of_one_recording_belong_together(log):
    now = in_force(log, "02:00")
    assert (now.fio2, now.o2_flow) == pytest.approx((0.4, 4))
