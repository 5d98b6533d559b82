"""Hours on the mask of a night worked by hand: the time from the start, less breaks (common practice, no source)."""

import pytest

from core.judgement.support_findings import support_figure
from core.record.settings import SettingsInForce
from core.record.support import support_time
from tests.support.log import episode, moment

NIGHT = """
-19:40 rr 32
-20:00 mode bpap-st ipap 14 epap 5 fio2 35
-22:15 break_start
-22:45 break_end
00:30 mask_off
00:50 mask_on
03:10 mode off
04:00 mode bpap-st
"""


def worn(log, as_of):
    e = episode(log).until(moment(as_of))
    settings = SettingsInForce(e)
    return support_figure(e, settings, support_time(e, settings), moment(as_of))


@pytest.mark.parametrize(
    ("as_of", "hours"),
    [
        ("-20:00", 0.0),
        ("-22:15", 2.25),
        ("-22:30", 2.25),  # in the break
        ("-22:45", 2.25),
        ("00:00", 3.5),  # 4 h less 30 min
        ("03:00", 6 + 10 / 60),  # 7 h less 30 and 20 min
        ("03:30", 6 + 20 / 60),  # switched off at 03:10
        ("06:00", 10 - (30 + 20 + 50) / 60),
    ],
)
def test_a_night_worked_by_hand(as_of, hours):
    figure = worn(NIGHT, as_of)
    assert figure.hours_on_mask == pytest.approx(hours)
    assert figure.hours_on_mask_last_24h == pytest.approx(hours)


def test_only_the_last_day_counts_for_the_last_day():
    """Since 20:00 on the 27th; at 21:00 on the 28th, 25 h less 100 min since the start, 24 h less 100 in a day."""
    figure = worn(NIGHT, "21:00")
    assert figure.hours_on_mask == pytest.approx(25 - 100 / 60)
    assert figure.hours_on_mask_last_24h == pytest.approx(24 - 100 / 60)


def test_after_the_end_the_hours_stand():
    assert worn(NIGHT + "05:00 stopped\n", "09:00").hours_on_mask == pytest.approx(9 - 100 / 60)


def test_a_start_that_nobody_recorded_gives_no_hours():
    figure = worn("02:00 vte 400\n02:01 mode bpap-st ipap 14 epap 5", "03:00")
    assert figure.hours_on_mask is None
    assert figure.reasons["hours_on_mask"].key == "support.start_not_recorded"
