"""The line over the panels says that its values are single readings: figures beside it are medians."""

from app.chart.shapes import Look, Reading
from app.episode.readout import Readout
from app.look.theme import LIGHT
from core.record.instant import MINUTE


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
