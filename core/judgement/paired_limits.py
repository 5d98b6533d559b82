"""The policy's limits with two printed forms (45 mmHg / 6.0 kPa): compared so that the unit never decides.

The rule itself, tenths of a kPa half up, is `core.physiology.pressure`; here it meets a `Limit`.
"""

from __future__ import annotations

from core.judgement.policy_sections import Limit
from core.physiology.pressure import above_pressure_limit, below_pressure_limit
from core.record.units import MMHG_PER_KPA


def _kpa(limit: Limit) -> float:
    return limit.kpa if limit.kpa is not None else limit.value / MMHG_PER_KPA


def above(mmhg: float, limit: Limit) -> bool:
    """Whether a pressure is above a paired limit; NaN never is.

    >>> limit = Limit(45.0, "BTS", "confirmed", 6.0)
    >>> above(45.2, limit), above(46.0, limit), above(6.05 * MMHG_PER_KPA, limit)
    (False, True, True)
    """
    return bool(above_pressure_limit(mmhg, _kpa(limit)))


def below(mmhg: float, limit: Limit) -> bool:
    """Whether a pressure is below a paired limit; NaN never is.

    >>> below(44.0, Limit(45.0, "BTS", "confirmed", 6.0))
    True
    """
    return bool(below_pressure_limit(mmhg, _kpa(limit)))


def wider_mmHg(limit: Limit) -> float:
    """The wider of both printed forms of a difference, in mmHg: a change must pass both to count.

    >>> round(wider_mmHg(Limit(3.3, "", "computed here", 0.44)), 4)
    3.3003
    """
    return limit.value if limit.kpa is None else max(limit.value, limit.kpa * MMHG_PER_KPA)
