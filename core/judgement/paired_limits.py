"""Limits with two printed forms (45 mmHg / 6.0 kPa), compared so that the unit never decides.

Both the value and the limit are taken in tenths of a kPa, half up: the coarser of the two prints. So a ward in
mmHg and a ward in kPa get the same judgement of the same blood.
"""

from __future__ import annotations

from math import floor, isnan

from core.judgement.policy_sections import Limit
from core.record.units import MMHG_PER_KPA


def tenths_of_kpa(mmhg: float) -> int:
    """A pressure in mmHg as whole tenths of a kPa, half up.

    >>> tenths_of_kpa(45.0), tenths_of_kpa(49.0), tenths_of_kpa(60.0)
    (60, 65, 80)
    """
    return floor(mmhg / MMHG_PER_KPA * 10.0 + 0.5 + 1e-9)


def limit_tenths(limit: Limit) -> int:
    """The limit in tenths of a kPa: its printed kPa form, else converted from mmHg."""
    return round(limit.kpa * 10) if limit.kpa is not None else tenths_of_kpa(limit.value)


def above(mmhg: float, limit: Limit) -> bool:
    """Whether a pressure is above a paired limit; NaN never is.

    >>> limit = Limit(45.0, "BTS", "confirmed", 6.0)
    >>> above(45.2, limit), above(46.0, limit), above(6.05 * MMHG_PER_KPA, limit)
    (False, True, True)
    """
    return not isnan(mmhg) and tenths_of_kpa(mmhg) > limit_tenths(limit)


def below(mmhg: float, limit: Limit) -> bool:
    """Whether a pressure is below a paired limit; NaN never is."""
    return not isnan(mmhg) and tenths_of_kpa(mmhg) < limit_tenths(limit)
