"""Trends: values now, slopes with interval, and the reason beside every null."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from core.figures.episode_figures import judged
from core.judgement.device_medians import medians
from core.judgement.policy import shipped_policy
from core.judgement.trend import channel_trend, rates_at, ratio_trends
from core.record.instant import MINUTE
from tests.support.log_cases import at, context

SUPPORT = "00:30 rr 30\n01:00 mode CPAP cpap 8 fio2 50%\n"


def test_pf_rises_with_its_slope_and_interval() -> None:
    log = SUPPORT + "\n".join(f"0{h}:00 ph 7.40 paco2 38 pao2 {50 + 10 * h}" for h in range(2, 7))
    pf = ratio_trends(context(log, "06:30"))["pf"]
    assert pf.latest == pytest.approx(220)
    assert pf.at == at("06:00")
    assert pf.slope_per_h == pytest.approx(20)
    assert (pf.slope_low, pf.slope_high) == pytest.approx((20, 20))
    assert pf.n == 5
    assert not pf.reasons


def test_few_gases_have_a_slope_and_say_so() -> None:
    two = ratio_trends(context(SUPPORT + "02:00 pao2 60 ph 7.4\n03:00 pao2 70 ph 7.4", "04:00"))["pf"]
    assert two.slope_per_h == pytest.approx(20)
    assert two.slope_low is None
    assert two.reasons["slope_low"].key == "trend.too_few_for_interval"
    one = ratio_trends(context(SUPPORT + "02:00 pao2 60 ph 7.4", "04:00"))["pf"]
    assert one.slope_per_h is None
    assert one.reasons["slope_per_h"].key == "trend.too_few_points"


def test_a_flow_without_fio2_ends_all_ratios() -> None:
    log = SUPPORT + "02:00 pao2 60 ph 7.4 spo2 91 rr 28\n03:00 o2_flow 8\n04:00 pao2 70 ph 7.4 spo2 92 rr 26"
    found = ratio_trends(context(log, "04:10"))
    for name in ("pf", "sf", "rox"):
        assert found[name].latest is None
        assert found[name].reasons["latest"].key == "trend.fio2_not_known"


def test_saturation_above_97_gives_no_sf_but_a_rox() -> None:
    found = ratio_trends(context(SUPPORT + "02:00 spo2 94 rr 25\n03:00 spo2 98 rr 20", "03:10"))
    assert found["sf"].latest is None
    assert found["sf"].reasons["latest"].key == "trend.spo2_above_ceiling"
    assert found["sf"].n == 1
    assert found["rox"].latest == pytest.approx(98 / 0.5 / 20)


def test_sf_and_rox_by_hand_with_the_caveat() -> None:
    found = ratio_trends(context("00:30 rr 30\n01:00 mode CPAP cpap 8 fio2 60%\n02:00 spo2 92 rr 28", "02:10"))
    assert found["sf"].latest == pytest.approx(153.33, abs=0.01)
    assert found["rox"].latest == pytest.approx(5.48, abs=0.005)
    assert found["rox"].caveat is not None
    assert found["rox"].caveat.key == "trend.rox_validated_in_high_flow"


def test_saturation_in_a_break_is_not_used() -> None:
    log = SUPPORT + "02:00 spo2 94 rr 25\n03:00 break_start\n03:10 spo2 84 rr 30"
    assert ratio_trends(context(log, "03:20"))["sf"].at == at("02:00")


def test_saturation_after_the_end_is_not_used() -> None:
    log = SUPPORT + "02:00 spo2 92 rr 28\n03:00 stopped\n03:20 spo2 97 rr 20"
    found = ratio_trends(context(log, "03:30"))
    assert found["sf"].at == at("02:00")
    assert found["rox"].latest == pytest.approx(92 / 0.5 / 28)


def test_no_rate_from_before_a_change_goes_into_a_rox_after_it() -> None:
    log = SUPPORT + "02:00 rr 40\n02:10 cpap 10\n02:20 spo2 94"
    found = judged(context(log, "02:20").episode, at("02:20"), shipped_policy())
    assert found.rox.latest is None
    assert found.rox.reasons["latest"].key == "trend.rate_not_known"
    later = judged(context(log + "\n02:45 rr 20", "02:50").episode, at("02:50"), shipped_policy())
    assert later.rox.latest == pytest.approx(94 / 0.5 / 20)
    assert later.rox.inputs["rr"].at == at("02:45")


def test_a_quarter_of_an_hour_in_which_fio2_changed_has_no_ratio() -> None:
    log = SUPPORT + "02:07 fio2 40%\ndevice spo2 02:00 02:45 92 92\ndevice rr_total 02:00 02:45 25 25"
    sf = ratio_trends(context(log, "02:45"))["sf"]
    assert sf.n == 2
    assert sf.latest == pytest.approx(230)


def test_a_counted_rate_beats_the_device() -> None:
    ctx = context(SUPPORT + "02:00 rr 24\n03:00 rr 22\ndevice rr_total 01:00 04:00 30 30", "04:00")
    assert channel_trend(ctx, "rr").latest == 22
    assert rates_at(ctx, np.array([at("02:10"), at("03:45")])).tolist() == [24.0, 30.0]
    alone = context("00:30 spo2 90\n01:00 mode CPAP cpap 8\ndevice rr_total 01:00 04:00 30 24", "04:00")
    rate = channel_trend(alone, "rr")
    assert rate.n == 12
    assert rate.slope_per_h == pytest.approx(-2, rel=0.02)


def test_tidal_volume_per_kg_needs_height_and_sex() -> None:
    ctx = context(SUPPORT + "device vte 01:00 03:00 670 670", "03:00")
    assert channel_trend(ctx, "vte_per_kg").reasons["latest"].key == "trend.predicted_weight_not_known"
    ctx = context("00:30 rr 20 height 175 sex male\n01:00 mode CPAP cpap 8\ndevice vte 01:00 03:00 670 670", "03:00")
    assert channel_trend(ctx, "vte_per_kg").latest == pytest.approx(9.49, abs=0.01)


def test_nothing_logged_says_so() -> None:
    for figure in ratio_trends(context("00:30 note", "01:00")).values():
        assert figure.latest is None
        assert figure.reasons["latest"].key == "trend.no_values"


def test_medians_take_the_middle_and_ignore_silence() -> None:
    t = np.arange(30, dtype=np.int64) * MINUTE
    v = np.where(t < 15 * MINUTE, 20.0, 40.0)
    v[3], v[20] = 500.0, np.nan
    found = medians(t, v, 15 * MINUTE)
    assert found.v.tolist() == [20.0, 40.0]
    assert found.last.tolist() == [14 * MINUTE, 29 * MINUTE]
    assert medians(t[:0], v[:0], 15 * MINUTE).v.size == 0


@given(st.lists(st.integers(0, 200), min_size=1, max_size=120, unique=True), st.integers(1, 30))
def test_medians_agree_with_numpy_bin_by_bin(moments: list[int], span: int) -> None:
    t = np.array(sorted(moments), np.int64)
    v = np.sin(t * 1.7) * 100
    found = medians(t, v, span)
    assert found.v.tolist() == pytest.approx([float(np.median(v[t // span == b])) for b in np.unique(t // span)])


def test_medians_of_regular_samples_agree_with_numpy() -> None:
    t = np.arange(7, 1007, dtype=np.int64)
    v = np.cos(t * 0.9)
    wanted = [float(np.median(v[t // 15 == b])) for b in np.unique(t // 15)]
    assert medians(t, v, 15).v.tolist() == pytest.approx(wanted)


def test_the_newest_median_is_of_the_last_quarter_and_never_of_one_that_has_just_begun() -> None:
    """Two samples into a new quarter of an hour: SpO2, rate and leak are those of the last 15 minutes."""
    log = (
        SUPPORT
        + """device spo2 01:00 04:00 90 90
        device spo2 04:00 04:02 96 96
        device rr_total 01:00 04:00 30 30
        device rr_total 04:00 04:02 60 60
        device leak 01:00 04:00 18 18
        device leak 04:00 04:02 40 40"""
    )
    ctx = context(log, "04:01")
    found = ratio_trends(ctx)
    assert found["sf"].latest == pytest.approx(180)
    assert found["sf"].median_of == (at("03:47"), at("04:01"))
    assert found["rox"].latest == pytest.approx(180 / 30)
    assert found["rox"].inputs["rr"].median_of == (at("03:47"), at("04:01"))
    assert channel_trend(ctx, "leak").latest == 18
    assert channel_trend(ctx, "leak").median_of == (at("03:47"), at("04:01"))


def test_the_newest_sf_starts_at_a_change_of_fio2() -> None:
    """SpO2 of another FiO2 says nothing of this one; of the quarter after a change there is a median at once."""
    log = SUPPORT + "03:55 fio2 60%\ndevice spo2 01:00 03:55 90 90\ndevice spo2 03:55 04:02 96 96"
    found = ratio_trends(context(log, "04:01"))["sf"]
    assert found.latest == pytest.approx(160)
    assert found.median_of == (at("03:55"), at("04:01"))
