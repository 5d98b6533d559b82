"""What markers look at: a value that was typed twice is one reading."""

import pytest

from core.judgement.markers.observed import Observed, one_a_minute
from tests.support.flag_cases import COPD, LUNG, START, ctx, met
from tests.support.log import device, episode


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
    at, minutes = log.rsplit("\n", 1)[1][:5], ("02:00", "02:20") if "02:00" in log else ("04:00", "04:20")
    assert at == minutes[0]
    assert met(marker, f"{log}\n{minutes[0]} {second}") == ""
    assert met(marker, f"{log}\n{minutes[1]} {second}") == f"{minutes[1]}-"
