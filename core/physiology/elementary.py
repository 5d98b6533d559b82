"""Elementary functions that keep the type they were given: a float stays a float, an array an array."""

from __future__ import annotations

from typing import Any, TypeVar, cast

import numpy as np
from numpy.typing import NDArray

Values = NDArray[np.float64]
N = TypeVar("N", float, Values, Values | float)
"""A float or an array of float64. Mixed calls broadcast; to type them, declare the scalar `Values | float`."""


def power_of_ten(x: N) -> N:
    """10 to the power x."""
    return cast("N", np.power(10.0, x))


def log10(x: N) -> N:
    """Common logarithm."""
    return cast("N", np.log10(x))


def ln(x: N) -> N:
    """Natural logarithm."""
    return cast("N", np.log(x))


def exp(x: N) -> N:
    """e to the power x."""
    return cast("N", np.exp(x))


def sqrt(x: N) -> N:
    """Square root."""
    return cast("N", np.sqrt(x))


def cube_root(x: N) -> N:
    """The real cube root, of negative numbers too."""
    return cast("N", np.cbrt(x))


def choose(condition: Any, yes: N | float, no: N | float) -> N:
    """`yes` where the condition holds, else `no`."""
    return cast("N", np.where(condition, yes, no))
