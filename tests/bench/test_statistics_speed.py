"""How long shift figures take: of the sample night, and of a month of a ward, each against what they are sums of."""

from pathlib import Path
from time import perf_counter

import pytest

from app import demo
from app.operations import statistics
from app.operations.episode import load
from core.figures.episode_figures import episode_figures
from core.figures.ward_statistics import episode_statistics, nothing
from core.judgement.policy import shipped_policy
from core.record.instant import HOUR
from storage.store import Store

pytestmark = pytest.mark.bench
SHARE = 1.6
"""Counting may cost so much of what the figures themselves cost: they are computed once for each episode."""
COPIES = 25
"""Times the twelve episodes of the night: 300, a month of a busy ward."""


def test_counting_costs_little_more_than_the_figures_it_counts(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    now = demo.demo_now()
    start, policy = now - 10 * HOUR, shipped_policy()
    with Store.open(demo.make_demo_store(tmp_path)) as store:
        records = [load(store, key) for key in store.episode_keys()]
        request = statistics.StatisticsRequest(start, now)
        ratios, nights, months = [], [], []
        for _ in range(3):
            begun = perf_counter()
            for record in records:
                episode_figures(record, now, policy)
            figured = perf_counter()
            total = nothing(start, now, policy)
            for record in records:
                total += episode_statistics(record, start, now, policy)
            counted = perf_counter()
            for _ in range(COPIES):
                for record in records:
                    total += episode_statistics(record, start, now, policy)
            ended = perf_counter()
            statistics.of_ward(store, "", now, request)
            nights.append(perf_counter() - ended)
            ratios.append((counted - figured) / (figured - begun))
            months.append(ended - counted)
    ratio, night, month = sorted(ratios)[1], sorted(nights)[1], sorted(months)[1]
    with capsys.disabled():
        print(f"\nshift figures: {night * 1000:.0f} ms for 12 episodes from the store, {month:.2f} s for "
              f"{12 * COPIES}; {ratio:.2f} of the figures they count")  # fmt: skip
    assert total.episodes == 12 * (COPIES + 1)
    assert ratio <= SHARE
