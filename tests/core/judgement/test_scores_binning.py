"""Decimal half-up of the text as typed."""

import math
from decimal import ROUND_HALF_UP, Decimal

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from core.judgement.scores_binning import half_up, half_up_array, ratio_text

TYPED = st.decimals(0, 4000, places=4)


@given(typed=TYPED, decimals=st.sampled_from([0, 1, 2]))
def test_text_float_and_array_agree_with_decimal(typed: Decimal, decimals: int) -> None:
    expected = float(typed.quantize(Decimal(1).scaleb(-decimals), ROUND_HALF_UP))
    assert half_up(float(typed), decimals, str(typed)) == expected
    assert half_up(float(typed), decimals) == expected
    assert half_up_array(float(typed), decimals) == pytest.approx(expected, abs=1e-9)


@given(numerator=st.decimals(10, 700, places=1), denominator=st.decimals(Decimal("0.21"), 1, places=2))
def test_a_typed_ratio_bins_as_its_exact_quotient(numerator: Decimal, denominator: Decimal) -> None:
    text = ratio_text(str(numerator), str(denominator))
    assert text is not None
    value = float(numerator) / float(denominator)
    assert half_up(value, 0, text) == half_up(value, 0)


def test_a_text_that_names_another_number_is_passed_over() -> None:
    """A text in kPa, or one left from before a correction, must not bin a value in mmHg."""
    assert half_up(60.0, 0, "8.0") == 60.0
    assert half_up(60.0, 0, "sixty") == 60.0
    assert half_up(60.0, 0, "nan") == 60.0
    assert half_up(60.0, 0, "") == 60.0


@pytest.mark.parametrize("gone", [None, math.nan, math.inf])
def test_missing(gone: float | None) -> None:
    assert half_up(gone, 2) is None


def test_python_rounding_would_be_wrong() -> None:
    assert round(7.345, 2) == 7.34
    assert half_up(7.345, 2) == 7.35
    assert np.isnan(half_up_array([math.nan], 2)).all()


@pytest.mark.parametrize(("a", "b"), [("60", "0"), ("x", "0.4"), ("60", "")])
def test_no_ratio(a: str, b: str) -> None:
    assert ratio_text(a, b) is None
