"""The compensation rules read forwards and backwards."""

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from core.physiology import acid_base, compensation
from core.physiology.formula import why_undefined


@given(paco2=st.floats(10.0, 200.0))
def test_the_reverse_undoes_the_rule(paco2: float) -> None:
    acute = compensation.expected_ph_acute(paco2)
    assert compensation.paco2_for_ph_acute(acute) == pytest.approx(paco2, rel=1e-6)
    chronic = compensation.expected_ph_chronic(paco2)
    assert compensation.paco2_for_ph_chronic(chronic) == pytest.approx(paco2, rel=1e-6)


@given(paco2=st.floats(40.5, 200.0))
def test_acute_is_more_acid_than_chronic(paco2: float) -> None:
    assert compensation.expected_ph_acute(paco2) < compensation.expected_ph_chronic(paco2)
    assert compensation.expected_hco3_acute(paco2) < compensation.expected_hco3_chronic(paco2)


@given(paco2=st.floats(40.0, 80.0))
def test_usual_paco2_of_a_chronic_gas_is_that_gas(paco2: float) -> None:
    hco3 = compensation.expected_hco3_chronic(paco2)
    assert compensation.usual_paco2_estimate(hco3) == pytest.approx(paco2)


def test_no_usual_paco2_is_guessed_behind_a_metabolic_acidosis() -> None:
    assert math.isnan(compensation.usual_paco2_estimate(15.0))
    reason = why_undefined(compensation.usual_paco2_estimate, 15.0)
    assert reason is not None
    assert reason.key == "undefined.hidden_by_metabolic_acidosis"


def test_an_acidosis_beyond_the_acute_line_has_no_paco2() -> None:
    """Below pH 6.6 or so the line HCO3 = 24 + 0.1 (P - 40) never meets the pH: no PaCO2 alone explains it."""
    reason = why_undefined(compensation.paco2_for_ph_acute, 6.55)
    assert reason is not None
    assert reason.key == "undefined.result_outside"


@given(ph=st.floats(6.8, 7.8), paco2=st.floats(10.0, 200.0))
def test_henderson_hasselbalch_turns_both_ways(ph: float, paco2: float) -> None:
    hco3 = acid_base.bicarbonate(ph, paco2)
    if 1.0 <= hco3 <= 80.0:
        assert acid_base.ph_from_bicarbonate(paco2, hco3) == pytest.approx(ph)
        assert acid_base.paco2_from_bicarbonate(ph, hco3) == pytest.approx(paco2)
        assert acid_base.hydrogen_ion_from_gas(paco2, hco3) == pytest.approx(acid_base.hydrogen_ion(ph))
