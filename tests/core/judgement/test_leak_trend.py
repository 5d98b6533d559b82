"""Leak: by its definition, with its limit, time over it, adjustments and unlogged breaks."""

from __future__ import annotations

from math import sqrt

import pytest

from core.judgement.leak_trend import leak_doubts, leak_figure, leak_spells
from core.judgement.probable_breaks import probable_breaks
from core.judgement.trend import channel_trend
from core.record.instant import MINUTE
from core.record.message import Message
from tests.support.log_cases import at, context

BEGIN = "00:30 rr 20\n01:00 mode BPAP-ST ipap 20 epap 5 ti 1.0"


def test_unknown_definition_gives_a_trend_only() -> None:
    leak = leak_figure(context(f"{BEGIN}\ndevice leak 01:00 05:00 20 60", "05:00"))
    assert leak.slope_L_per_min_per_h == pytest.approx(10, rel=0.02)
    assert leak.limit_L_per_min is None
    assert leak.minutes_over_limit is None
    assert leak.reasons["limit_L_per_min"].key == "leak.definition_not_known"


def test_unintentional_leak_over_its_limit() -> None:
    log = f"{BEGIN} leak_definition unintentional\ndevice leak 01:00 03:00 20 20\ndevice leak 03:00 03:40 45 45"
    leak = leak_figure(context(log, "03:40"))
    assert leak.limit_L_per_min == 30
    assert leak.minutes_over_limit == 40
    assert leak.over_since == at("03:00")
    assert leak.median_L_per_min == 20
    assert leak.latest_L_per_min == 45


def test_the_time_over_the_limit_names_its_span_and_counts_from_where_it_is_told_to() -> None:
    log = f"{BEGIN} leak_definition unintentional\ndevice leak 01:00 02:00 45 45\ndevice leak 02:00 10:00 20 20"
    ctx = context(log, "10:00")
    newest, whole = leak_figure(ctx), leak_figure(ctx, since=at("01:00"))
    assert newest.minutes_over_limit == 0
    assert newest.counted == (at("04:00"), at("10:00")), "the trend's span alone"
    assert (whole.minutes_over_limit, whole.counted) == (60, (at("01:00"), at("10:00")))
    assert whole.median_of is not None
    assert whole.median_of[0] == at("01:00")
    assert whole.slope_L_per_min_per_h == newest.slope_L_per_min_per_h


TYPED = "\n".join(f"{hour:02d}:00 leak {45 + hour}" for hour in range(2, 7))


def test_readings_typed_now_and_then_have_no_minutes_over_the_limit() -> None:
    ctx = context(f"{BEGIN} leak_definition unintentional\n{TYPED}", "06:30")
    leak = leak_figure(ctx)
    assert (leak.readings_typed, leak.readings_typed_over) == (5, 5)
    assert leak.minutes_over_limit is None, "ten minutes for five hourly readings would reassure"
    assert leak.reasons["minutes_over_limit"].key == "leak.typed_now_and_then"
    assert leak.over_since is None
    (doubt,) = leak_doubts(leak, ctx.policy.leak)
    assert doubt == Message("leak.flag_not_judged", {"over": 5, "of": 5, "n": 10, "m": 12})


def test_a_typed_reading_adds_no_minutes_to_those_of_the_device() -> None:
    log = f"{BEGIN} leak_definition unintentional\n{TYPED}\ndevice leak 06:00 06:20 45 45"
    ctx = context(log, "06:20")
    leak = leak_figure(ctx)
    assert leak.minutes_over_limit == 20
    assert leak.minutes_sampled == 20
    assert leak.sampled_in_part, "20 min of 4 h 20 min"
    assert (leak.readings_typed, leak.readings_typed_over) == (5, 5)
    assert leak_doubts(leak, ctx.policy.leak) == (), "the device's samples judge the flag"


def test_typed_readings_within_the_limit_leave_no_doubt() -> None:
    ctx = context(f"{BEGIN} leak_definition unintentional\n02:00 leak 20\n03:00 leak 30", "03:30")
    leak = leak_figure(ctx)
    assert leak.readings_typed_over == 0
    assert leak_doubts(leak, ctx.policy.leak) == ()


def test_a_total_leaks_limit_adds_the_port_at_the_time_weighted_pressure() -> None:
    log = f"{BEGIN} leak_definition total\n01:30 rr 20\ndevice leak 01:00 01:40 50 50"
    leak = leak_figure(context(log, "01:40"))
    mean = 5 + 15 * 1.0 * 20 / 60
    assert leak.limit_L_per_min == pytest.approx(30 + 8.02 * sqrt(mean), abs=1e-9)
    assert leak.minutes_over_limit == 0
    assert "assumption" not in leak.reasons


def test_an_assumed_duty_says_so() -> None:
    log = "00:30 hr 90\n01:00 mode BPAP-ST ipap 20 epap 5 leak_definition total\ndevice leak 01:00 01:40 50 50"
    assert leak_figure(context(log, "01:40")).reasons["assumption"].key == "leak.duty_assumed"


def test_cpap_uses_its_one_pressure() -> None:
    log = "00:30 rr 20\n01:00 mode CPAP cpap 9 leak_definition total\ndevice leak 01:00 01:40 50 50"
    assert leak_figure(context(log, "01:40")).limit_L_per_min == pytest.approx(30 + 8.02 * 3)


def test_ten_of_twelve_minutes() -> None:
    base = f"{BEGIN} leak_definition unintentional\ndevice leak 01:00 02:00 20 20\n"
    ten = context(base + "device leak 02:00 02:10 45 45\ndevice leak 02:10 03:00 20 20", "03:00")
    nine = context(base + "device leak 02:00 02:09 45 45\ndevice leak 02:09 03:00 20 20", "03:00")
    assert [(s.start, s.end) for s in leak_spells(ten, 10, 12)] == [(at("02:00"), at("02:10"))]
    assert leak_spells(nine, 10, 12) == ()


def test_before_and_after_a_mask_adjustment() -> None:
    log = f"{BEGIN}\n02:00 mask_adjusted\ndevice leak 01:00 02:00 60 60\ndevice leak 02:00 03:00 18 18"
    leak = leak_figure(context(log, "03:00"))
    assert leak.adjusted_at == at("02:00")
    assert (leak.before_adjustment_L_per_min, leak.after_adjustment_L_per_min) == (60, 18)


@pytest.mark.parametrize(
    "device",
    ["device leak 02:00 02:10 140 140", "device rr_total 02:00 02:10 0 0"],
    ids=["leak at the ceiling", "no breath"],
)
def test_a_probable_break_is_no_leak_and_voids_volumes(device: str) -> None:
    channel = device.split()[1]
    rest = {"leak": (20, "leak"), "rr_total": (20, "rr_total")}[channel]
    log = f"""00:30 height 175 sex male
        01:00 mode BPAP-ST ipap 20 epap 5 leak_definition unintentional
        device {rest[1]} 01:00 02:00 {rest[0]} {rest[0]}
        {device}
        device {rest[1]} 02:10 03:00 {rest[0]} {rest[0]}
        device vte 01:00 02:00 500 500
        device vte 02:00 02:10 90 90
        device vte 02:10 03:00 500 500"""
    ctx = context(log, "03:00")
    assert [(b.start, b.end) for b in probable_breaks(ctx)] == [(at("02:00"), at("02:10"))]
    assert leak_spells(ctx, 3, 3) == ()
    volume = channel_trend(ctx, "vte_per_kg")
    assert (volume.slope_low, volume.slope_high) == (0, 0)


def test_three_minutes_make_a_probable_break_two_do_not() -> None:
    base = f"{BEGIN}\ndevice leak 01:00 02:00 20 20\n"
    three = context(base + "device leak 02:00 02:03 140 140\ndevice leak 02:03 03:00 20 20", "03:00")
    two = context(base + "device leak 02:00 02:02 140 140\ndevice leak 02:02 03:00 20 20", "03:00")
    assert len(probable_breaks(three)) == 1
    assert probable_breaks(two) == ()


def test_a_logged_break_is_not_probable_and_an_open_one_stays_open() -> None:
    base = f"{BEGIN}\ndevice leak 01:00 02:00 20 20\ndevice leak 02:00 02:30 140 140\n"
    assert probable_breaks(context(base + "02:01 break_start", "02:30")) == ()
    (found,) = probable_breaks(context(base, "02:30"))
    assert found.end is None
    assert found.minutes(at("02:30")) * MINUTE == 30 * MINUTE


def test_another_meaning_of_leak_makes_no_common_trend() -> None:
    log = f"""{BEGIN} leak_definition unintentional
        03:00 leak_definition total
        device leak 01:00 02:00 20 20
        device leak 02:00 03:00 45 45
        device leak 03:00 05:00 48 48"""
    ctx = context(log, "05:00")
    leak = leak_figure(ctx)
    assert leak.definition == "total"
    assert leak.median_L_per_min == 48
    assert leak.slope_L_per_min_per_h == 0
    assert leak.reasons["span"].values["at"] == at("03:00")
    assert [s.start for s in leak_spells(ctx, 10, 12)] == [at("02:00")]


def test_a_meaning_stated_late_holds_for_what_came_before() -> None:
    log = f"{BEGIN}\n03:00 leak_definition unintentional\ndevice leak 01:00 04:00 45 45"
    leak = leak_figure(context(log, "04:00"))
    assert leak.minutes_over_limit == 180
    assert "span" not in leak.reasons


def test_the_leak_of_a_break_is_no_leak() -> None:
    log = f"{BEGIN} leak_definition unintentional\n02:00 break_start\n03:00 break_end\n"
    log += "device leak 01:00 02:00 20 20\n"
    leak = leak_figure(context(log + "device leak 02:00 03:00 90 90\ndevice leak 03:00 04:00 20 20", "04:00"))
    assert leak.median_L_per_min == 20
    assert leak.slope_L_per_min_per_h == 0
    assert leak.minutes_over_limit == 0


def test_no_leak_at_all() -> None:
    assert leak_figure(context(BEGIN, "02:00")).reasons["median_L_per_min"].key == "leak.no_values"
