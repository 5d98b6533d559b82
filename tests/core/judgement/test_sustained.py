"""Sustained crossings: N of M minutes, with hysteresis, over gaps, at any sampling rate."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from core.judgement.sustained import spells
from core.record.instant import MINUTE, SECOND


def minutes(values: list[float]) -> tuple[np.ndarray, np.ndarray]:
    return np.arange(len(values), dtype=np.int64) * MINUTE, np.array(values, np.float64)


def test_ten_of_twelve_minutes_make_a_spell_nine_do_not() -> None:
    t, v = minutes([0.0] * 5 + [40.0] * 10 + [0.0] * 15)
    (spell,) = spells(t, v, 30.0, 10, 12)
    assert (spell.start, spell.known_at, spell.end, spell.minutes) == (5 * MINUTE, 14 * MINUTE, 15 * MINUTE, 10)
    t, v = minutes([0.0] * 5 + [40.0] * 9 + [0.0] * 15)
    assert spells(t, v, 30.0, 10, 12) == ()


def test_a_short_dip_does_not_end_a_spell() -> None:
    t, v = minutes([40.0] * 12 + [0.0] * 6 + [40.0] * 12 + [0.0] * 14)
    (spell,) = spells(t, v, 30.0, 10, 12)
    assert (spell.start, spell.end, spell.minutes) == (0, 30 * MINUTE, 24)


def test_a_long_fall_ends_it_and_a_later_rise_is_another() -> None:
    t, v = minutes([40.0] * 12 + [0.0] * 12 + [40.0] * 12)
    first, second = spells(t, v, 30.0, 10, 12)
    assert first.end == 12 * MINUTE
    assert second.end is None


def test_below_a_limit() -> None:
    t, v = minutes([92.0] * 5 + [80.0] * 3 + [92.0] * 3)
    (spell,) = spells(t, v, 83.0, 2, 2, below=True)
    assert (spell.start, spell.minutes) == (5 * MINUTE, 3)


def test_the_limit_itself_is_not_past() -> None:
    t, v = minutes([30.0] * 20)
    assert spells(t, v, 30.0, 10, 12) == ()


def test_a_silence_counts_as_not_past() -> None:
    t = np.concatenate((np.arange(8), np.arange(60, 68))).astype(np.int64) * MINUTE
    assert spells(t, np.full(16, 40.0), 30.0, 10, 12) == ()


def test_a_limit_per_sample() -> None:
    t, v = minutes([40.0] * 24)
    limit = np.where(t < 12 * MINUTE, 50.0, 30.0)
    (spell,) = spells(t, v, limit, 10, 12)
    assert spell.start == 12 * MINUTE


@given(st.lists(st.booleans(), min_size=1, max_size=60))
def test_one_hertz_gives_the_same_spells_as_one_a_minute(over: list[bool]) -> None:
    t, v = minutes([40.0 if o else 10.0 for o in over])
    fine = np.arange(60 * len(over), dtype=np.int64) * SECOND
    assert spells(t, v, 30.0, 3, 4) == spells(fine, np.repeat(v, 60), 30.0, 3, 4)


@given(st.lists(st.booleans(), min_size=1, max_size=80), st.integers(2, 12), st.data())
def test_every_spell_holds_n_of_m_minutes(over: list[bool], m: int, data: st.DataObject) -> None:
    n = data.draw(st.integers(m // 2 + 1, m))
    t, v = minutes([40.0 if o else 10.0 for o in over])
    for spell in spells(t, v, 30.0, n, m):
        assert spell.minutes >= n
        assert over[spell.start // MINUTE]
        assert spell.start <= spell.known_at


def test_nothing_gives_nothing() -> None:
    assert spells(np.empty(0, np.int64), np.empty(0), 30.0, 10, 12) == ()
    assert spells(np.array([0]), np.array([np.nan]), 30.0, 1, 1) == ()


@pytest.mark.parametrize("n", [1, 2])
def test_one_minute_rules(n: int) -> None:
    t, v = minutes([40.0] * 2 + [0.0] * 5)
    assert spells(t, v, 30.0, n, n)[0].known_at == (n - 1) * MINUTE
