"""A gas that contradicts itself is named with what may explain it; one that agrees is left alone."""

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from core.physiology.acid_base import bicarbonate
from core.physiology.consistency import bicarbonate_agreement, gradient_doubt


@given(ph=st.floats(7.0, 7.6), paco2=st.floats(20.0, 100.0), off=st.floats(-1.99, 1.99))
def test_within_the_tolerance_is_consistent(ph: float, paco2: float, off: float) -> None:
    hco3 = bicarbonate(ph, paco2) + off
    if 1.0 <= hco3 <= 80.0:
        assert bicarbonate_agreement(ph, paco2, hco3).consistent is True


@given(ph=st.floats(7.0, 7.6), paco2=st.floats(20.0, 100.0), off=st.floats(2.01, 20.0))
def test_beyond_it_always_has_an_explanation(ph: float, paco2: float, off: float) -> None:
    hco3 = bicarbonate(ph, paco2) + off
    if 1.0 <= hco3 <= 80.0:
        found = bicarbonate_agreement(ph, paco2, hco3)
        assert found.consistent is False
        assert found.explanations[-1].key == "consistency.copying_slip"
        assert all(e.key != "consistency.standard_bicarbonate" for e in found.explanations)


@pytest.mark.parametrize(
    ("ph", "paco2", "hco3", "key"),
    [
        (7.52, 60.0, 26.0, "consistency.digits_swapped"),
        (7.25, 60.0, 62.0, "consistency.digits_swapped"),
        (7.25, 8.0, 26.0, "consistency.kpa_taken_for_mmhg"),
        (7.30, 70.0, 28.0, "consistency.standard_bicarbonate"),
    ],
)
def test_usual_explanations(ph: float, paco2: float, hco3: float, key: str) -> None:
    found = bicarbonate_agreement(ph, paco2, hco3)
    assert key in [e.key for e in found.explanations]


def test_a_swap_says_what_was_typed_and_what_would_fit() -> None:
    swap = bicarbonate_agreement(7.52, 60.0, 26.0).explanations[0]
    assert (swap.values["channel"], swap.values["typed"], swap.values["other"]) == ("ph", "7.52", 7.25)


def test_standard_or_missing_bicarbonate_is_not_judged() -> None:
    assert bicarbonate_agreement(7.30, 70.0, 28.0, actual=False).consistent is None
    assert bicarbonate_agreement(7.30, 70.0, math.nan).consistent is None
    assert bicarbonate_agreement(7.30, 70.0, 28.0, actual=False).explanations == ()


def test_a_stricter_tolerance_for_an_analyser() -> None:
    assert bicarbonate_agreement(7.25, 60.0, 27.5).consistent is True
    assert bicarbonate_agreement(7.25, 60.0, 27.5, tolerance=1.0).consistent is False


def test_a_gradient_that_cannot_be() -> None:
    assert gradient_doubt(100.0, 60.0, 0.21) is not None
    assert gradient_doubt(100.0, 60.0, math.nan) is None
    assert gradient_doubt(77.0, 60.0, 0.21) is None
