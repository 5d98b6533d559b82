"""A difference beside the two numbers it lies between: it must be theirs as they are shown.

Values are shown rounded and judged exact. 239 and 194 differ by 45, what lies behind them by 45.5: printed as 46 it
reads like a slip. Where rounding parts the two, the difference carries one more digit; so it stays true, and no
verdict on measurement error reads as its opposite.
"""

from __future__ import annotations

from typing import Final

from app.look import formats
from core.record.units import MMHG_PER_KPA

DUST: Final = 6
"""Decimals at which binary dust ends."""


def difference_text(before: float, after: float, decimals: int) -> str:
    """After less before with its sign, in as many decimals as both are shown in, or one more where those disagree.

    >>> difference_text(7.28, 7.34, 2), difference_text(239.3, 193.8, 0), difference_text(60.0, 60.0, 0)
    ('+0.06', '−45.5', '0')
    """
    change = round(after - before, DUST)
    shown = formats.rounded(after, decimals) - formats.rounded(before, decimals)
    return formats.signed(change, decimals + (shown != formats.rounded(change, decimals)))


def pressure_difference(before: float, after: float, unit: str) -> str:
    """The same of two gas pressures in mmHg, in the reader's unit.

    >>> pressure_difference(62.6, 58.5, "mmHg"), pressure_difference(60.0, 75.0, "kPa")
    ('−4 mmHg', '+2.0 kPa')
    """
    factor = MMHG_PER_KPA if unit == "kPa" else 1.0
    decimals = 1 if unit == "kPa" else 0
    text = difference_text(round(before / factor, DUST), round(after / factor, DUST), decimals)
    return f"{text} {unit}" if float(text.replace(formats.MINUS, "-")) else formats.gas_pressure(0.0, unit, sign=True)
