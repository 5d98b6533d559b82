"""A panel that cannot be drawn honestly is refused when it is made."""

import numpy as np
import pytest

from app.chart.shapes import Band, PanelSpec, Scale, Trace

NOTHING = np.empty(0)


def trace(unit):
    return Trace("c", "c", unit, NOTHING.astype(np.int64), NOTHING)


@pytest.mark.parametrize(
    ("traces", "scales", "words"),
    [
        ((), (), "one or two units"),
        ((), (Scale("mL", 0, 1), Scale("mL", 0, 2)), "one or two units"),
        ((), (Scale("a", 0, 1), Scale("b", 0, 1), Scale("c", 0, 1)), "one or two units"),
        ((trace("L/min"),), (Scale("mL", 0, 1),), "unit 'L/min' in panel 'p'"),
        ((), (Scale("mL", 5, 5),), "must lie below"),
        ((), (Scale("mL", float("nan"), 5),), "must lie below"),
    ],
)
def test_scales_and_units_must_fit(traces, scales, words):
    with pytest.raises(ValueError, match=words):
        PanelSpec("k", "p", traces, scales)


def test_a_band_needs_a_scale_of_its_unit():
    with pytest.raises(ValueError, match="'%'"):
        PanelSpec("k", "p", (), (Scale("mL", 0, 1),), bands=(Band(88, 92, "%"),))
