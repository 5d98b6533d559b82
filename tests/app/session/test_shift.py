"""Shifts by wall time, through both clock changes."""

import pytest
from hypothesis import given
from hypothesis import strategies as st

from app.session.shift import shift_of
from core.record.instant import HOUR, iso, parse


@pytest.mark.parametrize(
    ("moment", "start", "end", "night"),
    [
        ("2026-03-28T05:30:00Z", "2026-03-27T19:30:00+00:00", "2026-03-28T07:30:00+00:00", True),
        ("2026-03-28T07:30:00Z", "2026-03-28T07:30:00+00:00", "2026-03-28T19:30:00+00:00", False),
        ("2026-03-28T07:29:59Z", "2026-03-27T19:30:00+00:00", "2026-03-28T07:30:00+00:00", True),
    ],
)
def test_the_shift_of_a_moment(moment, start, end, night):
    found = shift_of(parse(moment), "Europe/London")
    assert (iso(found.start), iso(found.end), found.night) == (start, end, night)


@pytest.mark.parametrize(("evening", "hours"), [("2026-03-28T23:00:00Z", 11), ("2026-10-24T23:00:00Z", 13)])
def test_a_night_of_a_clock_change_is_an_hour_shorter_or_longer(evening, hours):
    found = shift_of(parse(evening), "Europe/London")
    assert (found.end - found.start) / HOUR == hours


@given(
    st.integers(parse("2026-01-01T00:00:00Z"), parse("2027-01-01T00:00:00Z")),
    st.sampled_from(["UTC", "Europe/London", "America/St_Johns", "Australia/Lord_Howe"]),
)
def test_every_moment_lies_in_exactly_one_shift(moment, zone):
    found = shift_of(moment, zone)
    assert found.start <= moment < found.end
    assert shift_of(found.start, zone) == found
    assert shift_of(found.end, zone).start == found.end
