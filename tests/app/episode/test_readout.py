"""The line over the panels says that its values are single readings: figures beside it are medians."""

from app.chart.shapes import Look, Reading
from app.episode.readout import Readout
from app.look.theme import LIGHT
from app.telling.support_course import course_of
from core.record.instant import MINUTE
from tests.support.log import episode, moment


def test_values_are_called_readings_since_levers_name_medians(qtbot):
    readout = Readout(LIGHT)
    qtbot.addWidget(readout)
    value = Reading("volume", "vte", "Tidal vol.", "mL", 0, 9 * MINUTE, 333.0, Look.FRESH)
    readout.show_moment(10 * MINUTE, "UTC", None, [value], pointed=False)
    assert readout.plain().splitlines()[1].replace("\N{NO-BREAK SPACE}", " ").split() == [
        "Readings:",
        "Tidal",
        "vol.",
        "333",
        "mL",
    ]
    readout.show_moment(10 * MINUTE, "UTC", None, [], pointed=False)
    assert readout.plain().endswith("Nothing logged yet at this moment")
    assert "Readings" not in readout.plain()


OFF = """
-22:00 bpap-st 20/5 28
00:10 mask off
01:00 ipap 18
01:30 mask on
03:00 intubated
"""


def said_at(qtbot, at, until):
    course = course_of(episode(OFF), moment(until))
    readout = Readout(LIGHT)
    qtbot.addWidget(readout)
    readout.show_moment(moment(at), "UTC", course.at(moment(at)), [], pointed=True, support=course.support)
    return readout.plain().splitlines()[0].replace("\N{NO-BREAK SPACE}", " "), readout._settings.text()


def test_a_mask_that_is_off_is_said_first_and_what_was_set_as_such(qtbot):
    plain, html = said_at(qtbot, "00:50", "02:00")
    assert "mask off since 00:10 (40 min)" in plain
    assert plain.index("mask off") < plain.index("set before: BPAP-ST, IPAP 20 / EPAP 5")
    assert "<b>mask off since 00:10 (40 min)</b>" in html
    assert "for 2 h" not in plain  # no setting is in force
    assert "set since: BPAP-ST, IPAP 18 / EPAP 5" in said_at(qtbot, "01:10", "02:00")[0]


def test_on_the_mask_again_the_settings_are_in_force_and_after_the_end_none_are(qtbot):
    plain, _html = said_at(qtbot, "01:40", "02:00")
    assert "mask off" not in plain
    assert "IPAP 18 / EPAP 5 cmH2O (PS 13), FiO2 28 % for 40 min" in plain
    assert said_at(qtbot, "03:20", "04:00")[0].endswith("support ended 03:00")
