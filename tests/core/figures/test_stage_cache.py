"""Figures are the same with and without kept stages, whatever the clock and the record do in between."""

from functools import cache

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from core.figures.episode_figures import episode_figures
from core.figures.stage_cache import StageCache
from core.judgement.policy import read_policy, shipped_policy, shipped_text
from core.record.instant import MINUTE
from tests.support.log import device, episode, moment

NIGHT = """
00:30 label Bed 4
00:30 indication copd
00:40 rr 30 gcs 15 spo2 86
00:45 ph 7.24 paco2 78 pao2 55 site arterial
01:00 mode bpap-st ipap 14 epap 5 fio2 28
01:05 hr 110
01:50 rr 28 spo2 90 gcs 14
02:00 ph 7.27 paco2 70 pao2 60 site arterial
02:10 ipap 18
03:20 ph 7.33 paco2 61 pao2 62 site arterial
03:30 break start
04:10 break end
05:00 ended_at 2026-03-28T05:00:00+00:00
"""


@cache
def record():
    return episode(NIGHT, samples=[device("leak", "01:00", [20 + i % 9 for i in range(180)])])


@cache
def fresh(at):
    return episode_figures(record(), at, shipped_policy())


@settings(max_examples=40, deadline=None)
@given(st.lists(st.integers(0, 330), min_size=2, max_size=8))
def test_kept_stages_change_no_figure(minutes):
    kept = StageCache()
    for m in minutes:
        at = moment("00:30") + m * MINUTE
        assert episode_figures(record(), at, shipped_policy(), kept) == fresh(at)


def test_early_stages_are_computed_once_while_nothing_happens():
    calls = []

    def compute(record, at, policy):
        from core.figures.episode_figures import early_stages

        calls.append(at)
        return early_stages(record, at, policy)

    kept = StageCache()
    for m in (0, 1, 2, 3):
        kept.early_stages(record(), moment("04:20") + m * MINUTE, shipped_policy(), compute)
    assert len(calls) == 1


def test_another_policy_or_a_changed_record_is_computed_anew():
    kept, at = StageCache(), moment("03:25")
    other = read_policy(
        shipped_text().replace("severe_below_ph = { value = 7.25", "severe_below_ph = { value = 7.28")
    )
    assert episode_figures(record(), at, shipped_policy(), kept).gases[1].state == "acidotic"
    assert episode_figures(record(), at, other, kept).gases[1].state == "severe"
    changed = episode(NIGHT.replace("ph 7.27", "ph 7.20"))
    assert episode_figures(changed, at, shipped_policy(), kept).gases[1].state == "severe"


@pytest.mark.parametrize("most", [1, 3])
def test_no_more_episodes_are_kept_than_allowed(most):
    kept = StageCache(most)
    for n in range(5):
        episode_figures(episode(NIGHT, key=f"E{n}"), moment("03:00"), shipped_policy(), kept)
    assert len(kept) == most
