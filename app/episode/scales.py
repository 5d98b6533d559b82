"""The range of a panel's axes: a usual range for each channel, widened so that no value is cut off."""

from __future__ import annotations

from collections.abc import Sequence
from math import ceil, floor
from typing import Final

import numpy as np
from numpy.typing import NDArray

from app.chart.shapes import Area, Scale, Trace
from app.episode.panels import Panel
from app.episode.traces import shown_as

USUAL: Final = {
    "ph": (7.15, 7.45),
    "paco2": (30, 80),
    "pao2": (40, 100),
    "pf": (0, 400),
    "hco3": (15, 40),
    "hco3_calculated": (15, 40),
    "sbe": (-10, 15),
    "be": (-10, 15),
    "lactate": (0, 4),
    "rr": (0, 40),
    "rr_total": (0, 40),
    "hr": (40, 140),
    "spo2": (80, 100),
    "sbp": (60, 180),
    "dbp": (40, 120),
    "gcs": (3, 15),
    "temp": (35, 40),
    "dyspnoea": (0, 10),
    "ipap": (0, 30),
    "epap": (0, 30),
    "cpap": (0, 30),
    "pressure_support": (0, 30),
    "fio2": (0.2, 1.0),
    "o2_flow": (0, 15),
    "rate_set": (0, 30),
    "ti": (0, 2),
    "vte": (0, 800),
    "mv": (0, 20),
    "leak": (0, 60),
    "pip": (0, 30),
    "spont_percent": (0, 100),
}
"""Ranges at rest, in canonical units, so that two episodes look alike at first. Common practice, no source."""
_STEPS: Final = (0.01, 0.02, 0.05, 0.1, 0.2, 0.5, 1, 2, 5, 10, 20, 50, 100, 200, 500)


def scales_of(panel: Panel, traces: Sequence[Trace], gas_unit: str, areas: Sequence[Area] = ()) -> tuple[Scale, ...]:
    """One scale for each unit, in the order of the channels; an end that is fixed stays, the other follows."""
    by_unit: dict[str, list[str]] = {}
    for channel in panel.channels:
        by_unit.setdefault(shown_as(channel, gas_unit).unit, []).append(channel)
    made = []
    for n, (unit, channels) in enumerate(by_unit.items()):
        factors = [shown_as(c, gas_unit) for c in channels]
        low = min(USUAL.get(c, (0, 1))[0] * f.factor for c, f in zip(channels, factors, strict=True))
        high = max(USUAL.get(c, (0, 1))[1] * f.factor for c, f in zip(channels, factors, strict=True))
        values = [t.v for t in traces if t.unit == unit]
        values += [end for a in areas if a.unit == unit for end in (a.low, a.high)]
        low, high = widened(low, high, values)
        low, high = _fixed(panel.ends[n], factors[0].factor, low, high)
        made.append(Scale(unit, low, high, max(f.decimals for f in factors)))
    return tuple(made)


def _fixed(ends: tuple[float | None, float | None], factor: float, low: float, high: float) -> tuple[float, float]:
    new_low = low if ends[0] is None else ends[0] * factor
    new_high = high if ends[1] is None else ends[1] * factor
    if new_low >= new_high:  # one end was fixed beyond all values: it stays, the other makes room
        span = high - low
        return (new_low, new_low + span) if ends[0] is not None else (new_high - span, new_high)
    return new_low, new_high


def widened(low: float, high: float, values: Sequence[NDArray[np.float64]]) -> tuple[float, float]:
    """The range, with every finite value inside and round ends where it was widened."""
    finite = [v[np.isfinite(v)] for v in values]
    found = np.concatenate(finite) if finite else np.empty(0)
    if found.size == 0:
        return low, high
    least, most = float(found.min()), float(found.max())
    step = next((s for s in _STEPS if s >= (max(high, most) - min(low, least)) / 10), 1000)
    if 0 <= least <= low:
        low = max(floor((least - step * 0.25) / step) * step, 0.0)
    elif least < low:
        low = floor(least / step) * step
    if most >= high:
        high = ceil((most + step * 0.25) / step) * step
    return round(low, 4), round(high, 4)
