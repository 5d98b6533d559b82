"""The acid-base map: places, picking, keys."""

from dataclasses import replace

import pytest
from PySide6.QtCore import QPointF, QRectF, Qt

from app.chart.acid_base_map import AcidBaseMap
from app.look.theme import DARK, LIGHT


@pytest.fixture
def chart(qtbot, map_spec):
    made = AcidBaseMap(LIGHT)
    qtbot.addWidget(made)
    made.set_spec(map_spec)
    made.resize(600, 500)
    made.show()
    qtbot.waitExposed(made)
    return made


def test_the_corners_of_the_scales_are_the_corners_of_the_plot(chart):
    plot = chart._plot(QRectF(chart.rect()))
    assert (chart._x(plot, 20.0), chart._x(plot, 110.0)) == (plot.left(), plot.right())
    assert (chart._y(plot, 7.0), chart._y(plot, 7.6)) == (plot.bottom(), plot.top())


def test_a_gas_is_found_where_it_is_drawn(chart, map_spec, qtbot):
    points = chart._gas_points(chart._plot(QRectF(chart.rect())))
    assert chart.gas_at(points[1]).word == "second"
    assert chart.gas_at(QPointF(1, 1)) is None
    heard = []
    chart.hovered.connect(heard.append)
    qtbot.mouseMove(chart, points[0].toPoint())
    qtbot.waitUntil(lambda: heard == ["first"])


def test_keys_go_along_the_path(chart, qtbot):
    qtbot.keyClick(chart, Qt.Key.Key_Right)
    qtbot.keyClick(chart, Qt.Key.Key_Right)
    assert chart.accessibleDescription() == "second"
    with qtbot.waitSignal(chart.gas_activated) as caught:
        qtbot.keyClick(chart, Qt.Key.Key_Return)
    assert caught.args[0].number == 2
    qtbot.keyClick(chart, Qt.Key.Key_F1)  # unknown keys are no error


def test_every_part_is_drawn(chart, map_spec):
    pictures = [chart.grab().toImage()]
    for part in ("lines", "bands", "gases"):
        chart.set_spec(replace(map_spec, **{part: ()}))
        pictures.append(chart.grab().toImage())
    chart.set_spec(replace(map_spec, normal=(35, 45, 7.35, 7.45), normal_word="normal"))
    pictures.append(chart.grab().toImage())
    chart.set_spec(map_spec)
    chart.set_theme(DARK)
    pictures.append(chart.grab().toImage())
    assert all(a != b for n, a in enumerate(pictures) for b in pictures[:n])


def test_numbers_on_a_knot_of_gases_do_not_lie_on_each_other(chart, map_spec):
    knot = tuple(replace(map_spec.gases[0], number=n, ph=7.30 + n / 1000, paco2=60 + n / 10) for n in range(4))
    chart.set_spec(replace(map_spec, gases=knot))
    assert not chart.grab().isNull()
