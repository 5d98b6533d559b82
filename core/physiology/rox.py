"""ROX, ROX-HR and mROX. Validated in high-flow nasal oxygen, not in mask ventilation: every use says so.

SpO2 in %, FiO2 as a fraction, rates per minute, PaO2 in mmHg. Shapes: scalars or arrays that broadcast.
"""

from __future__ import annotations

from typing import Final

from core.physiology.elementary import N
from core.physiology.formula import POSITIVE, formula
from core.record.message import Message

VALIDATED_IN_HIGH_FLOW: Final = Message("caveat.validated_in_high_flow")
"""The caveat that travels with every figure of this module."""

LOW_RISK_AT_OR_ABOVE = 4.88
"""Lower risk of intubation at 2, 6 and 12 h (Roca, AJRCCM 2019;199:1368)."""
FAILURE_BELOW: Final = ((2.0, 2.85), (6.0, 3.47), (12.0, 3.85))
"""Hours on high flow, and the ROX below which failure is likely (the same source)."""


@formula(POSITIVE)
def rox(spo2: N, fio2: N, rr: N) -> N:
    """ROX index: (SpO2 % / FiO2) / respiratory rate. Source: Roca, AJRCCM 2019;199:1368.

    >>> round(rox(92.0, 0.60, 28.0), 2)
    5.48
    """
    return spo2 / fio2 / rr


@formula(POSITIVE)
def rox_hr(spo2: N, fio2: N, rr: N, hr: N) -> N:
    """ROX-HR: ROX / heart rate x 100. Source: Goh, J Intensive Care 2020;8:41.

    >>> round(rox_hr(92.0, 0.60, 28.0, 110.0), 2)
    4.98
    """
    return spo2 / fio2 / rr / hr * 100.0


@formula(POSITIVE)
def mrox(pao2: N, fio2: N, rr: N) -> N:
    """mROX: (PaO2 mmHg / FiO2) / respiratory rate. Source: BMC Pulm Med 2022 (n = 75).

    >>> round(mrox(65.0, 0.60, 28.0), 2)
    3.87
    """
    return pao2 / fio2 / rr


def rox_reading(index: float, hours: float) -> Message:
    """What a ROX index says after some hours on high-flow oxygen, by the last published time point reached.

    Before 2 h there is no cut-off; between the cut-offs is a grey zone. Never for mask ventilation.

    >>> rox_reading(5.5, 3.0).key, rox_reading(3.0, 7.0).key, rox_reading(3.0, 3.0).key
    ('rox.low_risk', 'rox.failure_likely', 'rox.grey_zone')
    """
    if not index > 0 or not hours >= 0:
        return Message("rox.not_known")
    reached = [cut for at, cut in FAILURE_BELOW if hours >= at]
    if not reached:
        return Message("rox.too_early", {"hours": hours, "first_hours": FAILURE_BELOW[0][0]})
    values = {
        "rox": index,
        "hours": hours,
        "failure_below": reached[-1],
        "low_risk_from": LOW_RISK_AT_OR_ABOVE,
    }
    if index >= LOW_RISK_AT_OR_ABOVE:
        return Message("rox.low_risk", values)
    return Message("rox.failure_likely" if index < reached[-1] else "rox.grey_zone", values)
