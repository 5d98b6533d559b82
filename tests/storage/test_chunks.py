"""Device samples come back exactly, whatever their steps, gaps, decimals and missing values."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from core.record.instant import HOUR, MINUTE, SECOND
from storage.chunks import decode, encode
from storage.errors import StoreError

T0 = 1_774_656_000_000_000  # 2026-03-28T00:00:00Z


@st.composite
def samples(draw: st.DrawFn) -> tuple[np.ndarray, np.ndarray, int]:
    """Times and values as devices write them, and as they never should."""
    n = draw(st.integers(1, 300))
    even = draw(st.booleans())
    step = draw(st.sampled_from([SECOND, MINUTE, 10 * SECOND, 7]))
    gaps = [step] * n if even else draw(st.lists(st.integers(1, 2 * HOUR), min_size=n, max_size=n))
    t = T0 + draw(st.integers(0, HOUR)) + np.cumsum(np.array(gaps, np.int64))
    decimals = draw(st.integers(0, 3))
    kind = draw(st.sampled_from(["whole", "decimal", "any", "huge"]))
    value = {
        "whole": st.integers(-5, 3000).map(float),
        "decimal": st.integers(-5, 9999).map(lambda x: x / 10**decimals),
        "any": st.floats(allow_nan=False, width=64),
        "huge": st.sampled_from([1e300, -1e17, 2.0**53, 0.1, -0.0, 5e-324, float("inf")]),
    }[kind]
    v = draw(st.lists(st.one_of(value, value, value, st.just(float("nan"))), min_size=n, max_size=n))
    return t, np.array(v, np.float64), decimals


@settings(max_examples=200, deadline=None)
@given(samples())
def test_one_block_comes_back_exactly(made: tuple[np.ndarray, np.ndarray, int]) -> None:
    t, v, decimals = made
    block = encode(t, v, decimals)
    back_t, back_v, back_decimals = decode(block.blob, block.t0, block.sha)
    assert np.array_equal(back_t, t)
    assert np.array_equal(back_v, v, equal_nan=True)
    assert np.array_equal(np.signbit(back_v[v == 0]), np.signbit(v[v == 0]))
    assert back_decimals == decimals
    assert (block.t0, block.t1, block.n) == (t[0], t[-1], t.size)


@settings(max_examples=300, deadline=None)
@given(st.binary(max_size=80))
def test_bytes_that_are_no_block_are_damage_and_nothing_worse(blob: bytes) -> None:
    found = ""
    try:
        t, v, _decimals = decode(blob, T0)
        assert t.shape == v.shape
    except StoreError as error:
        found = error.message.key
    assert found in ("", "store.damaged_chunk")


def test_a_flipped_bit_is_found_by_the_digest() -> None:
    block = encode(T0 + np.arange(60, dtype=np.int64) * MINUTE, np.arange(60.0), 0)
    for i in range(len(block.blob)):
        wrong = bytearray(block.blob)
        wrong[i] ^= 1
        with pytest.raises(StoreError):
            decode(bytes(wrong), block.t0, block.sha)


@pytest.mark.parametrize("n", [1, 60, 999, 1_000, 1_440, 3_600])
@pytest.mark.parametrize("kind", ["steady", "drift", "noise", "wide noise", "pattern"])
def test_what_scatters_and_what_repeats_comes_back_and_is_never_larger_than_its_bits(n: int, kind: str) -> None:
    rng = np.random.default_rng(n)
    v = {
        "steady": 18.0 + (rng.random(n) < 0.02),
        "drift": np.round(20 + np.cumsum(rng.normal(0, 0.1, n)), 1),
        "noise": np.round(rng.normal(24, 3, n)),
        "wide noise": np.round(rng.normal(480, 60, n)),
        "pattern": np.resize([480.0, 12.0, 377.0, 5.0, 91.0], n),
    }[kind]
    t = T0 + np.arange(n, dtype=np.int64) * MINUTE
    block = encode(t, v, 1)
    back_t, back_v, _decimals = decode(block.blob, block.t0, block.sha)
    assert np.array_equal(back_t, t)
    assert np.array_equal(back_v, v)
    in_bits = n * int(np.ptp(np.rint(v * 10))).bit_length() / 8
    assert len(block.blob) <= in_bits + 24
    if kind == "steady" and n > 240:
        assert len(block.blob) < in_bits / 2
