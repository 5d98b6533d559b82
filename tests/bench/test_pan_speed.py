"""A pan step of six panels with two curves each, against stock pyqtgraph and against our own short series.

Ratios of interleaved medians inside one run: the machine's own speed cancels out.
"""

from statistics import median
from time import perf_counter
from zoneinfo import ZoneInfo

import numpy as np
import pyqtgraph as pg
import pytest

from app.chart.shapes import PanelSpec, Scale, StackSpec, Trace
from app.chart.stack import PanelStack
from app.look.theme import LIGHT

SECOND, HOUR = 1_000_000, 3_600_000_000
ORIGIN = 1_774_640_000 * SECOND
SPAN = 72 * HOUR
PANELS, CURVES, WIDTH, HEIGHT = 6, 2, 1280, 800
STEP = SPAN // 200
ROUNDS = 40


def arrays(samples: int, seed: int) -> tuple[np.ndarray, np.ndarray]:
    """Irregular device samples over 72 h, with a few missing ones."""
    rng = np.random.default_rng(seed)
    t = ORIGIN + np.linspace(0, SPAN, samples).astype(np.int64)
    v = 50 + 20 * np.sin(np.arange(samples) * 20 / samples) + rng.normal(size=samples) * 4
    v[rng.integers(0, samples, samples // 500)] = np.nan
    return t, v


class Ours:
    def __init__(self, samples: int) -> None:
        def trace(panel: int, n: int) -> Trace:
            t, v = arrays(samples, 10 * panel + n)
            return Trace(f"c{n}", f"c{n}", "%", t, v, gap=20 * SPAN // samples)

        panels = tuple(
            PanelSpec(f"p{p}", f"panel {p}", tuple(trace(p, n) for n in range(CURVES)), (Scale("%", 0, 100),))
            for p in range(PANELS)
        )
        self.view = PanelStack(LIGHT)
        self.view.set_spec(StackSpec(ZoneInfo("UTC"), ORIGIN, ORIGIN + SPAN, panels))
        self.view.resize(WIDTH, HEIGHT)

    def step(self, n: int) -> None:
        start = ORIGIN + n * STEP
        self.view.set_window(start, start + SPAN - STEP)


class Stock:
    """The same picture by PlotItem.plot, with its own automatic downsampling and clipping to the view."""

    def __init__(self, samples: int) -> None:
        self.view = pg.GraphicsLayoutWidget()
        self.view.resize(WIDTH, HEIGHT)
        self.plots = []
        for panel in range(PANELS):
            plot = self.view.addPlot(row=panel, col=0)
            plot.setYRange(0, 100)
            plot.setDownsampling(auto=True, mode="peak")
            plot.setClipToView(True)
            for n in range(CURVES):
                t, v = arrays(samples, 10 * panel + n)
                plot.plot((t - ORIGIN) / SECOND, v, pen=pg.mkPen("k", width=1))
            if self.plots:
                plot.setXLink(self.plots[0])
            self.plots.append(plot)

    def step(self, n: int) -> None:
        start = n * STEP / SECOND
        self.plots[0].setXRange(start, start + (SPAN - STEP) / SECOND, padding=0)


def cost(chart, n: int, app) -> float:
    began = perf_counter()
    chart.step(n)
    chart.view.viewport().repaint()  # at once, and once
    took = perf_counter() - began
    app.processEvents()
    return took


@pytest.mark.bench
def test_pan_step(qapp, capsys):
    charts = {"ours 259,200": Ours(259_200), "ours 4,320": Ours(4_320), "stock 259,200": Stock(259_200)}
    for chart in charts.values():
        chart.view.show()
    qapp.processEvents()
    costs: dict[str, list[float]] = {name: [] for name in charts}
    for n in range(ROUNDS + 5):
        for name, chart in charts.items():
            took = cost(chart, n % 2, qapp)
            if n >= 5:  # the first rounds build what is kept for the next ones
                costs[name].append(took)
    middle = {name: median(values) for name, values in costs.items()}
    against_stock = middle["ours 259,200"] / middle["stock 259,200"]
    against_short = middle["ours 259,200"] / middle["ours 4,320"]
    with capsys.disabled():
        print("\npan step, 6 panels x 2 curves, 72 h less one step, 1280 px")
        for name, value in middle.items():
            print(f"  {name:<14} {value * 1000:7.2f} ms")
        print(f"  against stock pyqtgraph      {against_stock:.2f}  (limit 0.40)")
        print(f"  against our own 4,320 samples {against_short:.2f}  (limit 1.50)")
    for chart in charts.values():
        chart.view.hide()
    assert against_stock <= 0.4
    assert against_short <= 1.5
