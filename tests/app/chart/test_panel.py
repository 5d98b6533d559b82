"""A panel: scales, gaps, doubt, looks, values off the scale, brackets."""

from dataclasses import replace

import numpy as np
import pytest
from PySide6.QtGui import QColor, QImage

from app.chart.brackets import rows_of
from app.chart.render import image_of
from app.chart.shapes import Bracket, Drawn, Look, PanelSpec, Scale, StackSpec, Trace
from app.chart.stack import PanelStack
from app.look.theme import LIGHT, THEMES, Verdict
from tests.app.chart.conftest import MINUTE, START, ZONE, at


def shown(qtbot, *panels, **more):
    chart = PanelStack(LIGHT)
    qtbot.addWidget(chart)
    chart.set_spec(StackSpec(ZONE, START, at(480), panels, **more))
    chart.resize(1000, 600)
    chart.show()
    return chart


def picture(*panels, width=800, height=300) -> QImage:
    return image_of(StackSpec(ZONE, START, at(480), panels), LIGHT, width, height)


def count(image: QImage, colour: str) -> int:
    wanted = QColor(colour).rgb()
    pixels = np.frombuffer(image.convertToFormat(QImage.Format.Format_RGB32).constBits(), np.uint32)
    return int((pixels == wanted).sum())


def single(t, v, drawn=Drawn.LINE, **more):
    trace = Trace("c", "c", "mL", np.asarray(t, np.int64), np.asarray(v, float), drawn, **more)
    return PanelSpec("p", "p", (trace,), (Scale("mL", 0, 100),))


INK = LIGHT.colours.channels[0]


def test_the_second_scale_is_normalised_to_the_first(qtbot, gas_panel):
    chart = shown(qtbot, gas_panel)
    row = chart.panels()[0]
    ph, paco2 = row.traces
    assert np.allclose(ph.on_scale(np.array([7.1, 7.5])), [7.1, 7.5])
    assert np.allclose(paco2.on_scale(np.array([40.0, 70.0, 100.0])), [7.1, 7.3, 7.5])
    assert next(word for _, word in row._ticks(row.spec.scales[1])) == "40"


def test_a_curve_gets_seconds_since_the_origin_exactly(qtbot):
    odd = START + 123_456_789
    chart = shown(qtbot, single([odd, odd + MINUTE, odd + 2 * MINUTE], [1, 2, 3]))
    row = chart.panels()[0]
    curve = row.traces[0].curves[0]
    assert np.round(curve.xData * 1e6).astype(np.int64).tolist() == (curve.shown.t - START).tolist()


def test_a_gap_is_not_joined():
    t = [at(m) for m in (10, 20, 400, 410)]
    joined, cut = picture(single(t, [50] * 4)), picture(single(t, [50] * 4, gap=60 * MINUTE))
    assert count(joined, INK) > count(cut, INK) + 300


def test_missing_values_break_the_line_and_lone_points_are_seen():
    t = [at(m) for m in (10, 200, 210, 300, 470)]
    nothing = picture(single(t, [np.nan] * 5))
    lone = picture(single(t, [np.nan, 50, np.nan, 60, np.nan]))
    assert count(lone, INK) >= count(nothing, INK) + 2 * 5


def test_doubtful_minutes_are_drawn_fainter(qtbot, device_panel):
    chart = shown(qtbot, device_panel)
    row = chart.panels()[0]
    unsure, sure = row.traces[0].curves
    assert unsure.opts["pen"].color() != sure.opts["pen"].color()
    inside = (sure.shown.t >= at(100)) & (sure.shown.t < at(130))
    assert not inside.any()
    assert unsure.shown.t.min() == at(99)  # joined to the last sure sample
    assert unsure.shown.t.max() == at(130)


@pytest.mark.parametrize("look", list(Look)[1:])
def test_each_look_differs_from_fresh(look):
    def one(value):
        return picture(single([at(240)], [50], Drawn.SPOTS, looks=np.array([value], np.uint8)))

    assert one(look) != one(Look.FRESH)


@pytest.mark.parametrize("drawn", [Drawn.SPOTS, Drawn.LINE, Drawn.STEPS])
@pytest.mark.parametrize("value", [-500.0, 500.0])
def test_a_value_off_the_scale_leaves_a_caret(drawn, value):
    t = [at(100), at(101), at(102)]
    assert count(picture(single(t, [value] * 3, drawn)), INK) > count(picture(single([], [], drawn)), INK) + 10


def test_steps_hold_until_the_next_value(qtbot):
    chart = shown(qtbot, single([at(0), at(100), at(200)], [10, 20, 20], Drawn.STEPS))
    row = chart.panels()[0]
    seen = row.traces[0].curves[0].shown
    assert list(zip(((seen.t - START) // MINUTE).tolist(), seen.v.tolist(), strict=True)) == [
        (0, 10), (100, 10), (100, 20), (200, 20), (200, 20)
    ]  # fmt: skip


@pytest.mark.parametrize("t", [[], [at(5)], [at(-900)], [at(9000)]])
@pytest.mark.parametrize("drawn", Drawn)
def test_little_or_nothing_to_draw_is_drawn(t, drawn):
    assert not picture(single(t, [50] * len(t), drawn)).isNull()


def test_readings_tell_value_age_look_and_doubt(qtbot, gas_panel, device_panel):
    chart = shown(qtbot, gas_panel, device_panel)
    found = {r.key: r for r in chart.readings_at(at(110.5))}
    assert (found["ph"].value, found["ph"].at, found["ph"].look) == (7.25, at(70), Look.DOUBTFUL)
    assert (found["vte"].at, found["vte"].doubt) == (at(110), "leak high")
    assert chart.readings_at(at(-1)) == ()
    across = {r.key: r for r in chart.readings_at(at(215))}
    assert across["vte"].at == at(199)  # in a gap: the last value, and its age


@pytest.mark.parametrize("theme", THEMES.values(), ids=list(THEMES))
def test_a_bracket_says_its_verdict(gas_panel, theme):
    def drawn(panel):
        return image_of(StackSpec(ZONE, START, at(480), (panel,)), theme, 900, 300)

    first = gas_panel.brackets[0]
    other = replace(gas_panel, brackets=(replace(first, verdict=Verdict.WORSE), *gas_panel.brackets[1:]))
    assert drawn(gas_panel) != drawn(other)


def test_overlapping_windows_stand_in_rows_of_their_own():
    def bracket(anchor):
        return Bracket(at(anchor), at(anchor + 30), at(anchor + 120), Verdict.MIXED, "mixed")

    assert rows_of(tuple(bracket(a) for a in (0, 40, 130, 200, 270))) == [0, 1, 0, 1, 0]
    assert rows_of(tuple(bracket(a) for a in range(0, 60, 10))) == [0, 1, 2, 2, 2, 2]


def test_a_bracket_is_picked_inside_its_window(qtbot, gas_panel):
    chart = shown(qtbot, gas_panel)
    row = chart.panels()[0]
    frame = row.frame()
    assert row.brackets.at(frame.x(row.seconds(at(60)))).word == "better"
    assert row.brackets.at(frame.x(row.seconds(at(120)))).word == "worse"
    assert row.brackets.at(frame.x(row.seconds(at(300)))) is None
