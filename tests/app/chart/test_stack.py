"""The stack: one clock for all rows, by mouse, wheel and keys."""

from dataclasses import replace

import pytest
from PySide6.QtCore import QPoint, QPointF, Qt
from PySide6.QtGui import QWheelEvent
from PySide6.QtWidgets import QApplication

from app.chart.clock_window import LEAST_SPAN
from app.chart.stack import PanelStack
from app.look.theme import DARK, LIGHT
from tests.app.chart.conftest import START, at


@pytest.fixture
def stack(qtbot, stack_spec):
    chart = PanelStack(LIGHT)
    qtbot.addWidget(chart)
    chart.set_spec(stack_spec)
    chart.resize(1100, 700)
    chart.show()
    qtbot.waitExposed(chart)
    return chart


def centre_of(stack, row=1):
    view = stack.rows[row].view
    return stack.mapFromScene(view.mapToScene(view.rect().center()))


def wheel(stack, turns, modifiers=Qt.KeyboardModifier.NoModifier):
    at_point = QPointF(centre_of(stack))
    event = QWheelEvent(
        at_point, stack.viewport().mapToGlobal(at_point), QPoint(), QPoint(0, 120 * turns),
        Qt.MouseButton.NoButton, modifiers, Qt.ScrollPhase.NoScrollPhase, False,
    )  # fmt: skip
    QApplication.sendEvent(stack.viewport(), event)


def test_one_instant_stands_in_one_column_of_every_row(stack):
    columns = {
        (round(row.view.mapToScene(row.view.rect().topLeft()).x(), 3), row.view.rect().width()) for row in stack.rows
    }
    assert len(columns) == 1
    stack.set_window(at(100), at(200))
    assert {tuple(row.view.viewRange()[0]) for row in stack.rows} == {(6000.0, 12000.0)}


@pytest.mark.parametrize(
    ("key", "modifiers", "shift"),
    [
        (Qt.Key.Key_Right, Qt.KeyboardModifier.NoModifier, 1 / 8),
        (Qt.Key.Key_Left, Qt.KeyboardModifier.NoModifier, -1 / 8),
        (Qt.Key.Key_Right, Qt.KeyboardModifier.ShiftModifier, 1 / 2),
    ],
)
def test_arrows_pan(stack, qtbot, key, modifiers, shift):
    stack.set_window(at(200), at(280))
    qtbot.keyClick(stack, key, modifiers)
    assert stack.in_view == (at(200 + 80 * shift), at(280 + 80 * shift))


def test_plus_and_minus_zoom_about_the_middle(stack, qtbot):
    stack.set_window(at(200), at(280))
    qtbot.keyClick(stack, Qt.Key.Key_Plus)
    assert stack.in_view == (at(220), at(260))
    qtbot.keyClick(stack, Qt.Key.Key_Minus)
    assert stack.in_view == (at(200), at(280))


def test_home_end_and_all(stack, qtbot):
    stack.set_window(at(200), at(300))
    qtbot.keyClick(stack, Qt.Key.Key_Home)
    assert stack.in_view == (at(-2), at(98))
    qtbot.keyClick(stack, Qt.Key.Key_End)
    assert stack.in_view == (at(382), at(482))
    qtbot.keyClick(stack, Qt.Key.Key_0)
    assert stack.in_view == (START, at(480))


def test_other_keys_are_left_to_the_window(stack, qtbot):
    before = stack.in_view
    qtbot.keyClick(stack, Qt.Key.Key_F1)
    qtbot.keyClick(stack, Qt.Key.Key_Tab)
    assert stack.in_view == before


def test_the_wheel_zooms_in_time_only_and_keeps_the_instant_under_it(stack):
    heights = [row.view.viewRange()[1] for row in stack.rows]
    stack.set_window(at(100), at(300))
    wheel(stack, 1)
    start, end = stack.in_view
    assert end - start == pytest.approx(0.8 * 200 * 60e6, rel=1e-6)
    assert (start + end) / 2 == pytest.approx(at(200), abs=60e6)
    assert [row.view.viewRange()[1] for row in stack.rows] == heights


def test_wheel_with_shift_pans(stack):
    stack.set_window(at(100), at(300))
    wheel(stack, -1, Qt.KeyboardModifier.ShiftModifier)
    assert stack.in_view == (at(120), at(320))


def test_dragging_pans_and_leaves_heights_alone(stack, qtbot):
    stack.set_window(at(100), at(300))
    heights = [row.view.viewRange()[1] for row in stack.rows]
    middle, port = centre_of(stack), stack.viewport()
    qtbot.mousePress(port, Qt.MouseButton.LeftButton, pos=middle)
    for dx in (20, 60, 100):
        qtbot.mouseMove(port, middle + QPoint(dx, 15))
        qtbot.wait(5)
    qtbot.mouseRelease(port, Qt.MouseButton.LeftButton, pos=middle + QPoint(100, 15))
    start, end = stack.in_view
    moved = (at(100) - start) / (end - start) * stack.rows[1].view.rect().width()
    assert moved == pytest.approx(100, abs=25)
    assert [row.view.viewRange()[1] for row in stack.rows] == heights


def test_the_window_stays_inside_the_episode(stack):
    stack.set_window(at(-5000), at(-4000))
    low = stack.in_view[0]
    stack.set_window(at(0), at(0) + 1)
    assert stack.in_view[1] - stack.in_view[0] == LEAST_SPAN
    stack.set_window(at(-(10**6)), at(10**6))
    assert stack.in_view[0] == low
    assert stack.in_view[1] - stack.in_view[0] < 1.1 * (at(480) - START)


def test_the_crosshair_says_where_it_is(stack, qtbot):
    stack.set_window(at(100), at(300))
    with qtbot.waitSignal(stack.instant_changed) as caught:
        stack._moved(stack.mapToScene(centre_of(stack)))
    assert caught.args[0] == pytest.approx(at(200), abs=30e6)
    assert isinstance(caught.args[0], int)
    assert all(row.cross.isVisible() for row in stack.rows)
    with qtbot.waitSignal(stack.instant_changed) as caught:
        stack.point_at(None)
    assert caught.args == [None]
    assert not any(row.cross.isVisible() for row in stack.rows)


def test_keys_move_the_crosshair_and_open_what_is_under_it(stack, qtbot):
    stack.set_window(at(0), at(100))
    control = Qt.KeyboardModifier.ControlModifier
    qtbot.keyClick(stack, Qt.Key.Key_Right, control)
    assert stack.instant == at(51)
    for _ in range(2):
        qtbot.keyClick(stack, Qt.Key.Key_Left, control)
    assert stack.instant == at(49)
    stack.point_at(at(70))
    with qtbot.waitSignal(stack.bracket_activated) as caught:
        qtbot.keyClick(stack, Qt.Key.Key_Return)
    assert caught.args[0].word == "better"
    qtbot.keyClick(stack, Qt.Key.Key_Escape)
    assert stack.instant is None
    assert stack.in_view == (at(0), at(100))


def test_settings_in_force_at_an_instant(stack):
    assert stack.settings_at(at(100)).ipap == 15
    assert stack.settings_at(at(10)).ipap is None
    assert stack.settings_at(at(210)) is None  # a break
    assert stack.settings_at(at(-5)) is None


def test_a_click_gives_the_bracket_or_the_tick_under_it(stack, qtbot):
    row = stack.rows[1]
    x = float(row.frame().x(row.seconds(at(70))))
    point = stack.mapFromScene(row.view.mapToScene(QPointF(x, 20)))
    with qtbot.waitSignal(stack.bracket_activated) as caught:
        qtbot.mouseClick(stack.viewport(), Qt.MouseButton.LeftButton, pos=point)
    assert caught.args[0].word == "better"
    ribbon = stack.rows[0]
    x = float(ribbon.frame().x(ribbon.seconds(at(230))))
    point = stack.mapFromScene(ribbon.view.mapToScene(QPointF(x, 10)))
    with qtbot.waitSignal(stack.tick_activated) as caught:
        qtbot.mouseClick(stack.viewport(), Qt.MouseButton.LeftButton, pos=point)
    assert caught.args[0].word == "18/6"


def test_reduced_data_are_announced(qtbot, stack, stack_spec):
    import numpy as np

    from app.chart.shapes import PanelSpec, Scale, Trace

    t = np.linspace(START, at(480), 50_000).astype(np.int64)
    dense = PanelSpec("d", "d", (Trace("d", "d", "%", t, np.sin(t / 1e9)),), (Scale("%", -1, 1),))
    with qtbot.waitSignal(stack.reduced_changed) as caught:
        stack.set_spec(replace(stack_spec, panels=(dense,), reduced_word="reduced"))
    assert caught.args == [True]
    with qtbot.waitSignal(stack.reduced_changed) as caught:
        stack.set_window(at(100), at(105))
    assert caught.args == [False]


def test_a_new_theme_keeps_the_window(stack):
    stack.set_window(at(100), at(200))
    before = stack.grab().toImage()
    stack.set_theme(DARK)
    assert stack.in_view == (at(100), at(200))
    assert stack.grab().toImage() != before


def test_screen_readers_get_name_and_summary(stack):
    assert stack.accessibleName() == "Bed 3"
    assert stack.accessibleDescription() == "Bed 3 in words"


def test_focus_is_visible(stack, qtbot):
    stack.activateWindow()
    qtbot.waitUntil(stack.isActiveWindow)
    stack.setFocus()
    QApplication.processEvents()
    focused = stack.grab().toImage()
    stack.clearFocus()
    QApplication.processEvents()
    assert stack.grab().toImage() != focused


def test_a_stack_that_showed_another_episode_looks_like_a_new_one(stack, stack_spec, qtbot):
    fewer = replace(stack_spec, panels=stack_spec.panels[1:], events=(), ribbon=None)
    stack.set_spec(fewer)
    fresh = PanelStack(LIGHT)
    qtbot.addWidget(fresh)
    fresh.set_spec(fewer)
    fresh.resize(stack.size())
    fresh.show()
    qtbot.waitExposed(fresh)
    for chart in (stack, fresh):
        chart.clearFocus()
        chart.setFocusPolicy(Qt.FocusPolicy.NoFocus)
    QApplication.processEvents()
    assert stack.grab().toImage() == fresh.grab().toImage()
    stack.set_spec(stack_spec)
    fresh.set_spec(stack_spec)
    QApplication.processEvents()
    assert stack.grab().toImage() == fresh.grab().toImage()


def test_another_episode_of_the_same_shape_is_drawn_whole(stack, stack_spec, qtbot):
    """No row changes its size then, so nothing may wait for a new size to be drawn."""
    other = replace(stack_spec, name="another", summary="another episode")
    before = stack.grab().toImage()
    stack.set_spec(other)
    assert stack.grab().toImage() == before
