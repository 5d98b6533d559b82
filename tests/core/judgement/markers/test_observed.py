"""What markers look at: a value that was typed twice is one reading."""

import numpy as np
import pytest

from core.figures.episode_figures import judged
from core.judgement.markers.observed import Observed, one_a_minute
from core.judgement.oxygen_breathed import oxygen_breathed, oxygen_course
from core.record.episode import build_episode
from core.record.instant import MINUTE, SECOND
from core.record.knowledge import standing
from tests.support.flag_cases import COPD, LUNG, START, ctx, met
from tests.support.log import device, episode
from tests.support.log_cases import at
from tests.support.random_rows import POLICY, ZERO, entries_of, thrown


def test_of_one_minute_the_last_value_that_people_logged_is_the_reading():
    seen = Observed(ctx("02:00 rr 20\n02:00 rr 28\n02:01 rr 30"))
    assert seen.series("rr").v.tolist() == [28, 30]
    assert seen.spots("rr").v.tolist() == [28, 30]


def test_values_of_a_machine_stay():
    made = episode("02:00 spo2 90\n02:00 spo2 91", samples=[device("spo2", "02:00", range(80, 99), every_s=1)])
    series = made.number("spo2")
    assert int((~one_a_minute(series)).sum()) == 1
    assert one_a_minute(series)[~series.spot].all()


@pytest.mark.parametrize(
    ("marker", "log", "second"),
    [
        ("spo2_below_range", COPD + START + "02:00 spo2 84", "spo2 84"),
        ("rr_above_30", LUNG + START + "02:00 rr 34", "rr 34"),
        ("rr_above_25", COPD + START + "04:00 rr 29", "rr 29"),
    ],
)
def test_a_value_typed_twice_for_one_minute_raises_nothing_that_asks_for_two(marker, log, second):
    first, minutes = log.rsplit("\n", 1)[1][:5], ("02:00", "02:20") if "02:00" in log else ("04:00", "04:20")
    assert first == minutes[0]
    assert met(marker, f"{log}\n{minutes[0]} {second}") == ""
    assert met(marker, f"{log}\n{minutes[1]} {second}") == f"{minutes[1]}-"


BREAK = COPD + START + "02:00 mask_off\n02:10 spo2 97\n02:20 spo2 97\n02:30 spo2 97\n"


def test_off_the_mask_what_was_set_on_the_device_is_no_oxygen_given():
    times = np.array([at("01:30"), at("02:00"), at("02:10"), at("02:50"), at("03:10")], np.int64)
    seen = Observed(ctx(BREAK + "02:40 o2_flow 2\n03:00 mask_on\n", "04:00"))
    assert seen.oxygen_given(times).tolist() == [True, True, False, True, True]  # a minute belongs before its change
    ended = Observed(ctx(BREAK.replace("mask_off", "stopped"), "04:00"))
    assert ended.oxygen_given(times).tolist() == [True, True, False, False, False]


@pytest.mark.parametrize("seed", range(60))
def test_the_course_of_oxygen_is_what_is_breathed_at_every_moment(seed):
    rows, _ = thrown(seed)
    last = max(m for m, _, _ in rows)
    seen = Observed(judged(build_episode("E", standing(entries_of(rows))), ZERO + last * MINUTE, POLICY))
    times = np.arange(-30, last + 1, dtype=np.int64) * MINUTE + ZERO + 17 * SECOND
    one_by_one = [oxygen_breathed(seen.settings, seen.support, int(t)).given for t in times]
    expected = [np.nan if given is None else float(given) for given in one_by_one]
    np.testing.assert_array_equal(oxygen_course(seen.settings, seen.support, times), expected)


def test_nobody_is_given_too_much_oxygen_by_a_mask_that_is_off():
    assert met("over_oxygenation", BREAK, "03:00") == ""
    assert met("over_oxygenation", BREAK + "02:05 o2_flow 2\n", "03:00") == "02:20-"
    assert met("over_oxygenation", BREAK.replace("02:00 mask_off\n", ""), "03:00") == "02:20-"
