"""Shift figures from a store: those of the episodes themselves, whether most of them ended long ago or not."""

from pathlib import Path

import pytest

from app import demo
from app.operations import entry, episode, statistics
from app.operations.episode import load
from app.operations.policy import in_force
from core.figures.ward_statistics import ward_statistics
from core.record.instant import HOUR, MINUTE, parse
from core.record.message import RecordError
from storage.store import Store
from tests.support.sample_ward import sample_night

START = parse("2026-03-27T19:30:00Z")


def test_a_span_is_what_its_episodes_are(tmp_path: Path) -> None:
    now = demo.demo_now()
    with Store.open(sample_night(tmp_path)) as store:
        records = [load(store, key) for key in store.episode_keys()]
        for start, end in ((START, now), (now - HOUR, now), (START - 24 * HOUR, START + HOUR)):
            found = statistics.of_ward(store, "", now, statistics.StatisticsRequest(start, end)).value
            assert found == ward_statistics(records, start, end, in_force(store))


def test_what_ended_before_the_span_is_not_read_and_what_ended_in_it_counts(tmp_path: Path) -> None:
    with Store.create(tmp_path / "w.luffmark", now=START - 9 * HOUR) as store:
        for key, hours in (("OLD", 4), ("ENDED", -1), ("RUNS", None)):
            episode.begin(store, "AB", START - 8 * HOUR, episode.BeginRequest(key, {"label": key}))
            line(store, key, START - 7 * HOUR, "bpap-st 14/5 28")
            if hours is not None:
                line(store, key, START - hours * HOUR, "stopped")
        found = statistics.of_ward(store, "", START + 2 * HOUR, statistics.StatisticsRequest(START, START + 2 * HOUR))
        assert found.value.episodes == 2
        assert found.value.ends == {"stopped": 1}
        assert found.value.hours_on_mask == pytest.approx(1.0 + 2.0)


def line(store: Store, key: str, at: int, text: str) -> None:
    entry.log_line(store, "AB", at + MINUTE, entry.LineRequest(key, f"{clock(at)} {text}", "UTC", confirmed=True))


def clock(at: int) -> str:
    minutes = at // MINUTE % (24 * 60)
    return f"{minutes // 60:02d}:{minutes % 60:02d}"


def test_a_span_that_runs_backwards_or_lies_ahead_is_refused(tmp_path: Path) -> None:
    with Store.create(tmp_path / "w.luffmark", now=START) as store:
        for start, end in ((START, START - HOUR), (START + HOUR, START + 2 * HOUR)):
            with pytest.raises(RecordError) as refused:
                statistics.of_ward(store, "", START, statistics.StatisticsRequest(start, end))
            assert refused.value.message.key == "statistics.backwards"


def test_what_is_known_at_a_moment_is_counted_up_to_it(tmp_path: Path) -> None:
    now, known = demo.demo_now(), START + 5 * HOUR
    with Store.open(sample_night(tmp_path)) as store:
        asked = statistics.of_ward(store, "", now, statistics.StatisticsRequest(START, now, known)).value
        then = statistics.of_ward(store, "", known, statistics.StatisticsRequest(START, known, known)).value
    assert asked == then
    assert asked.end == known
