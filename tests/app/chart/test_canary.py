"""Guards the versions that are pinned: PySide6 6.12.0 loses a reference to None at each void QPainter call
(an abort after some 300 repaints on Python 3.11), and PySide6 6.11 breaks pyqtgraph 0.14's SVG export."""

import gc
import sys

import numpy as np
import pyqtgraph as pg
import pytest
from pyqtgraph.exporters import SVGExporter
from PySide6.QtGui import QPainter, QPdfWriter

from app.chart.stack import PanelStack
from app.look.theme import LIGHT
from tests.app.chart.conftest import START, at


@pytest.fixture
def stack(qtbot, stack_spec):
    chart = PanelStack(LIGHT)
    qtbot.addWidget(chart)
    chart.set_spec(stack_spec)
    chart.resize(900, 600)
    chart.show()
    qtbot.waitExposed(chart)
    return chart


def pan(stack, steps):
    for n in range(steps):
        start = at(n % 100)
        stack.set_window(start, start + 200 * 60_000_000)
        stack.viewport().repaint()


def test_300_repaints_leave_none_alone(stack):
    pan(stack, 20)
    gc.collect()
    before = sys.getrefcount(None)
    pan(stack, 300)
    gc.collect()
    lost = abs(sys.getrefcount(None) - before)
    assert lost < 300  # a leak of one at each void call would be tens of thousands


def test_stock_svg_export_and_a_pdf(qapp, tmp_path):
    window = pg.GraphicsLayoutWidget()
    plot = window.addPlot()
    plot.plot(np.arange(10.0), np.arange(10.0))
    window.resize(300, 200)
    window.show()
    qapp.processEvents()
    SVGExporter(plot).export(str(tmp_path / "x.svg"))
    assert "<path" in (tmp_path / "x.svg").read_text(encoding="utf-8")
    writer = QPdfWriter(str(tmp_path / "x.pdf"))
    painter = QPainter(writer)
    window.scene().render(painter)
    painter.end()
    assert (tmp_path / "x.pdf").read_bytes().startswith(b"%PDF")
    window.hide()


def resident() -> int:
    """Resident memory in bytes (Linux only)."""
    with open("/proc/self/statm", encoding="ascii") as file:
        return int(file.read().split()[1]) * 4096


@pytest.mark.soak
@pytest.mark.skipif(not sys.platform.startswith("linux"), reason="reads /proc")
def test_5000_repaints_leave_memory_steady(stack, stack_spec):
    pan(stack, 500)
    gc.collect()
    before = resident()
    pan(stack, 5000)
    gc.collect()
    assert resident() - before < 8_000_000


@pytest.mark.soak
@pytest.mark.skipif(not sys.platform.startswith("linux"), reason="reads /proc")
def test_200_new_episodes_leave_memory_steady(stack, stack_spec, qapp):
    def change(times):
        for _ in range(times):
            stack.set_spec(stack_spec)
            qapp.processEvents()
        gc.collect()

    change(40)
    before = resident()
    change(200)
    assert resident() - before < 15_000_000
    assert stack.in_view[0] == START
