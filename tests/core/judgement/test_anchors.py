"""What a change can act on, said at entry; and how moments become anchors."""

from __future__ import annotations

from math import nan

import pytest

from core.judgement.anchors import effect_of_change, find_anchors
from core.judgement.setting_change import changed, effects
from core.record.settings import Settings
from tests.support.log_cases import at, context


def settings(
    ipap: float = 16, epap: float = 5, fio2: float = 0.35, flow: float = nan, rate: float = 14, ti: float = 1.0,
    mode: str | None = "BPAP-ST", cpap: float = nan, interface: str | None = "oronasal",
) -> Settings:  # fmt: skip
    return Settings(mode, ipap, epap, cpap, fio2, flow, rate, ti, interface)


@pytest.mark.parametrize(
    ("after", "own_rate", "keys", "acts"),
    [
        (settings(ipap=20), 24, ["effect.pressure_support"], ("co2",)),
        (settings(epap=8), 24, ["effect.epap_lowers_support"], ("co2", "oxygen")),
        (settings(ipap=19, epap=8), 24, ["effect.support_kept"], ("oxygen",)),
        (settings(fio2=0.5), 24, ["effect.fio2"], ("oxygen",)),
        (settings(fio2=nan, flow=6), 24, ["effect.fio2_not_known", "effect.o2_flow"], ("oxygen",)),
        (settings(rate=18), 24, ["effect.rate_none"], ()),
        (settings(rate=18), 16, ["effect.rate"], ("co2",)),
        (settings(rate=18), None, ["effect.rate_not_known"], ("co2",)),
        (settings(ti=1.4), 24, ["effect.ti"], ("co2",)),
        (settings(interface="helmet"), 24, ["effect.interface"], ("co2", "oxygen")),
        (settings(), 24, [], ()),
    ],
    ids=lambda v: ",".join(v) if isinstance(v, list) else None,
)
def test_effect_of_change(after: Settings, own_rate: float | None, keys: list[str], acts: tuple[str, ...]) -> None:
    before = settings()
    assert [m.key for m in effect_of_change(before, after, own_rate)] == keys
    assert effects(changed(0, before, after), before, after, own_rate) == acts


@pytest.mark.parametrize(("ipap", "epap", "support"), [(16, 6, 10), (22, 6, 16), (20, 9, 11), (28, 4, 24)])
def test_both_pressures_are_named_where_both_move(ipap: float, epap: float, support: float) -> None:
    told = effect_of_change(settings(ipap=24), settings(ipap=ipap, epap=epap), 24)
    assert [m.key for m in told] == ["effect.pressure_support"]
    assert dict(told[0].values) == {
        "ipap_before": 24, "ipap_after": ipap, "epap_before": 5, "epap_after": epap, "before": 19, "after": support,
    }  # fmt: skip


def test_a_lowered_backup_rate_acts_when_the_patient_rides_on_it() -> None:
    before, after = settings(rate=18), settings(rate=12)
    assert effects(changed(0, before, after), before, after, 18) == ("co2",)


@pytest.mark.parametrize("mode", ["BPAP-S", "CPAP"])
def test_a_rate_does_nothing_in_a_mode_without_one(mode: str) -> None:
    before, after = settings(mode=mode, cpap=5, rate=10), settings(mode=mode, cpap=5, rate=20)
    assert [m.key for m in effect_of_change(before, after, 8)] == ["effect.rate_none"]


def test_a_rate_always_acts_in_a_timed_mode() -> None:
    before, after = settings(mode="BPAP-T", rate=14), settings(mode="BPAP-T", rate=18)
    assert [m.key for m in effect_of_change(before, after, 30)] == ["effect.rate"]


def test_cpap_to_bpap_starts_pressure_support_from_nothing() -> None:
    steps = changed(0, settings(mode="CPAP", ipap=nan, epap=nan, cpap=8), settings(ipap=16, epap=8))
    assert [(s.channel, s.before, s.after) for s in steps] == [
        ("mode", "CPAP", "BPAP-ST"), ("pressure_support", 0.0, 8.0),
    ]  # fmt: skip


def test_a_value_recorded_for_the_first_time_is_no_change() -> None:
    assert changed(0, settings(rate=nan, fio2=nan, interface=None), settings()) == ()


def test_no_support_no_anchor() -> None:
    ctx = context("01:00 rr 24\n02:00 fio2 28%")
    assert find_anchors(ctx.episode, ctx.settings, ctx.support, ctx.policy) == ()


def test_a_change_after_support_ended_is_no_anchor() -> None:
    ctx = context("01:00 rr 24\n02:00 mode BPAP-ST ipap 16 epap 5\n04:00 stopped\n04:30 fio2 28%")
    anchors = find_anchors(ctx.episode, ctx.settings, ctx.support, ctx.policy)
    assert [(a.kind, a.at) for a in anchors] == [("start", at("02:00"))]


def test_a_restart_is_the_end_of_a_break() -> None:
    ctx = context("01:00 rr 24\n02:00 mode BPAP-ST ipap 16 epap 5\n08:00 stopped\n20:00 mask_on")
    anchors = find_anchors(ctx.episode, ctx.settings, ctx.support, ctx.policy)
    assert [(a.kind, a.at) for a in anchors] == [("start", at("02:00")), ("break_end", at("20:00"))]
    assert anchors[1].steps[0].before == pytest.approx(720)


def test_running_before_logging_is_marked() -> None:
    ctx = context("02:00 mode BPAP-ST ipap 16 epap 5")
    (start,) = find_anchors(ctx.episode, ctx.settings, ctx.support, ctx.policy)
    assert start.running_before
    stated = context("02:00 mode BPAP-ST ipap 16 epap 5 started_at 2026-03-26T20:00:00+00:00")
    (start,) = find_anchors(stated.episode, stated.settings, stated.support, stated.policy)
    assert start.running_before
    assert start.at == at("02:00") - 6 * 3_600_000_000
