"""With text up to twice as large nothing that can be pressed is cut, and lanes keep their place."""

from contextlib import contextmanager

import pytest
from PySide6.QtWidgets import QAbstractButton, QLabel, QWidget

from app.keeping.preferences import Preferences
from app.look.flow_row import FlowRow
from app.ward.ordering import Order
from tests.support.open_window import make_store, open_window, settled


@contextmanager
def enlarged(qtbot, tmp_path, scale, width=1280, height=800):
    """The window on two beds with text so many times as large."""
    preferences = Preferences(text_scale=scale, cautions_seen=True)
    with open_window(qtbot, make_store(tmp_path / "ward.luffmark"), preferences=preferences) as window:
        window.resize(width, height)
        yield window


@pytest.mark.parametrize("scale", [1.0, 1.3, 1.5, 2.0])
@pytest.mark.parametrize("size", [(1280, 800), (1920, 1080)])
def test_no_button_is_cut(qtbot, tmp_path, scale, size):
    with enlarged(qtbot, tmp_path, scale, *size) as window:
        for page in ("ward", "episode", "handover"):
            window.show_page(page)
            settled(qtbot, window)
            qtbot.wait(20)
            cut = [
                b.text() for b in window.findChildren(QAbstractButton) if b.isVisible() and b.text() and _is_cut(b)
            ]
            assert cut == []
        assert window.top.isVisible()
        assert window.top.moment.width() >= window.top.moment.sizeHint().width()


def _is_cut(button):
    return button.width() < button.sizeHint().width() or not button.window().rect().contains(
        button.mapTo(button.window(), button.rect().bottomRight())
    )


def labels(widths, spacing=10):
    parent = QWidget()
    row = FlowRow(parent, spacing)
    row.setContentsMargins(0, 0, 0, 0)
    made = []
    for n, width in enumerate(widths):
        label = QLabel(str(n))
        label.setFixedSize(width, 20)
        made.append(label)
    return parent, row, made


def test_what_does_not_fit_goes_on_in_the_next_line(qtbot):
    parent, row, made = labels([100, 100, 100])
    qtbot.addWidget(parent)
    for label in made:
        row.addWidget(label)
    parent.resize(230, row.heightForWidth(230))
    parent.show()
    assert row.heightForWidth(400) == 20
    assert row.heightForWidth(230) == 50
    assert [(x.x(), x.y()) for x in made] == [(0, 0), (110, 0), (0, 30)]


def test_what_stands_at_the_right_end_does(qtbot):
    parent, row, made = labels([100, 50, 60])
    qtbot.addWidget(parent)
    row.addWidget(made[0])
    row.add_right(made[1])
    row.add_right(made[2])
    parent.resize(400, 20)
    parent.show()
    assert [x.x() for x in made] == [0, 280, 340]
    made[1].hide()
    parent.resize(401, 20)
    qtbot.waitUntil(lambda: made[2].x() == 341)


@pytest.mark.parametrize("scale", [1.0, 1.5, 2.0])
def test_the_readout_is_whole_and_the_side_can_be_reached(qtbot, tmp_path, scale):
    with enlarged(qtbot, tmp_path, scale) as window:
        window.open_episode("bed-7")
        settled(qtbot, window)
        qtbot.wait(20)
        view = window.pages.episode
        for label in view.readout.findChildren(QLabel):
            assert label.height() >= label.heightForWidth(label.width()) - 2, label.text()
        inside = view.roll.widget()
        assert inside.width() <= view.roll.viewport().width()
        view.roll.verticalScrollBar().setValue(view.roll.verticalScrollBar().maximum())
        window.resize(1920, 1400)
        qtbot.wait(20)
        assert view.side.isVisible()


def test_large_text_leaves_room_for_two_lanes(qtbot, tmp_path):
    with enlarged(qtbot, tmp_path, 2.0) as window:
        settled(qtbot, window)
        qtbot.wait(20)
        assert window.pages.ward.lanes.height() >= window.theme.px(180)
        assert window.strip.said.height() > 0


@pytest.mark.parametrize(("scale", "width", "one_line"), [(1.0, 1280, True), (1.0, 1920, True), (1.5, 1920, True),
                                                          (2.0, 1300, False)])  # fmt: skip
def test_the_line_on_top_stands_beside_the_menus_where_it_fits(qtbot, tmp_path, scale, width, one_line):
    with enlarged(qtbot, tmp_path, scale, width, 800) as window:
        settled(qtbot, window)
        qtbot.wait(20)
        bar = window.menuBar()
        assert (bar.cornerWidget() is window.top) is one_line
        last = bar.actionGeometry(bar.actions()[-1])
        assert last.right() > 0  # no menu is pushed out
        if one_line:
            assert last.right() <= window.top.x()
            assert window.top.x() + window.top.width() <= width
        else:
            assert window.top.height() < 2 * window.top.pages.height()  # its pages alone: one row, not two
            assert last.right() <= window.top.who.x()
        assert window.top.moment.isVisible()
        assert window.top.person.isVisible()
        assert "28-Mar-2026 05:30" in window.top.moment.accessibleName()
        window.resize(2600, 800)  # and back beside the menus
        qtbot.wait(20)
        assert bar.cornerWidget() is window.top
        assert window.top.has_who
        assert window.top.moment.text().endswith("28-Mar-2026 05:30")


@pytest.mark.parametrize("scale", [1.5, 2.0])
def test_shift_figures_keep_their_choices_and_their_numbers(qtbot, tmp_path, scale):
    with enlarged(qtbot, tmp_path, scale) as window:
        window.show_page("statistics")
        settled(qtbot, window)
        qtbot.wait(20)
        view = window.pages.statistics
        for key in ("shift", "day", "week", "month"):
            button = view.spans.button(key)
            assert button.width() >= button.minimumSizeHint().width()
        assert view.start.width() >= view.start.minimumSizeHint().width()
        assert view.bars.width() <= view._scroll.viewport().width()  # numbers stand at the ends of the bars


@pytest.mark.parametrize("scale", [1.0, 1.5, 2.0])
def test_the_map_and_its_words_share_the_page(qtbot, tmp_path, scale):
    with enlarged(qtbot, tmp_path, scale) as window:
        window.select("bed-7")
        window.show_page("map")
        settled(qtbot, window)
        qtbot.wait(20)
        view = window.pages.map
        inside = view.roll.widget()
        assert inside.width() <= view.roll.viewport().width()
        assert view.map.height() >= window.theme.px(280)
        assert view._side.width() >= 0.3 * view.width()


def test_whom_to_see_first_is_named_wherever_another_order_or_a_filter_hides_the_lane(qtbot, tmp_path):
    with enlarged(qtbot, tmp_path, 2.0) as window:
        settled(qtbot, window)
        ward = window.pages.ward
        assert ward.shown_keys()[0] == "bed-7"
        assert not ward.first.isVisible()  # its lane stands on top and says so
        ward.sort_by(Order.BED)
        assert ward.shown_keys()[0] == "bed-3"
        assert ward.first.isVisible()
        assert "Bed 7" in ward.first.text()
        ward.sort_by(Order.CONCERN)
        ward.search.setText("Bed 3")
        assert ward.shown_keys() == ("bed-3",)
        assert ward.first.isVisible()
        ward.search.setText("")
        assert not ward.first.isVisible()
