"""A tidal volume is trusted only where the leak of that minute allows it."""

import math

import pytest

from core.physiology.tidal_volume_trust import Trust, trust, unintentional_leak, why_doubtful

NAN = math.nan


@pytest.mark.parametrize(
    ("vte", "leak", "ti", "void", "expected"),
    [
        (500.0, 10.0, 1.0, False, Trust.TRUSTED), (800.0, 30.0, 1.0, False, Trust.TRUSTED),
        (800.0, 30.1, 1.0, False, Trust.DOUBTFUL), (400.0, 24.0, 1.0, False, Trust.TRUSTED),
        (400.0, 24.1, 1.0, False, Trust.DOUBTFUL), (400.0, 25.0, NAN, False, Trust.TRUSTED),
        (400.0, NAN, 1.0, False, Trust.NOT_KNOWN), (NAN, 10.0, 1.0, False, Trust.NOT_KNOWN),
        (500.0, 10.0, 1.0, True, Trust.VOID), (0.0, 10.0, 1.0, False, Trust.VOID),
        (NAN, NAN, NAN, True, Trust.VOID),
    ],
)  # fmt: skip
def test_edges(vte: float, leak: float, ti: float, void: bool, expected: Trust) -> None:
    """Above 30 L/min, or above half of the inspired volume: common practice, no source."""
    assert trust(vte, leak, ti, void) == expected


def test_every_code_but_trusted_says_why() -> None:
    for code in Trust:
        assert (why_doubtful(code) is None) is (code is Trust.TRUSTED)


def test_leak_needs_its_definition() -> None:
    assert unintentional_leak(20.0, "unintentional") == 20.0
    assert math.isnan(float(unintentional_leak(20.0, "not known")))
    assert math.isnan(float(unintentional_leak(20.0, "total")))
    assert unintentional_leak(50.0, "total", 30.0) == 20.0
