"""Device samples lie in blocks of an hour, those of few samples in blocks of up to a day."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from core.record.instant import DAY, HOUR, MINUTE, SECOND
from storage.block_cuts import FEW, NEAR, blocks_of, hour_blocks, joined
from storage.chunks import Block, decode

T0 = 1_774_656_000_000_000  # 2026-03-28T00:00:00Z
Samples = tuple[np.ndarray, np.ndarray]


def read(blocks: list[Block]) -> Samples:
    parts = [decode(b.blob, b.t0, b.sha) for b in blocks]
    return np.concatenate([p[0] for p in parts]), np.concatenate([p[1] for p in parts])


def hours_of(block: Block) -> int:
    return block.t1 // HOUR - block.t0 // HOUR + 1


@st.composite
def series(draw: st.DrawFn) -> Samples:
    """Hours of any density behind each other, with holes of samples and of hours."""
    rng = np.random.default_rng(draw(st.integers(0, 2**32)))
    parts = []
    for hour in range(draw(st.integers(1, 60))):
        per_hour = draw(st.sampled_from([0, 1, 2, 12, 60, 60, 60, 60, FEW, FEW + 60]))
        at = T0 + hour * HOUR + np.arange(per_hour, dtype=np.int64) * (HOUR // max(per_hour, 1))
        parts.append(at[rng.random(at.size) > draw(st.sampled_from([0, 0, 0.1, 0.5]))])
    t = np.concatenate(parts)
    v = np.round(rng.normal(480, draw(st.sampled_from([0, 1, 60, 40_000])), t.size), draw(st.sampled_from([0, 1, 3])))
    v[rng.random(t.size) < draw(st.sampled_from([0, 0, 0.05]))] = np.nan
    return t, v


@settings(max_examples=150, deadline=None)
@given(series())
def test_both_cuts_give_the_samples_back_and_agree(made: Samples) -> None:
    t, v = made
    hourly, few = list(hour_blocks(t, v, 1)), list(blocks_of(t, v, 1))
    assert all(hours_of(b) == 1 for b in hourly)
    assert [(b.t0, b.t1, b.n) for b in joined(hourly, 1)] == [(b.t0, b.t1, b.n) for b in few]
    if t.size == 0:
        assert few == hourly == []
        return
    for blocks in (hourly, few, list(joined(hourly, 1))):
        back_t, back_v = read(blocks)
        assert np.array_equal(back_t, t)
        assert np.array_equal(back_v, v, equal_nan=True)


@settings(max_examples=150, deadline=None)
@given(series())
def test_no_block_hides_more_than_it_should(made: Samples) -> None:
    """None passes midnight, a long pause, or an hour of many samples: what lay there before stays seen."""
    for block in blocks_of(*made, 1):
        t, _v, _decimals = decode(block.blob, block.t0)
        assert block.t0 // DAY == block.t1 // DAY
        assert np.diff(t).max(initial=0) <= NEAR
        if hours_of(block) > 1:
            _hour, counts = np.unique(t // HOUR, return_counts=True)
            assert counts.max() <= FEW


def test_a_day_by_the_minute_is_one_block_and_a_day_by_the_second_is_twenty_four() -> None:
    for step, blocks in ((MINUTE, 1), (SECOND, 24)):
        t = T0 + np.arange(DAY // step, dtype=np.int64) * step
        assert len(list(blocks_of(t, np.full(t.size, 18.0), 0))) == blocks


@pytest.mark.parametrize("step", [SECOND, MINUTE])
def test_a_pause_inside_an_hour_parts_blocks(step: int) -> None:
    t = T0 + np.concatenate((np.arange(0, 10 * MINUTE, step), np.arange(50 * MINUTE, HOUR, step)))
    assert [(b.t0, b.t1) for b in blocks_of(t, np.full(t.size, 18.0), 0)] == [
        (T0, T0 + 10 * MINUTE - step), (T0 + 50 * MINUTE, T0 + HOUR - step)]  # fmt: skip


@pytest.mark.parametrize(("pause", "blocks"), [(NEAR, 1), (NEAR + MINUTE, 2), (3 * HOUR, 2)])
def test_a_pause_over_the_hour_that_another_file_may_fill_parts_blocks(pause: int, blocks: int) -> None:
    before = T0 + np.arange(0, HOUR, MINUTE)
    after = before[-1] + pause + np.arange(0, HOUR // 2, MINUTE)
    t = np.concatenate((before, after))
    assert len(list(blocks_of(t, np.full(t.size, 18.0), 0))) == blocks


def test_one_value_finer_than_the_rest_does_not_coarsen_or_swell_the_others() -> None:
    t = T0 + np.arange(0, 2 * DAY, MINUTE)
    v = np.round(np.random.default_rng(1).normal(480, 60, t.size))
    plain = list(blocks_of(t, v, 0))
    v[5] = 480.123456
    finer = list(blocks_of(t, v, 0))
    assert np.array_equal(read(finer)[1], v)
    assert finer[1] == plain[1]
