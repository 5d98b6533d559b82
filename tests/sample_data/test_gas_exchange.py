"""CO2 stores: conservation, steady state, time course; and the acid that follows."""

import numpy as np
import pytest

from sample_data.gas_exchange import (
    FAST_ML_PER_MMHG_KG,
    SLOW_ML_PER_MMHG_KG,
    hco3_of,
    ph_of,
    steady_paco2,
    step_stores,
)

ONE = np.ones(1)


def run(paco2: float, vco2: float, va: float, minutes: int, weight: float = 70.0) -> np.ndarray:
    fast = slow = np.full(1, paco2)
    seen = []
    for _ in range(2 * minutes):
        fast, slow = step_stores(fast, slow, vco2 * ONE, va * ONE, weight * ONE, ONE, 0.5)
        seen.append([fast[0], slow[0]])
    return np.array(seen)


@pytest.mark.parametrize(("vco2", "va"), [(200.0, 4.3), (260.0, 3.0), (180.0, 6.0)])
def test_both_stores_end_where_the_alveolar_ventilation_equation_says(vco2: float, va: float) -> None:
    end = run(60.0, vco2, va, 1500)[-1]
    assert end == pytest.approx(np.full(2, float(steady_paco2(np.array(vco2), np.array(va)))), rel=1e-6)


def test_co2_is_conserved() -> None:
    """What was made and not breathed out is in the stores."""
    weight, vco2, va, step = 70.0, 230.0, 2.5, 0.5
    fast = slow = np.full(1, 50.0)
    kept = 0.0
    for _ in range(120):
        fast, slow = step_stores(fast, slow, vco2 * ONE, va * ONE, weight * ONE, ONE, step)
        kept += (vco2 - va * float(fast[0]) / 0.863) * step
    held = weight * (FAST_ML_PER_MMHG_KG * (fast[0] - 50.0) + SLOW_ML_PER_MMHG_KG * (slow[0] - 50.0))
    assert held == pytest.approx(kept, rel=1e-9)


def test_a_fall_is_half_done_in_minutes_and_slow_at_its_end() -> None:
    """Reference: a half-change of 4 min for CO2 (Farhi and Rahn 1955, dogs)."""
    course = run(80.0, 240.0, 240.0 * 0.863 / 60.0, 240)[:, 0]
    minutes_to_half = (np.flatnonzero(course <= 70.0)[0] + 1) / 2
    assert 3.0 <= minutes_to_half <= 7.0
    assert course[2 * 30] > 61.0
    assert course[-1] == pytest.approx(60.0, abs=0.3)


def test_a_rise_is_slower_than_a_fall() -> None:
    fall = run(80.0, 240.0, 240.0 * 0.863 / 60.0, 30)[:, 0]
    rise = run(60.0, 240.0, 240.0 * 0.863 / 80.0, 30)[:, 0]
    assert (rise[19] - 60.0) < (80.0 - fall[19])


def test_no_ventilation_at_all_raises_paco2_by_a_few_mmhg_a_minute() -> None:
    """Apnoea: about 12 mmHg in the first minute, then 3 to 4 a minute (from memory)."""
    course = run(40.0, 200.0, 0.0, 3)[:, 0]
    assert 12.0 <= course[-1] - 40.0 <= 24.0
    assert course[1] - 40.0 > course[-1] - course[-3]


def test_ph_and_bicarbonate_are_inverse() -> None:
    paco2 = np.array([30.0, 40.0, 60.0, 90.0])
    ph = np.array([7.5, 7.4, 7.3, 7.15])
    assert ph_of(hco3_of(ph, paco2), paco2) == pytest.approx(ph, abs=1e-12)
