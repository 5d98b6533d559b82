"""Robust slope and trend test against published worked examples and against SciPy.

Sources: Sen, J Am Stat Assoc 1968;63:1379 (worked example; slope, interval and intercepts as reproduced in SciPy and
in R test suites); a Mann-Kendall example worked by hand in a course (College of the Holy Cross: S 54, variance
332.667, Z 2.9058); annual flow of the Nile at Aswan 1871-1970 (Cobb, Biometrika 1978;65:243) and Longley's
employment series (J Am Stat Assoc 1967;62:819), both shipped with R and statsmodels.
"""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy import stats

from core.judgement.mann_kendall import mann_kendall
from core.judgement.theil_sen import theil_sen

SEN_T = np.array([1.0, 2, 3, 4, 10, 12, 18])
SEN_Y = np.array([9.0, 15, 19, 20, 45, 55, 78])
HAND = np.array([12.9, 14.8, 13.2, 15.7, 13.8, 15.6, 12.9, 11.0, 17.3, 15.9, 19.0, 18.3, 20.1, 21.7])
NILE = np.array(
    [1120, 1160, 963, 1210, 1160, 1160, 813, 1230, 1370, 1140, 995, 935, 1110, 994, 1020, 960, 1180, 799, 958, 1140,
     1100, 1210, 1150, 1250, 1260, 1220, 1030, 1100, 774, 840, 874, 694, 940, 833, 701, 916, 692, 1020, 1050, 969,
     831, 726, 456, 824, 702, 1120, 1100, 832, 764, 821, 768, 845, 864, 862, 698, 845, 744, 796, 1040, 759,
     781, 865, 845, 944, 984, 897, 822, 1010, 771, 676, 649, 846, 812, 742, 801, 1040, 860, 874, 848, 890,
     744, 749, 838, 1050, 918, 986, 797, 923, 975, 815, 1020, 906, 901, 1170, 912, 746, 919, 718, 714, 740],
    np.float64,
)  # fmt: skip
LONGLEY = np.array([60323.0, 61122, 60171, 61187, 63221, 63639, 64989, 63761, 66019, 67857, 68169, 66513, 68655,
                    69564, 69331, 70551])  # fmt: skip


def test_sens_worked_example() -> None:
    line = theil_sen(SEN_T, SEN_Y, 0.93)
    assert line.slope == 4.0
    assert line.intercept == 4.0  # median y - slope x median t; the median residual would be 6
    assert (line.low, line.high) == pytest.approx((26 / 7, 35 / 8))


def test_nile() -> None:
    line = theil_sen(np.arange(1871.0, 1971.0), NILE)
    assert (line.slope, line.low, line.high) == pytest.approx((-2.6, -3.628, -1.429), abs=5e-4)
    trend = mann_kendall(NILE)
    assert (trend.s, trend.variance) == (-1387, pytest.approx(112728.33, abs=0.005))
    assert trend.z == pytest.approx(-4.128, abs=5e-4)
    assert trend.p == pytest.approx(3.7e-5, rel=0.02)


def test_longley_employment() -> None:
    line = theil_sen(np.arange(1947.0, 1963.0), LONGLEY)
    assert (line.slope, line.low, line.high) == pytest.approx((704.72, 631.5, 837.1), abs=0.06)


def test_mann_kendall_worked_by_hand() -> None:
    trend = mann_kendall(HAND)
    assert trend.s == 54  # 72 up, 18 down, 1 tie
    assert trend.variance == pytest.approx(332.667, abs=5e-4)
    assert trend.z == pytest.approx(2.9058, abs=5e-5)
    assert trend.p / 2 == pytest.approx(0.0018, abs=5e-5)
    line = theil_sen(np.arange(14.0), HAND)
    assert (line.slope, line.low, line.high) == pytest.approx((0.5667, 0.325, 0.867), abs=5e-4)


@pytest.mark.parametrize(("n", "least"), [(4, 0.0833), (5, 0.0167)])
def test_few_points_cannot_reach_significance(n: int, least: float) -> None:
    trend = mann_kendall(np.arange(float(n)))
    assert trend.exact
    assert trend.p == pytest.approx(least, abs=5e-5)


@settings(max_examples=60, deadline=None)
@given(
    st.lists(st.tuples(st.integers(0, 40), st.integers(-30, 30)), min_size=4, max_size=40),
    st.sampled_from([0.9, 0.95, 0.99]),
)
def test_theil_sen_agrees_with_scipy(points: list[tuple[int, int]], confidence: float) -> None:
    t, y = (np.array(column, np.float64) for column in zip(*points, strict=True))
    if np.unique(t).size < 2:
        return
    ours = theil_sen(t, y, confidence)
    with np.errstate(invalid="ignore"):  # ties on both sides can make the variance negative: no interval
        theirs = stats.theilslopes(y, t, confidence)
    assert (ours.slope, ours.intercept) == pytest.approx((theirs.slope, theirs.intercept))
    assert (ours.low, ours.high) == pytest.approx((theirs.low_slope, theirs.high_slope), nan_ok=True)


@settings(max_examples=60, deadline=None)
@given(st.lists(st.integers(-1000, 1000), min_size=3, max_size=9, unique=True))
def test_exact_p_agrees_with_scipy_kendall(values: list[int]) -> None:
    y = np.array(values, np.float64)
    theirs = stats.kendalltau(np.arange(y.size), y, method="exact").pvalue
    assert mann_kendall(y).p == pytest.approx(theirs)
