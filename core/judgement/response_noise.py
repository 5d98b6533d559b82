"""What measurement alone can make of two values: a change counts only beyond it."""

from __future__ import annotations

from core.judgement.paired_limits import wider_mmHg
from core.judgement.policy_sections import Noise

_DIGITS = 6
"""Comparisons are made to a millionth, so that binary fractions and unit conversions never decide."""


def ph_noise(noise: Noise) -> float:
    """Noise of the difference of two pH values."""
    return noise.ph.value


def paco2_noise(noise: Noise, baseline_mmHg: float) -> float:
    """Noise of the difference of two PaCO2, mmHg: the greater of a fixed amount and a share of the baseline.

    >>> from core.judgement.policy import shipped_policy
    >>> round(paco2_noise(shipped_policy().noise, 60.0), 2)
    4.8
    """
    return max(wider_mmHg(noise.paco2_mmHg), noise.paco2_fraction.value * baseline_mmHg)


def pf_noise(noise: Noise, baseline_mmHg: float) -> float:
    """Noise of the difference of two P/F ratios (or PaO2), mmHg."""
    return noise.pao2_fraction.value * baseline_mmHg


def rr_noise(noise: Noise, both_device: bool) -> float:
    """Noise of the difference of two respiratory rates, per minute: counts unless both are device medians."""
    return noise.rr_device.value if both_device else noise.rr_counted.value


def direction(change: float, noise: float) -> int:
    """+1 or -1 where a change lies beyond its noise, else 0. A change equal to the noise is inside it.

    >>> direction(7.283 - 7.25, 0.033), direction(7.29 - 7.25, 0.033), direction(-5.0, 4.8)
    (0, 1, -1)
    """
    if round(abs(change) - noise, _DIGITS) <= 0:
        return 0
    return 1 if change > 0 else -1
