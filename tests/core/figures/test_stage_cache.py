"""Figures are the same with and without kept stages, whatever the clock and the record do in between."""

from functools import cache
from random import Random

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from core.figures.episode_figures import episode_figures, judged
from core.figures.stage_cache import StageCache
from core.judgement.flags import evaluate
from core.judgement.policy import read_policy, shipped_policy, shipped_text
from core.record.episode import build_episode
from core.record.instant import MINUTE, SECOND
from core.record.knowledge import standing
from core.record.samples import DeviceSamples
from tests.support.log import device, episode, moment
from tests.support.long_episode import END, long_episode
from tests.support.random_rows import ZERO, entries_of, thrown

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


CHANNELS = {"rr_total": (8, 40), "vte": (150, 900), "leak": (0, 70), "spo2": (80, 99), "mv": (2, 14)}
STEPS = (1, 60, 61, 599, 1800, 3600, 7201, 14400, -60)


def thrown_episode(dice, rows):
    """The rows with device samples by the minute over some of their time."""
    blocks = []
    for channel in dice.sample(sorted(CHANNELS), 3):
        first, length = dice.randint(-30, 300), dice.randint(10, 240)
        t = np.array([ZERO + (first + i) * MINUTE for i in range(length)], np.int64)
        low, high = CHANNELS[channel]
        spread = dice.choice((1, (high - low) / 2))
        v = np.clip(dice.uniform(low, high) + np.array([dice.gauss(0, spread) for _ in t]), low, high)
        blocks.append(DeviceSamples("E", channel, "device", t, v.round(1)))
    return build_episode("E", standing(entries_of(rows)), blocks)


@settings(max_examples=30, deadline=None)
@given(st.integers(0, 10**9))
def test_what_was_kept_is_what_would_be_found_anew_at_every_tick(seed):
    dice, (rows, _) = Random(seed), thrown(seed)
    record, kept, policy = thrown_episode(dice, rows), StageCache(), shipped_policy()
    at = ZERO + dice.choice(sorted({m for m, _, _ in rows})[-3:]) * MINUTE
    for _ in range(8):
        assert episode_figures(record, at, policy, kept) == episode_figures(record, at, policy), seed
        at += dice.choice(STEPS) * SECOND


def test_what_no_clock_moves_is_found_once():
    record, kept, at = long_episode(), StageCache(), END
    first = kept.observed(judged(record, at, shipped_policy(), kept))
    evaluate(first.ctx, first)
    later = kept.observed(judged(record, at + SECOND, shipped_policy(), kept))
    assert not later.has_moved("spo2_below_range")
    assert later.once(lambda _: [], "spo2_below_range") is first.once(lambda _: [], "spo2_below_range")
    assert later.once(lambda _: "anew", "gas_overdue") == "anew"


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
