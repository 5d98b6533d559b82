"""Everything can be heard: a name for every control of the pages, a table and a summary for every chart. Dialogs are
walked by `test_every_dialog`."""

import pytest
from PySide6.QtCore import Qt
from PySide6.QtWidgets import QAbstractButton, QAbstractScrollArea, QComboBox, QLabel, QWidget

from app.dialogs.table import TableDialog
from tests.support.open_window import settled

PAGES = ("ward", "episode", "map", "compare", "handover", "statistics")
CHARTS = {
    "ward": lambda p: p.ward.lanes, "episode": lambda p: p.episode.stack, "map": lambda p: p.map.map,
    "compare": lambda p: p.compare.chart,
}  # fmt: skip


@pytest.fixture
def window(on_bed_7):
    return on_bed_7


def unspoken(root):
    return [
        f"{type(w).__name__} in {type(w.parent()).__name__}"
        for w in root.findChildren(QWidget)
        if w.focusPolicy() != Qt.FocusPolicy.NoFocus and w.isEnabled() and not spoken(w)
    ]


def spoken(widget):
    """What a screen reader says; Qt's own inner parts speak through the widget they belong to."""
    owner = widget.parent()
    viewport = isinstance(owner, QAbstractScrollArea) and owner.viewport() is widget and owner.accessibleName()
    inner = widget.objectName().startswith("qt_") or isinstance(widget, QLabel) or viewport
    popup = in_a_chooser(widget)
    text = isinstance(widget, QAbstractButton) and widget.text()
    return inner or popup or widget.accessibleName() or text


def in_a_chooser(widget):
    """Whether it is the list that a chooser opens."""
    owner = widget.parent()
    while owner is not None and not isinstance(owner, QComboBox):
        owner = owner.parent()
    return owner is not None


@pytest.mark.parametrize("page", PAGES)
def test_every_control_of_a_page_has_a_name(qtbot, window, page):
    window.show_page(page)
    settled(qtbot, window)
    assert unspoken(window.pages.page(page)) == []


@pytest.mark.parametrize("page", CHARTS)
def test_every_chart_has_a_name_a_summary_and_a_table(qtbot, window, page):
    window.show_page(page)
    settled(qtbot, window)
    chart = CHARTS[page](window.pages)
    assert chart.accessibleName()
    assert len(chart.accessibleDescription()) > 20
    window.actions_by_key["table"].trigger()
    dialog = next(d for d in window.findChildren(TableDialog) if d.isVisible())
    assert dialog.table.rowCount() > 0
    assert len(dialog.text.toPlainText()) > 20
    dialog.reject()
