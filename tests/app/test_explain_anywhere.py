"""One key explains what is selected, on every page, and never something of another page."""

import pytest
from PySide6.QtCore import Qt

from app.explain.dialog import ExplainDialog
from tests.support.open_window import settled


@pytest.fixture
def window(on_bed_7):
    return on_bed_7


def asked(qtbot, window, widget):
    """What F2 brings up with the focus on a widget; None where nothing comes up."""
    qtbot.waitUntil(window.isActiveWindow)
    widget.setFocus()
    qtbot.keyClick(widget, Qt.Key.Key_F2)
    shown = [d for d in window.findChildren(ExplainDialog) if d.isVisible()]
    if not shown:
        return None
    found = shown[0].explanation
    shown[0].close()
    return found


def test_the_verdict_whose_window_the_crosshair_stands_in(qtbot, window):
    window.show_page("episode")
    settled(qtbot, window)
    stack = window.pages.episode.stack
    bracket = stack.rows[1].brackets.brackets[-1]
    stack.point_at((bracket.start + bracket.end) // 2)
    while window.pages.episode.gas_pointed_at() is not None:
        stack.point_at(stack.instant + 60_000_000)
    found = asked(qtbot, window, stack)
    assert bracket.word in found.title.lower()
    assert found.inputs or found.rules


def test_the_row_of_the_shift_figures(qtbot, window):
    window.show_page("statistics")
    settled(qtbot, window)
    qtbot.waitUntil(lambda: window.pages.statistics.found is not None)
    table = window.pages.statistics.table
    rows = {
        table.item(r, 0).text(): r for r in range(table.rowCount()) if table.item(r, 1) and table.item(r, 1).text()
    }
    assert len(rows) > 10
    for name, row in rows.items():
        table.setCurrentCell(row, 0)
        found = asked(qtbot, window, table)
        assert found.title.startswith(name)
        assert table.item(row, 1).text() in found.title
        assert found.rules
        assert found.source


def test_the_episode_that_is_compared(qtbot, window):
    window.show_page("compare")
    settled(qtbot, window)
    chosen = window.pages.compare
    for n in range(chosen.list.count()):
        chosen.list.setCurrentRow(n)
        assert asked(qtbot, window, chosen.list) is not None


def test_where_nothing_can_be_selected_nothing_of_another_page_is_explained(qtbot, window):
    window.show_page("handover")
    settled(qtbot, window)
    assert asked(qtbot, window, window.pages.handover.text) is None


@pytest.mark.parametrize("page", ["ward", "map"])
def test_a_lane_and_a_gas_on_the_map(qtbot, window, page):
    window.show_page(page)
    settled(qtbot, window)
    widget = window.pages.ward.lanes if page == "ward" else window.pages.map.map
    assert asked(qtbot, window, widget) is not None
