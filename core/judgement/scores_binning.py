"""Binning of continuous inputs into published tables of whole numbers: decimal half-up of what was typed.

pH 7.345 belongs to 7.35 and P/F 200.5 to 201. A binary float cannot say 7.345, so the text as typed decides;
without a text, the shortest decimal that names the float does, after a division's dust is swept at 9 decimals
(31.5 / 0.28 is 112.49999999999999 as a float and 112.5 to anybody who typed it).
"""

from __future__ import annotations

from decimal import ROUND_HALF_UP, Decimal, InvalidOperation
from fractions import Fraction
from math import isfinite

import numpy as np
from numpy.typing import ArrayLike, NDArray

Input = float | int | None
_DUST = 9


def half_up(value: Input, decimals: int, text: str | None = None) -> float | None:
    """A value rounded half-up in decimal, by its text when there is one; None where it is missing.

    The text must be in the same unit as the value: a text that names another number (more than a millionth
    away) is not this value's and is passed over.

    >>> half_up(7.345, 2), half_up(200.5, 0), half_up(31.5 / 0.28, 0), half_up(7.345, 2, "7.345")
    (7.35, 201.0, 113.0, 7.35)
    >>> half_up(float("nan"), 2) is None
    True
    """
    if value is None or not isfinite(value):
        return None
    step = Decimal(1).scaleb(-decimals)
    return float(_exact(float(value), text).quantize(step, ROUND_HALF_UP))


def _exact(value: float, text: str | None) -> Decimal:
    plain = Decimal(repr(round(value, _DUST)))
    if text is None:
        return plain
    try:
        typed = Decimal(text.strip().replace(",", "."))
    except InvalidOperation:
        return plain
    other_number = not typed.is_finite() or abs(typed - plain) > Decimal("1e-6") * (1 + abs(plain))
    return plain if other_number else typed


def ratio_text(numerator: str, denominator: str) -> str | None:
    """The exact quotient of two typed decimals as a decimal text, or None where there is none.

    For a P/F made of a typed PaO2 and a typed FiO2 (as a fraction), so that binning sees what was typed.

    >>> ratio_text("31.5", "0.28"), ratio_text("60", "0") is None
    ('112.5', True)
    """
    try:
        quotient = Fraction(numerator.replace(",", ".")) / Fraction(denominator.replace(",", "."))
    except (ValueError, ZeroDivisionError):
        return None
    return str(Decimal(quotient.numerator) / Decimal(quotient.denominator))


def half_up_array(values: ArrayLike, decimals: int) -> NDArray[np.float64]:
    """Half-up for arrays, within a billionth of a step: what `half_up` gives for values of up to 6 decimals.

    >>> half_up_array([7.345, 7.344, float("nan")], 2).tolist()
    [7.35, 7.34, nan]
    """
    scale = 10.0**decimals
    scaled = np.asarray(values, dtype=np.float64) * scale
    return np.asarray(np.floor(scaled + 0.5 + 1e-7) / scale, dtype=np.float64)
