"""The fast envelope equals a slow one written from the rules alone, on random irregular data with gaps."""

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from core.figures.envelope import Envelope, EnvelopeSeries, bin_width


def slow_envelope(t, v, gap_limit, start, end, width):
    """One sample at a time, from the rules in the module's docstring; returns (t, v, connects, lone)."""
    samples, missing = [], False
    for at, value in zip(t, v, strict=True):
        if not math.isfinite(value):
            missing = True
            continue
        gap = not samples or missing or (gap_limit is not None and at - samples[-1][0] > gap_limit)
        samples.append((at, value, gap))
        missing = False
    inside = [i for i, s in enumerate(samples) if start <= s[0] <= end]
    before = sum(1 for s in samples if s[0] < start)
    first = max(before - 1, 0)
    stop = min(before + len(inside) + 1, len(samples))
    if stop - first <= 2 * width:
        picked, joined = (
            list(range(len(samples))),
            [i + 1 < len(samples) and not samples[i + 1][2] for i in range(len(samples))],
        )
    else:
        picked, joined = _slow_bins(samples, bin_width(start, end, width))
    lone = [not joined[i] and (i == 0 or not joined[i - 1]) for i in range(len(picked))]
    rows = [(*samples[p][:2], j, alone) for p, j, alone in zip(picked, joined, lone, strict=True)]
    low = max(sum(1 for r in rows if r[0] < start) - 1, 0)
    high = min(sum(1 for r in rows if r[0] <= end) + 1, len(rows))
    return rows[low:high]


def _slow_bins(samples, width_of_bin):
    bins = {}
    for i, (at, _, _) in enumerate(samples):
        bins.setdefault(at // width_of_bin, []).append(i)
    picked, joined = [], []
    for members in bins.values():
        chosen = {min(members, key=lambda i: samples[i][1]), max(members, key=lambda i: samples[i][1])}
        if samples[members[0]][2]:
            chosen.add(members[0])
        follows = members[-1] + 1
        cut = follows == len(samples) or samples[follows][2]
        if cut:
            chosen.add(members[-1])
        picked += sorted(chosen)
        joined += [True] * (len(chosen) - 1) + [not cut]
    return picked, joined


def rows_of(seen: Envelope):
    columns = (seen.t, seen.v, seen.connects, seen.lone)
    return list(zip(*(column.tolist() for column in columns), strict=True))


@st.composite
def series(draw):
    seed = draw(st.integers(0, 2**32 - 1))
    rng = np.random.default_rng(seed)
    n = draw(st.integers(0, 400))
    scale = draw(st.sampled_from([1, 7, 1_000, 1_000_000]))
    steps = rng.integers(0, 5, n) * scale
    steps[rng.random(n) < draw(st.sampled_from([0.0, 0.02, 0.3]))] *= 50
    t = np.cumsum(steps) + draw(st.integers(-(10**9), 2 * 10**15))
    v = rng.integers(0, draw(st.sampled_from([1, 3, 1000])) + 1, n).astype(float)
    v[rng.random(n) < draw(st.sampled_from([0.0, 0.02, 0.5]))] = np.nan
    gap = draw(st.sampled_from([None, 4 * scale, 60 * scale]))
    return t.astype(np.int64), v, gap


@given(series(), st.data())
@settings(max_examples=250, deadline=None)
def test_fast_path_equals_slow_path(data, more):
    t, v, gap = data
    prepared = EnvelopeSeries(t, v, gap)
    low, high = (int(t[0]), int(t[-1])) if len(t) else (0, 1000)
    reach = max(high - low, 10)
    for _ in range(3):  # several windows of one series: tiles and levels are used again
        start = more.draw(st.integers(low - reach // 2, high + reach // 2))
        end = start + more.draw(st.integers(1, reach * 2))
        width = more.draw(st.integers(1, 60))
        assert rows_of(prepared.envelope(start, end, width)) == slow_envelope(
            t.tolist(), v.tolist(), gap, start, end, width
        )


def test_a_pan_gives_the_same_vertices_as_a_fresh_series():
    rng = np.random.default_rng(3)
    t = np.cumsum(rng.integers(1, 2_000_000, 20_000)).astype(np.int64)
    v = rng.normal(size=20_000)
    kept = EnvelopeSeries(t, v)
    span = int(t[-1]) // 3
    for start in range(0, int(t[-1]), span // 7):
        fresh = EnvelopeSeries(t, v).envelope(start, start + span, 300)
        assert rows_of(kept.envelope(start, start + span, 300)) == rows_of(fresh)


def test_the_newest_value_and_the_extremes_stay():
    t = np.arange(100_000, dtype=np.int64) * 1_000_000
    v = np.zeros(100_000)
    v[51_234], v[77_777], v[-1] = 9.0, -9.0, 0.5
    seen = EnvelopeSeries(t, v).envelope(0, int(t[-1]), 640)
    assert seen.reduced
    assert len(seen.t) <= 4 * 640
    assert {9.0, -9.0} <= set(seen.v.tolist())
    assert (seen.t[-1], seen.v[-1]) == (t[-1], 0.5)


def test_a_flat_stretch_inside_one_pixel_is_lone_and_not_lost():
    sides = np.arange(5_000), np.arange(20_000_000, 20_005_000)
    t = np.concatenate([sides[0], [10_000_000, 10_000_001], sides[1]]).astype(np.int64)
    seen = EnvelopeSeries(t, np.ones(len(t)), gap_limit=1_000).envelope(0, 30_000_000, 100)
    between = (seen.t >= 10_000_000) & (seen.t <= 10_000_001)
    assert between.sum() == 2


def test_one_missing_sample_does_not_blank_its_bin():
    t = np.arange(10_000, dtype=np.int64)
    v = np.sin(t / 300.0)
    v[5_001] = np.nan
    seen = EnvelopeSeries(t, v).envelope(0, 10_000, 100)
    near = (seen.t > 4_900) & (seen.t < 5_100)
    assert near.sum() >= 3
    assert np.isfinite(seen.v).all()


@pytest.mark.parametrize(
    ("t", "v", "gap", "words"),
    [
        ([0, 1], [1.0], None, "shape"),
        ([[0]], [[1.0]], None, "one-dimensional"),
        ([5, 4], [1.0, 1.0], None, "falls at sample 1"),
        ([0, 1], [1.0, 1.0], 0, "gap_limit of 0"),
    ],
)
def test_bad_series_are_refused(t, v, gap, words):
    with pytest.raises(ValueError, match=words):
        EnvelopeSeries(t, v, gap)


@pytest.mark.parametrize(("start", "end", "width", "words"), [(5, 5, 10, "after the start"), (0, 5, 0, "0 pixels")])
def test_bad_windows_are_refused(start, end, width, words):
    with pytest.raises(ValueError, match=words):
        EnvelopeSeries([0], [1.0]).envelope(start, end, width)


@given(st.integers(1, 2**50), st.integers(1, 5_000))
def test_a_bin_is_never_wider_than_a_pixel_nor_much_narrower(span, width):
    got = bin_width(0, span, width)
    assert got <= max(span // width, 1)
    assert got * 1.25 >= span // width
