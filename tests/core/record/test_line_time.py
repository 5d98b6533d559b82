"""The moment that is typed: by the wall's clock, with a date or without, or as ISO 8601."""

import pytest

from core.record.instant import DAY, iso, parse
from core.record.line_time import moment_near, moment_typed
from core.record.message import RecordError

NOW = parse("2026-03-28T02:10:00+00:00")


@pytest.mark.parametrize(
    ("text", "at"),
    [
        ("01:30", "2026-03-28T01:30:00+00:00"), ("at 01:30", "2026-03-28T01:30:00+00:00"),
        ("yesterday 23:10", "2026-03-27T23:10:00+00:00"), ("20m ago", "2026-03-28T01:50:00+00:00"),
        ("now", "2026-03-28T02:10:00+00:00"), ("26-mar-2026 23:10", "2026-03-26T23:10:00+00:00"),
        ("2026-03-28T02:05:00+01:00", "2026-03-28T01:05:00+00:00"),
    ],
)  # fmt: skip
def test_each_form_is_read(text, at):
    assert iso(moment_typed(text, NOW, "Europe/London")) == at


@pytest.mark.parametrize(
    ("text", "key", "accepted"),
    [
        ("half one", "line.time_form", "14:20"), ("0130", "line.time_form", "01:30"),
        ("01:30 rr 20", "line.time_form", "14:20"), ("03:30", "time.not_yet", "yesterday 03:30"),
        ("31-Feb-2026 01:00", "time.unreadable", "28-Mar-2026"), ("28-Mai-2026 01:00", "time.unreadable", "28-Mar"),
        ("29-Mar-2026 01:30", "time.skipped", "wall clock"),
        ("25-Oct-2026 01:30", "time.repeated", "25-Oct-2026 second 01:30"),
        ("2026-03-28T02:05:00", "line.time_form", "+00:00"),
    ],
)  # fmt: skip
def test_what_is_no_moment_is_refused_with_what_is(text, key, accepted):
    with pytest.raises(RecordError) as refused:
        moment_typed(text, NOW, "Europe/London")
    assert refused.value.message.key == key
    assert accepted in refused.value.message.values["accepted"]


def test_an_hour_that_came_twice_is_told_with_its_date():
    first = moment_typed("25-Oct-2026 first 01:30", NOW, "Europe/London")
    second = moment_typed("25-Oct-2026 second 01:30", NOW, "Europe/London")
    assert second - first == DAY // 24


def test_a_bare_time_is_the_nearest_to_what_stood_there():
    near = parse("2026-03-27T00:10:00+00:00")
    assert iso(moment_near("23:50", near, NOW, "UTC")) == "2026-03-26T23:50:00+00:00"
    assert iso(moment_near("yesterday 23:50", near, NOW, "UTC")) == "2026-03-27T23:50:00+00:00"
