"""How long the figures of a 72 h episode take, beside the time pandas takes to read that episode's file."""

from io import StringIO
from itertools import count
from statistics import median
from time import perf_counter

import pandas as pd
import pytest

from core.figures.episode_figures import episode_figures
from core.figures.stage_cache import StageCache
from core.judgement.policy import shipped_policy
from core.record.instant import SECOND
from tests.support.long_episode import END, long_csv, long_episode


def timed(call, runs=9):
    times = []
    for _ in range(runs):
        begun = perf_counter()
        call()
        times.append(perf_counter() - begun)
    return median(times)


@pytest.mark.bench
def test_figures_of_72_hours_beside_reading_the_file(capsys):
    episode, policy, text, kept = long_episode(), shipped_policy(), long_csv(), StageCache()
    clock = count(END, SECOND)
    episode_figures(episode, next(clock), policy, kept)
    cold = timed(lambda: episode_figures(episode, END, policy))
    figures = timed(lambda: episode_figures(episode, next(clock), policy, kept))
    reading = timed(lambda: pd.read_csv(StringIO(text)))
    with capsys.disabled():
        print(
            f"\nfigures of 72 h, the clock a second on: {figures * 1e3:.1f} ms (limit 10); cold {cold * 1e3:.1f} ms"
        )
        print(f"pandas reads its file in {reading * 1e3:.1f} ms; ratio {figures / reading:.2f}")
    assert figures < 10 * reading


@pytest.mark.bench
def test_figures_grow_no_faster_than_the_number_of_episodes(capsys):
    episode, policy = long_episode(24), shipped_policy()
    one = timed(lambda: episode_figures(episode, END, policy))
    twenty = timed(lambda: [episode_figures(episode, END, policy) for _ in range(20)], runs=3)
    with capsys.disabled():
        print(f"\n20 episodes of 24 h: {twenty / one:.1f} x one (linear is 20)")
    assert twenty < 30 * one
