"""The clock's marks: wall times of any zone, through clock changes."""

from datetime import UTC, datetime
from itertools import pairwise
from zoneinfo import ZoneInfo

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from app.chart.time_ticks import (
    DAY,
    HOUR,
    MINUTE,
    date_word,
    local_time,
    moment_word,
    time_ticks,
    time_word,
)

LONDON = ZoneInfo("Europe/London")


def us(*when: int) -> int:
    return int(datetime(*when, tzinfo=UTC).timestamp()) * 1_000_000


def measure(text: str) -> float:
    return 7.0 * len(text)


def labels(start, end, width, zone):
    return [mark.label for mark in time_ticks(start, end, width, zone, measure) if mark.label]


def test_a_night_of_25_hours_shows_both_half_past_ones_with_their_offset():
    # The clocks of the United Kingdom went back at 01:00 UTC on 25-Oct-2026 (IANA tz database).
    got = labels(us(2026, 10, 24, 22, 45), us(2026, 10, 25, 3, 15), 1400, LONDON)
    assert "01:30 +01" in got
    assert "01:30 +00" in got
    assert got.index("01:30 +01") < got.index("01:30 +00")
    assert "25-Oct" in got
    assert "02:00" in got


def test_a_night_of_23_hours_leaves_the_missing_hour_out():
    # The clocks of the United Kingdom went on at 01:00 UTC on 29-Mar-2026 (IANA tz database, Europe/London).
    got = labels(us(2026, 3, 28, 22), us(2026, 3, 29, 4), 1200, LONDON)
    assert "00:30" in got
    assert "01:30" not in got
    assert "02:00" in got
    assert not any("+" in label for label in got)


def test_a_half_hour_clock_change_is_marked_with_minutes():
    # Lord Howe Island moves its clocks by 30 minutes, back at 15:00 UTC on 4-Apr-2026 (IANA tz database).
    zone = ZoneInfo("Australia/Lord_Howe")
    got = labels(us(2026, 4, 4, 13), us(2026, 4, 4, 18), 3200, zone)
    assert "01:40 +11" in got
    assert "01:40 +10:30" in got


def test_midnight_is_a_date_in_letters():
    marks = time_ticks(us(2026, 3, 27, 20), us(2026, 3, 28, 8), 900, LONDON, measure)
    assert [mark.label for mark in marks if mark.midnight] == ["28-Mar"]
    assert moment_word(us(2026, 3, 28, 2, 10), LONDON) == "28-Mar-2026 02:10"
    assert date_word(us(2026, 7, 1, 23, 30), LONDON) == "02-Jul"
    assert time_word(us(2026, 7, 1, 23, 30), LONDON) == "00:30"


ZONES = st.sampled_from(["UTC", "Europe/London", "Asia/Kathmandu", "Australia/Lord_Howe", "America/St_Johns"])


@given(ZONES, st.integers(0, 2 * 10**15), st.integers(10 * MINUTE, 400 * DAY), st.integers(200, 2500))
@settings(max_examples=200, deadline=None)
def test_marks_rise_stand_at_round_wall_times_and_never_touch(name, start, span, width):
    zone = ZoneInfo(name)
    marks = time_ticks(start, start + span, width, zone, measure)
    scale = width / span
    shown = [mark for mark in marks if mark.label]
    assert [m.at for m in marks] == sorted({m.at for m in marks})
    for mark in marks:
        assert start <= mark.at <= start + span
        assert local_time(mark.at, zone).second == 0
    for left, right in pairwise(shown):
        room = (right.at - left.at) * scale - (measure(left.label) + measure(right.label)) / 2
        assert room >= 20.0 - 1e-6
    assert len(marks) <= width / (measure("00:00") + 20) + 3


def test_a_shift_has_about_as_many_labels_as_there_is_room():
    assert len(labels(us(2026, 3, 27, 20), us(2026, 3, 28, 8), 900, LONDON)) >= 10


@pytest.mark.parametrize(("end", "width"), [(0, 100), (HOUR, 0)])
def test_an_empty_window_is_refused(end, width):
    with pytest.raises(ValueError, match="accepted"):
        time_ticks(0, end, width, LONDON, measure)
