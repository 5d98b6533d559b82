"""Wall-clock times over midnight and over clock changes."""

from datetime import UTC, datetime

import pytest

from core.record.instant import iso, parse
from core.record.local_time import candidates, latest_wall_time, local, wall_time_near
from core.record.message import RecordError

LONDON = "Europe/London"


def moment(hour, minute, now, **more):
    return iso(latest_wall_time(hour, minute, now=parse(now), zone=LONDON, **more))


def test_a_time_after_midnight_is_yesterdays_when_it_has_not_come_yet():
    assert moment(23, 50, "2026-03-28T00:10:00+00:00") == "2026-03-27T23:50:00+00:00"


def test_a_time_may_lead_the_clock_by_five_minutes():
    assert moment(0, 14, "2026-03-28T00:10:00+00:00") == "2026-03-28T00:14:00+00:00"
    with pytest.raises(RecordError, match=r"time\.not_yet"):
        moment(0, 16, "2026-03-28T00:10:00+00:00")


@pytest.mark.parametrize(
    ("hour", "minute", "now"),
    [
        (5, 40, "2026-03-28T05:30:00+00:00"),
        (0, 10, "2026-03-27T22:30:00+00:00"),
        (8, 29, "2026-03-28T05:30:00+00:00"),
    ],
)
def test_a_time_still_to_come_is_refused_and_never_taken_for_yesterdays(hour, minute, now):
    with pytest.raises(RecordError, match=r"time\.not_yet"):
        moment(hour, minute, now)


def test_yesterday_is_taken_when_it_is_said():
    assert moment(5, 40, "2026-03-28T05:30:00+00:00", yesterday=True) == "2026-03-27T05:40:00+00:00"
    assert moment(9, 0, "2026-03-28T05:30:00+00:00") == "2026-03-27T09:00:00+00:00"


def test_a_time_that_the_clock_skipped_is_refused():
    with pytest.raises(RecordError, match=r"time\.skipped"):
        moment(1, 30, "2026-03-29T03:00:00+00:00")


def test_a_time_that_came_twice_is_asked_about():
    now = "2026-10-25T02:00:00+00:00"
    with pytest.raises(RecordError, match=r"time\.repeated"):
        moment(1, 30, now)
    assert moment(1, 30, now, which="first") == "2026-10-25T00:30:00+00:00"
    assert moment(1, 30, now, which="second") == "2026-10-25T01:30:00+00:00"


def test_the_second_of_two_is_not_offered_before_it_has_come():
    assert moment(1, 30, "2026-10-25T00:40:00+00:00") == "2026-10-25T00:30:00+00:00"


def test_candidates_are_none_one_or_two():
    wall = datetime(2026, 1, 1, 1, 30, tzinfo=UTC).time()
    days = [
        datetime(2026, 3, 29, tzinfo=UTC),
        datetime(2026, 3, 28, tzinfo=UTC),
        datetime(2026, 10, 25, tzinfo=UTC),
    ]
    assert [len(candidates(d.date(), wall, LONDON)) for d in days] == [0, 1, 2]


def test_local_shows_the_wall_clock():
    assert local(parse("2026-07-01T12:00:00+00:00"), LONDON).hour == 13


def near(hour, minute, at, now="2026-10-27T08:00:00+00:00", which=""):
    return iso(wall_time_near(hour, minute, near=parse(at), now=parse(now), zone=LONDON, which=which))


def test_the_right_time_of_an_old_entry_is_on_its_own_night():
    assert near(23, 45, "2026-10-21T23:10:00+00:00") == "2026-10-21T22:45:00+00:00"  # of 00:10: the day before
    assert near(0, 20, "2026-10-20T22:50:00+00:00") == "2026-10-20T23:20:00+00:00"  # of 23:50: the day after


def test_near_an_hour_that_came_twice_it_is_asked_which():
    with pytest.raises(RecordError, match=r"time\.repeated"):
        near(1, 30, "2026-10-25T01:00:00+00:00")
    assert near(1, 30, "2026-10-25T01:00:00+00:00", which="second") == "2026-10-25T01:30:00+00:00"


def test_a_time_that_has_not_come_is_not_taken_for_yesterdays():
    with pytest.raises(RecordError, match=r"time\.not_yet"):
        near(8, 0, "2026-10-27T05:00:00+00:00", now="2026-10-27T05:30:00+00:00")
    with pytest.raises(RecordError, match=r"time\.unreadable"):
        near(25, 0, "2026-10-27T05:00:00+00:00")
