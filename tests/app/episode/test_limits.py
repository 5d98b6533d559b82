"""Bands are the patient's own targets and the policy's own numbers, in the reader's unit, with words."""

from dataclasses import replace

import msgspec
import pytest

from app.episode.limits import bands_of
from app.episode.on_screen import EpisodeOnScreen
from app.episode.panels import Panel
from core.judgement.policy import shipped_policy
from core.record.instant import HOUR
from tests.app.episode.test_stack_words import shown
from tests.support.invented_ward import failing


def bands(*channels: str, gas_unit: str = "mmHg", on: EpisodeOnScreen | None = None):
    on_screen = replace(on or aimed(88.0, 92.0, False), gas_unit=gas_unit)
    return bands_of(on_screen, Panel("p", "panel", channels))


def aimed(low: float, high: float, prescribed: bool) -> EpisodeOnScreen:
    on = shown(failing())
    now = replace(on.figures.now, spo2_target_low=low, spo2_target_high=high, spo2_target_prescribed=prescribed)
    return replace(on, figures=replace(on.figures, now=now))


@pytest.mark.parametrize(
    ("channel", "gas_unit", "low", "high", "word"),
    [
        ("ph", "mmHg", 7.35, 7.45, "pH 7.35 to 7.45"),
        ("paco2", "mmHg", None, 45, "PaCO2 up to 45 mmHg"),
        ("paco2", "kPa", None, 6.0, "PaCO2 up to 6.0 kPa"),
        ("pf", "mmHg", 300, None, "P/F above 300 mmHg"),
        ("spo2", "mmHg", 88, 92, "SpO2 88 to 92 %, none prescribed"),
        ("rr", "mmHg", None, 25, "RR up to 25/min"),
    ],
)
def test_a_limit_is_drawn_where_the_policy_has_it(channel, gas_unit, low, high, word):
    (band,) = bands(channel, gas_unit=gas_unit)
    assert band.word == word
    assert band.low == low if low is not None else band.low < -1e5
    assert band.high == high if high is not None else band.high > 1e5


def test_a_policy_of_the_ward_moves_the_band():
    policy = shipped_policy()
    state = msgspec.structs.replace(policy.state.acidotic_below_ph, value=7.30)
    own = msgspec.structs.replace(policy, state=msgspec.structs.replace(policy.state, acidotic_below_ph=state))
    (band,) = bands("ph", on=replace(shown(failing()), policy=own))
    assert (band.low, band.word) == (7.30, "pH 7.30 to 7.45")


def test_a_prescribed_target_stands_before_the_one_its_risk_calls_for():
    (band,) = bands("spo2", on=aimed(90.0, 94.0, True))
    assert (band.low, band.high, band.word) == (90, 94, "SpO2 target 90 to 94 %")


def test_a_range_that_became_another_one_says_since_when():
    on = aimed(88.0, 92.0, False)
    now = replace(on.figures.now, spo2_target_since=on.figures.as_of - 2 * HOUR)
    (band,) = bands("spo2", on=replace(on, figures=replace(on.figures, now=now)))
    assert band.word.startswith("SpO2 88 to 92 %, none prescribed, since ")


def test_bands_of_two_units_never_lie_over_each_other():
    assert [b.unit for b in bands("ph", "paco2")] == ["pH"]
    assert [b.unit for b in bands("spo2", "rr")] == ["%"]


def test_a_limit_of_two_channels_is_drawn_once():
    assert len(bands("rr", "rr_total")) == 1


def test_what_has_no_limit_has_no_band():
    assert bands("hr") == ()
