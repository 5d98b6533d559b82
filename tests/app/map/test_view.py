"""The map's page: words and picture share it at every text size, and a table never breaks its words to pieces."""

import pytest
from PySide6.QtWidgets import QApplication

from app.chart.acid_base_map import AcidBaseMap
from app.chart.shapes import MapSpec
from app.look.style_sheet import apply_theme
from app.look.theme import LIGHT
from app.map.view import MapView
from app.map.words import map_spec, map_table
from app.words import Reader
from core.judgement.shapes import EpisodeFigures
from tests.support.sample_ward import sample_ward

LAST = 4


def bed() -> EpisodeFigures:
    return next(f for f in sample_ward() if f.label == "Bed 4")


def spec() -> MapSpec:
    return map_spec(bed(), Reader("UTC"))


@pytest.mark.parametrize(("scale", "hidden"), [(1.0, False), (2.0, True)])
def test_the_map_keeps_half_the_page_and_classes_stand_whole_or_not_at_all(qtbot, scale, hidden):
    theme = LIGHT.scaled(scale)
    apply_theme(QApplication.instance(), theme)
    view = MapView(theme)
    qtbot.addWidget(view)
    view.resize(1280, 700)
    view.show()
    view._fill(map_table(bed(), Reader("UTC")))
    assert view.map.width() >= 0.45 * view.width()
    assert view.table.isColumnHidden(LAST) is hidden
    apply_theme(QApplication.instance(), LIGHT)


@pytest.mark.parametrize("width", [420, 700, 1200])
def test_notes_go_on_in_a_second_line_instead_of_being_cut(qtbot, width):
    drawn = AcidBaseMap(LIGHT.scaled(1.5))
    qtbot.addWidget(drawn)
    drawn.set_spec(spec())
    drawn.resize(width, 600)
    notes = drawn._notes(width)
    assert notes.width() <= width
    assert drawn._plot(drawn.rect().toRectF()).bottom() + notes.height() < 600
    assert drawn._notes(420).height() > drawn._notes(1200).height()
