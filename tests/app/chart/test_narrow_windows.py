"""Words on a narrow chart: what matters stays, and none lies over another."""

from dataclasses import replace
from itertools import pairwise

import pytest
from hypothesis import given
from hypothesis import strategies as st
from PySide6.QtCore import Qt

from app.chart.ribbon import placed_beside
from app.chart.shapes import StackSpec, Tick
from app.chart.stack import PanelStack
from app.look.theme import LIGHT, GasState
from tests.app.chart.conftest import START, ZONE, at
from tests.app.chart.test_panel import image_of

PLACES = st.lists(st.tuples(st.integers(-40, 400), st.integers(4, 90)), max_size=14).map(sorted)


@given(PLACES)
def test_no_word_of_the_ribbon_lies_over_another_or_over_a_tick(rows):
    places, widths = [float(x) for x, _ in rows], [float(w) for _, w in rows]
    lefts = placed_beside(places, widths, 0.0, 360.0, gap=5.0)
    spans = sorted((x, x + w) for x, w in zip(lefts, widths, strict=True) if x is not None)
    assert all(a[1] <= b[0] for a, b in pairwise(spans))
    assert all(a >= 0 and b <= 360 for a, b in spans)
    assert all(not a < place < b for place in places for a, b in spans)


@pytest.mark.parametrize("minutes", [480, 900, 1600])
def test_the_state_of_a_bracket_is_seen_however_narrow_its_window(qapp, gas_panel, minutes):
    first = replace(gas_panel.brackets[0], state=GasState.SEVERE, state_word="severe", word="no clear change")
    none = replace(first, state=None, state_word="")

    def drawn(bracket):
        panel = replace(gas_panel, brackets=(bracket,))
        return image_of(StackSpec(ZONE, START, at(minutes), (panel,)), LIGHT, 700, 260)

    assert drawn(first) != drawn(none)


@pytest.fixture
def stack(qtbot, stack_spec):
    chart = PanelStack(LIGHT)
    qtbot.addWidget(chart)
    chart.set_spec(stack_spec)
    chart.resize(900, chart.minimumSizeHint().height())
    chart.show()
    qtbot.waitExposed(chart)
    return chart


def test_the_clock_stands_at_the_foot_of_what_is_seen(stack):
    own = stack.axis.item.sceneBoundingRect()
    stack.hold_axis_above(300)
    held = stack.axis.item.sceneBoundingRect()
    assert held.bottom() == pytest.approx(own.bottom() - stack.height() + 300)
    stack.hold_axis_above(None)
    assert stack.axis.item.sceneBoundingRect() == own


def test_an_event_under_the_crosshair_is_told_whole(stack, stack_spec):
    whole = "Told: medical registrar, who was busy and will come within the hour, and asks for another gas before"
    spec = replace(stack_spec, events=(Tick(at(30), "Mask on"), Tick(at(33), whole)))
    stack.set_spec(spec)
    elsewhere = stack.grab().toImage()
    assert stack.events_at(at(200)) == ()
    stack.point_at(at(33))
    assert [t.word for t in stack.events_at(at(33))][-1] == whole
    assert stack.grab().toImage() != elsewhere


def test_ctrl_with_an_arrow_is_the_chart_s_before_any_shortcut(stack, qtbot):
    from PySide6.QtGui import QKeySequence, QShortcut

    taken = []
    shortcut = QShortcut(QKeySequence("Ctrl+Right"), stack)
    shortcut.activated.connect(lambda: taken.append(1))
    stack.setFocus()
    qtbot.keyClick(stack, Qt.Key.Key_Right, Qt.KeyboardModifier.ControlModifier)
    assert stack.instant is not None
    assert taken == []
