"""The lines of the acid-base map: iso-bicarbonate lines and the bands of acute and chronic hypercapnia.

The bands are the limits that the classification of a gas goes by (`core.physiology.classification`), so that the
map and the words can never tell different stories:

acute    bicarbonate within 2 mmol/L of the acute rule, +1 mmol/L per +10 mmHg
chronic  from 2 mmol/L under the chronic rule (+3.5 per +10 mmHg) to 2 above its steepest printed form (+5)

Both begin at a PaCO2 of 45 mmHg (6.0 kPa) and overlap up to about 56 mmHg, where the rules lie too close together
to tell acute from chronic. Sources as in `core.physiology.compensation`.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np
from numpy.typing import NDArray

from core.physiology import compensation
from core.physiology.acid_base import ph_from_bicarbonate
from core.physiology.classification import HCO3_TOLERANCE

Values = NDArray[np.float64]
HYPERCAPNIA_MMHG: Final = 45.0
NORMAL: Final = (35.0, 45.0, 7.35, 7.45)
"""PaCO2 low and high in mmHg, pH low and high."""
ISO_BICARBONATE: Final = (10.0, 15.0, 20.0, 24.0, 30.0, 35.0, 40.0, 50.0)


@dataclass(frozen=True, slots=True, eq=False)
class IsoLine:
    """pH over PaCO2 (mmHg) at one bicarbonate; both of shape (n,)."""

    hco3_mmol_L: float
    paco2_mmHg: Values
    ph: Values


@dataclass(frozen=True, slots=True, eq=False)
class Band:
    """Lowest and highest pH over PaCO2 (mmHg), each of shape (n,)."""

    key: str
    paco2_mmHg: Values
    ph_low: Values
    ph_high: Values


@dataclass(frozen=True, slots=True, eq=False)
class MapLines:
    """Everything drawn behind the gases."""

    iso: tuple[IsoLine, ...]
    bands: tuple[Band, ...]
    normal: tuple[float, float, float, float] = NORMAL


def map_lines(low_mmHg: float, high_mmHg: float, points: int = 161) -> MapLines:
    """The lines between two PaCO2 in mmHg.

    Raises:
        ValueError: the range is empty or not above zero.

    >>> lines = map_lines(20.0, 120.0)
    >>> [band.key for band in lines.bands]
    ['acute', 'chronic']
    >>> [float(lines.iso[3].hco3_mmol_L), round(float(lines.iso[3].ph[32]), 2)]  # 24 mmol/L at 40 mmHg
    [24.0, 7.39]
    """
    if not 0.0 < low_mmHg < high_mmHg:
        raise ValueError(f"PaCO2 from {low_mmHg:g} to {high_mmHg:g} mmHg: an increasing range above 0 is accepted")
    paco2 = np.linspace(low_mmHg, high_mmHg, points)
    iso = tuple(IsoLine(h, paco2, _ph(paco2, np.full(points, h))) for h in ISO_BICARBONATE)
    from_mmHg = max(HYPERCAPNIA_MMHG, low_mmHg)
    if from_mmHg >= high_mmHg:
        return MapLines(iso, ())
    return MapLines(iso, _bands(np.linspace(from_mmHg, high_mmHg, points)))


def _bands(paco2: Values) -> tuple[Band, ...]:
    acute = np.asarray(compensation.expected_hco3_acute(paco2))
    chronic = np.asarray(compensation.expected_hco3_chronic(paco2))
    steepest = np.asarray(compensation.expected_hco3_chronic(paco2, compensation.CHRONIC_GAIN_HIGH))
    around = HCO3_TOLERANCE
    return (
        Band("acute", paco2, _ph(paco2, acute - around), _ph(paco2, acute + around)),
        Band("chronic", paco2, _ph(paco2, chronic - around), _ph(paco2, steepest + around)),
    )


def _ph(paco2: Values, hco3: Values) -> Values:
    return np.asarray(ph_from_bicarbonate(paco2, hco3), dtype=np.float64)
