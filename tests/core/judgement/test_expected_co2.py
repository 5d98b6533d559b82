"""The PaCO2 to expect from the ventilation delivered: its steady state, its pace, its doubts."""

from __future__ import annotations

import numpy as np
import pytest

from core.judgement.anchors import find_anchors
from core.judgement.expected_co2 import EXPLAIN_HIGHER, expected
from core.judgement.shapes import ExpectedCO2
from core.physiology.co2_course import FALL_HALF_TIME, paco2_after
from core.record.instant import MINUTE
from tests.support.log_cases import at, context


def found(log: str, as_of: str = "08:00") -> ExpectedCO2:
    ctx = context(log, as_of)
    anchors = find_anchors(ctx.episode, ctx.settings, ctx.support, ctx.policy)
    return expected(ctx, anchors[-1])


def record(mv_after: float, gas_after: str = "", more: str = "", change: str = "ipap 20") -> str:
    return f"""
        01:00 height 175 sex male rr 28
        01:30 ph 7.22 paco2 90
        02:00 mode BPAP-ST ipap 14 epap 5 leak_definition unintentional
        03:00 ph 7.26 paco2 80
        03:30 {change}
        {gas_after}
        {more}
        device mv 02:00 03:30 9 9
        device mv 03:30 08:00 {mv_after} {mv_after}
        device rr_total 02:00 08:00 20 20
        device leak 02:00 08:00 10 10
    """


DEAD = 2.2 * (50 + 0.91 * (175 - 152.4)) * 20 / 1000
"""L/min: dead space per breath x rate."""


def test_it_settles_where_the_alveolar_ventilation_equation_says() -> None:
    course = found(record(12.0))
    assert course.expected_mmHg[-1] == pytest.approx(80 * (9 - DEAD) / (12 - DEAD), rel=1e-3)
    assert course.low_mmHg[-1] < course.expected_mmHg[-1] < course.high_mmHg[-1]


def test_a_fall_is_fast_and_a_rise_slow() -> None:
    def done_at_30(mv: float) -> float:
        course = found(record(mv))
        i = course.t.index(at("04:00"))
        return (course.expected_mmHg[i] - 80) / (course.expected_mmHg[-1] - 80)

    assert done_at_30(12.0) == pytest.approx(1 - 2 ** (-30 / 3.5), abs=1e-3)
    assert done_at_30(7.5) == pytest.approx(1 - 2 ** (-30 / 16), abs=0.01)


def test_it_follows_the_closed_form() -> None:
    course = found(record(12.0))
    goal = 80 * (9 - DEAD) / (12 - DEAD)
    minutes = (np.array(course.t) - at("03:30")) / MINUTE
    wanted = paco2_after(80.0, goal, minutes, FALL_HALF_TIME)
    assert np.array(course.expected_mmHg) == pytest.approx(wanted)


def test_unchanged_ventilation_expects_no_change() -> None:
    assert found(record(9.0)).expected_mmHg[-1] == pytest.approx(80)


def test_a_gas_above_the_band_names_what_commonly_explains_it() -> None:
    course = found(record(12.0, "05:00 ph 7.24 paco2 82"))
    assert course.observed_at == at("05:00")
    assert course.observed_minus_expected_mmHg is not None
    assert course.observed_minus_expected_mmHg > 20
    assert [m.key for m in course.explanations] == [f"expected.{name}" for name in EXPLAIN_HIGHER]
    near = found(record(12.0, "05:00 ph 7.34 paco2 58"))
    assert [m.key for m in near.explanations] == ["expected.within_band"]


def test_assumptions_are_stated_and_leak_widens_the_band() -> None:
    plain = found(record(12.0))
    leaky = found(record(12.0).replace("leak 02:00 08:00 10 10", "leak 02:00 08:00 45 45"))
    assert [m.key for m in plain.assumptions] == [
        "expected.baseline_steady", "expected.ventilation_source", "expected.dead_space_assumed",
    ]  # fmt: skip
    assert plain.assumptions[2].values["dead_space_ml"] == 155
    assert leaky.assumptions[-1].key == "expected.leak_doubt"
    assert leaky.high_mmHg[-1] - leaky.low_mmHg[-1] > plain.high_mmHg[-1] - plain.low_mmHg[-1]


@pytest.mark.parametrize(
    ("log", "key"),
    [
        (record(12.0, change="fio2 40%").replace("epap 5", "epap 5 fio2 28%"), "expected.acts_not_on_co2"),
        (record(12.0, more="03:10 break_start\n03:15 break_end"), "expected.changed_before"),
        (record(12.0).replace("03:00 ph 7.26 paco2 80", ""), "expected.no_baseline"),
        (record(12.0).replace("device mv", "device hr"), "expected.ventilation_not_known"),
        ("01:30 ph 7.2 paco2 80\n02:00 mode BPAP-ST ipap 14 epap 5", "expected.needs_support_before"),
    ],
)
def test_where_it_cannot_say_it_says_why(log: str, key: str) -> None:
    course = found(log)
    assert course.t == ()
    assert course.reasons["expected_mmHg"].key == key


def test_it_stops_at_the_next_change() -> None:
    ctx = context(record(12.0, more="05:00 ipap 22\n05:30 ipap 24"), "08:00")
    anchors = find_anchors(ctx.episode, ctx.settings, ctx.support, ctx.policy)
    assert expected(ctx, anchors[1]).t[-1] == at("05:00")
