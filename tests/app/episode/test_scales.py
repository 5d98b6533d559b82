"""Axes hold every value; a usual range at rest."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from app.episode.panels import Panel, drawable
from app.episode.scales import USUAL, scales_of, widened


@given(st.floats(-50, 50), st.floats(0.5, 100), st.lists(st.floats(-200, 900), min_size=1, max_size=30))
def test_no_value_is_cut_off(low, span, values):
    a, b = widened(low, low + span, [np.array(values)])
    assert a <= min(values) + 1e-3
    assert b >= max(values) - 1e-3
    assert a < b


def test_missing_values_change_nothing():
    assert widened(0, 40, [np.array([np.nan, np.inf])]) == (0, 40)
    assert widened(0, 40, []) == (0, 40)


@pytest.mark.parametrize("channel", [c for c in drawable() if c not in ("rise", "hb", "sao2", "gas_fio2")])
def test_every_channel_has_a_usual_range(channel):
    low, high = USUAL[channel]
    assert low < high


def test_two_units_make_two_scales_and_each_range_can_be_fixed():
    panel = Panel("a", "A", ("ph", "paco2"), low=7.0, high=7.6)
    ph, co2 = scales_of(panel, (), "kPa")
    assert (ph.unit, ph.low, ph.high) == ("pH", 7.0, 7.6)
    assert co2.unit == "kPa"
    assert co2.high == pytest.approx(80 / 7.50062, abs=1e-3)
    both = Panel("a", "A", ("ph", "paco2"), second_low=30.0, second_high=90.0)
    _, fixed = scales_of(both, (), "kPa")
    assert (fixed.low, fixed.high) == pytest.approx((30 / 7.50062, 90 / 7.50062), abs=1e-3)


def test_an_end_fixed_beyond_all_values_stays_and_the_other_makes_room():
    (ph,) = scales_of(Panel("a", "A", ("ph",), low=7.6), (), "mmHg")
    assert ph.low == 7.6
    assert ph.high > ph.low
    (rate,) = scales_of(Panel("a", "A", ("rr",), high=-5.0), (), "mmHg")
    assert rate.high == -5
