"""How long all markers and due items of a 72 h episode take, beside the stages before them."""

from statistics import median
from time import perf_counter

import pytest

from core.figures.episode_figures import judged
from core.judgement.due import due_items
from core.judgement.flags import evaluate
from core.judgement.markers.observed import Observed
from core.judgement.policy import read_policy, shipped_policy, shipped_text
from tests.support.long_episode import END, long_episode


def interleaved(*calls, rounds=15):
    """Medians of several calls, taken in turn so that a busy machine is busy for all."""
    times = [[] for _ in calls]
    for _ in range(rounds):
        for call, kept in zip(calls, times, strict=True):
            begun = perf_counter()
            call()
            kept.append(perf_counter() - begun)
    return [median(kept) for kept in times]


@pytest.mark.bench
def test_markers_and_due_items_of_72_hours(capsys):
    episode, policy = long_episode(), shipped_policy()
    ctx = judged(episode, END, policy)

    def markers():
        seen = Observed(ctx)
        return due_items(ctx, evaluate(ctx, seen), seen)

    markers()
    ours, before = interleaved(markers, lambda: judged(episode, END, policy))
    with capsys.disabled():
        print(f"\nmarkers and due items of 72 h: {ours * 1e3:.1f} ms (aim 3); stages before: {before * 1e3:.1f} ms")
    assert ours < before


@pytest.mark.bench
def test_reading_a_policy(capsys):
    text = shipped_text()
    first, again = interleaved(lambda: read_policy.__wrapped__(text), lambda: read_policy(text))
    with capsys.disabled():
        print(f"\na policy is read in {first * 1e3:.1f} ms (aim 3), again in {again * 1e6:.0f} us")
    assert again < first / 20
