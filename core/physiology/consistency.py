"""Does a gas agree with itself? Henderson-Hasselbalch, the gradient's sign, and the saturation.

Only actual bicarbonate is checked. A disagreement is never repaired in silence: the usual explanations are
offered, and the person who has the slip in hand decides.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from math import isfinite

from core.physiology.acid_base import bicarbonate
from core.physiology.constants import KPA_IN_MMHG
from core.physiology.elementary import N
from core.physiology.formula import formula
from core.physiology.oxygenation import aa_gradient_full
from core.physiology.pressure import above_pressure_limit
from core.record.message import Message

TOLERANCE = 2.0
"""mmol/L between reported and calculated bicarbonate (common practice; 1 for an analyser's own output)."""
_STANDARD_LOWER_BY = 10.0
"""Published group tables print standard bicarbonate 4-7 below actual in hypercapnia; 10 bounds the guess."""


@formula()
def bicarbonate_difference(ph: N, paco2: N, hco3: N) -> N:
    """Reported minus calculated actual bicarbonate, mmol/L (Henderson-Hasselbalch, s = 0.0307).

    >>> round(bicarbonate_difference(7.31, 50.0, 31.0), 1)
    6.1
    """
    return hco3 - bicarbonate(ph, paco2)


@dataclass(frozen=True, slots=True)
class Agreement:
    """Whether a gas agrees with itself: `consistent` is None where a value is missing.

    `difference` is reported minus calculated bicarbonate, mmol/L. `explanations` are the usual ones, likeliest
    first, each only where it would explain the difference.
    """

    difference: float
    consistent: bool | None
    explanations: tuple[Message, ...] = ()


def bicarbonate_agreement(
    ph: float, paco2: float, hco3: float, *, actual: bool = True, tolerance: float = TOLERANCE
) -> Agreement:
    """Check one gas; `actual` False (standard bicarbonate by the ward's setting) is not checked.

    >>> a = bicarbonate_agreement(7.30, 8.4, 30.0)
    >>> a.consistent, a.explanations[0].key
    (False, 'consistency.kpa_taken_for_mmhg')
    >>> bicarbonate_agreement(7.25, 60.0, 26.0).consistent
    True
    """
    difference = bicarbonate_difference(ph, paco2, hco3)
    if not actual or not isfinite(difference):
        return Agreement(difference, None)
    if abs(difference) <= tolerance + 1e-9:
        return Agreement(difference, True)
    return Agreement(difference, False, _explanations(ph, paco2, hco3, tolerance))


def _explanations(ph: float, paco2: float, hco3: float, tolerance: float) -> tuple[Message, ...]:
    found = []

    def agrees(ph: float, paco2: float, hco3: float) -> bool:
        return abs(bicarbonate_difference(ph, paco2, hco3)) <= tolerance + 1e-9

    if agrees(ph, paco2 * KPA_IN_MMHG, hco3):
        found.append(Message("consistency.kpa_taken_for_mmhg", {"paco2": paco2, "mmHg": paco2 * KPA_IN_MMHG}))
    if agrees(ph, paco2 / KPA_IN_MMHG, hco3):
        found.append(Message("consistency.mmhg_taken_for_kpa", {"paco2": paco2, "mmHg": paco2 / KPA_IN_MMHG}))
    short = bicarbonate(ph, paco2) - hco3
    if bool(above_pressure_limit(paco2, 6.0)) and tolerance < short <= _STANDARD_LOWER_BY:
        found.append(Message("consistency.standard_bicarbonate", {"hco3": hco3, "calculated": hco3 + short}))
    found.extend(_swapped(ph, paco2, hco3, agrees))
    found.append(Message("consistency.copying_slip", {"ph": ph, "paco2": paco2, "hco3": hco3}))
    return tuple(found)


def _swapped(ph: float, paco2: float, hco3: float, agrees: Callable[[float, float, float], bool]) -> list[Message]:
    """Two neighbouring digits typed the wrong way round: 42 for 24, 7.52 for 7.25."""
    found = []
    for name, shown in (("ph", f"{ph:.2f}"), ("paco2", f"{paco2:.4g}"), ("hco3", f"{hco3:.4g}")):
        for i in range(len(shown) - 1):
            a, b = shown[i], shown[i + 1]
            if "." in (a, b) or a == b:
                continue
            other = float(shown[:i] + b + a + shown[i + 2 :])
            gas = {"ph": ph, "paco2": paco2, "hco3": hco3} | {name: other}
            if agrees(gas["ph"], gas["paco2"], gas["hco3"]):
                found.append(Message("consistency.digits_swapped", {"channel": name, "typed": shown, "other": other}))
    return found


def gradient_doubt(pao2: float, paco2: float, fio2: float) -> Message | None:
    """A doubt where the A-a gradient is negative even by the full equation: FiO2 or a pressure cannot be right.

    >>> gradient_doubt(60.0, 92.0, 0.21).key
    'consistency.fio2_cannot_be_right'
    >>> gradient_doubt(65.0, 60.0, 0.21) is None
    True
    """
    gradient = aa_gradient_full(pao2, paco2, fio2)
    if not gradient < 0.0:
        return None
    values = {"pao2": pao2, "paco2": paco2, "fio2": fio2, "gradient": gradient}
    return Message("consistency.fio2_cannot_be_right", {**values})
