"""Published group means, read as one patient, must move the way the paper says and by about as much.

A group mean is not a patient: these check direction and size, nothing finer. Sources: ward COPD, n = 110 (Thorax,
table of gases on support: first hour pH 7.28 and PaCO2 9.9 kPa, day 1 7.34 and 9.0 kPa); group whose mask support
failed, at start and at intubation (J Anesth Clin Res 2014;5:378, table 3); COPD and obesity hypoventilation before
support and on it before discharge (Open Respir Med J 2017;11:31, table 4).
"""

from __future__ import annotations

import pytest

from core.judgement.anchors import find_anchors
from core.judgement.response import judge_responses
from core.judgement.response_shapes import ResponseFigure
from tests.support.log_cases import context

NEXT_DAY = """
00:30 indication copd
01:00 mode BPAP-ST ipap 14.2 epap 6.2
02:00 ph 7.28 paco2 9.9kPa
02:10 ipap 16.2
d1 02:00 ph 7.34 paco2 9.0kPa
"""
FAILED = """
00:30 ph 7.23 paco2 76.2 pao2 88.6 rr 30
01:00 mode BPAP-ST ipap 14 epap 5
02:00 ph 7.23 paco2 77.8 pao2 94.5 rr 25
"""


def last_response(log: str) -> ResponseFigure:
    ctx = context(log)
    return judge_responses(ctx, find_anchors(ctx.episode, ctx.settings, ctx.support, ctx.policy))[-1]


def test_ward_copd_is_better_by_the_next_day_and_still_acidotic() -> None:
    response = last_response(NEXT_DAY)
    (gas,) = response.gases
    assert (response.headline, response.state) == ("better", "acidotic")
    assert gas.delta_ph == pytest.approx(0.06)
    assert gas.delta_paco2_mmHg == pytest.approx(-0.9 * 7.50062, abs=1e-6)


def test_a_group_that_failed_shows_no_change_though_its_rate_fell() -> None:
    response = last_response(FAILED)
    assert (response.headline, response.state) == ("no clear change", "severe")


@pytest.mark.parametrize(
    ("before", "after"),
    [("ph 7.36 paco2 65.3 pao2 60.0", "ph 7.45 paco2 43.5 pao2 76.5"),
     ("ph 7.37 paco2 63.8 pao2 57.0", "ph 7.45 paco2 44.3 pao2 75.0")],
    ids=["copd", "obesity hypoventilation"],
)  # fmt: skip
def test_support_before_discharge_lowers_co2_without_over_correction(before: str, after: str) -> None:
    response = last_response(f"00:30 {before}\n01:00 mode BPAP-ST ipap 20 epap 6 spo2 92\n02:30 {after} spo2 95")
    assert response.gases[0].co2_arm == "better"
    assert response.state == "resolved"
