"""The expected course of PaCO2: between start and steady state, inside its band, and never backwards."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from core.physiology import co2_course

PRESSURES = st.floats(20.0, 150.0)


@given(start=PRESSURES, steady=PRESSURES, minutes=st.floats(0.0, 1000.0))
def test_the_course_lies_between_and_inside_its_band(start: float, steady: float, minutes: float) -> None:
    found = co2_course.expected_paco2(start, steady, minutes)
    assert min(start, steady) - 1e-9 <= found <= max(start, steady) + 1e-9
    low, high = co2_course.paco2_band(np.array(start), np.array(steady), np.array(minutes))
    assert float(low) - 1e-9 <= found <= float(high) + 1e-9


@given(start=PRESSURES, steady=PRESSURES)
def test_it_starts_at_the_start_and_ends_at_the_steady_state(start: float, steady: float) -> None:
    assert co2_course.expected_paco2(start, steady, 0.0) == pytest.approx(start)
    assert co2_course.expected_paco2(start, steady, 1000.0) == pytest.approx(steady, rel=1e-6)


def test_a_fall_is_faster_than_a_rise() -> None:
    fall = co2_course.expected_paco2(80.0, 60.0, 10.0)
    rise = co2_course.expected_paco2(60.0, 80.0, 10.0)
    assert 80.0 - fall > 1.5 * (rise - 60.0)


def test_half_is_done_at_the_half_time() -> None:
    assert co2_course.expected_paco2(80.0, 60.0, co2_course.FALL_HALF_TIME) == pytest.approx(70.0)
    assert co2_course.expected_paco2(60.0, 80.0, co2_course.RISE_HALF_TIME) == pytest.approx(70.0)


def test_the_steady_state_is_that_of_the_alveolar_ventilation_equation() -> None:
    before, after = co2_course.steady_paco2(200.0, 3.0), co2_course.steady_paco2(200.0, 4.0)
    assert co2_course.steady_paco2_after_change(before, 3.0, 4.0) == pytest.approx(after)


def test_arrays() -> None:
    minutes = np.array([0.0, 30.0, 60.0, np.nan])
    low, high = co2_course.paco2_band(np.full(4, 80.0), np.full(4, 60.0), minutes)
    assert np.isnan(low[3])
    assert np.isnan(high[3])
    assert low[0] == high[0] == pytest.approx(80.0)
