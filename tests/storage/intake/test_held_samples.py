"""What a store has is told by the hour, however its blocks are cut: nothing is taken twice, nothing new is missed."""

from itertools import count
from pathlib import Path

import numpy as np
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from core.record.channels import channel
from core.record.instant import HOUR, MINUTE, parse
from core.record.samples import DeviceSamples
from storage.draft_batch import DraftBatch
from storage.intake.judged import new_chunks
from storage.intake.sample_spool import SampleSpool
from storage.store import Store
from tests.storage.conftest import NOW

T0 = parse("2026-03-27T00:00:00Z")
NUMBERS = count()


def taken(store: Store, source: str, minutes: np.ndarray, values: np.ndarray) -> tuple[int, int]:
    """Take minutes of the day in as a file would; how many samples are new and how many the store has."""
    spool = SampleSpool()
    lines = np.arange(minutes.size, dtype=np.int32) + 2
    spool.add("E1", channel("leak"), "L/min", "", T0 + minutes * MINUTE, values, lines, 0)
    fresh, known = new_chunks(spool, source, store, lambda: None)
    if len(fresh):
        store.append_drafts([DraftBatch("AB", "intake", chunks=tuple(fresh))], (NOW,))
    return fresh.samples, known


def test_a_days_file_that_grew_brings_only_its_new_hours(store: Store) -> None:
    day = np.arange(24 * 60)
    assert taken(store, "a", day[: 14 * 60], day[: 14 * 60] % 50.0) == (14 * 60, 0)
    assert taken(store, "b", day[: 20 * 60], day[: 20 * 60] % 50.0) == (6 * 60, 14 * 60)
    assert taken(store, "c", day[: 20 * 60], day[: 20 * 60] % 50.0) == (0, 20 * 60)
    changed = day % 50.0
    changed[3 * 60 + 5] += 1
    assert taken(store, "d", day, changed) == (5 * 60, 19 * 60)
    held = store.samples("E1", channel="leak")[0]
    assert np.array_equal(held.t, T0 + day * MINUTE)
    assert np.array_equal(held.v, changed)


def test_hours_that_another_file_filled_stay_where_a_file_has_a_pause(store: Store) -> None:
    day = np.arange(24 * 60)
    between = (day >= 8 * 60) & (day < 11 * 60)
    taken(store, "a", day[between], np.full(180, 30.0))
    taken(store, "b", day[~between], np.full(21 * 60, 20.0))
    held = store.samples("E1", channel="leak")[0]
    assert np.array_equal(held.t, T0 + day * MINUTE)
    assert np.array_equal(held.v, np.where(between, 30.0, 20.0))


@settings(max_examples=30, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(files=st.lists(st.tuples(st.integers(0, 20), st.integers(1, 20), st.integers(0, 2)), min_size=1, max_size=6))
def test_whole_hours_of_files_in_any_order_end_as_laid_hour_by_hour(
    tmp_path: Path, files: list[tuple[int, int, int]]
) -> None:
    model: dict[int, float] = {}
    with Store.create(tmp_path / f"{next(NUMBERS)}.luff", now=NOW) as store:
        for number, (first, hours, value) in enumerate(files):
            minutes = np.arange(first * 60, (first + hours) * 60)
            before = store.samples("E1", channel="leak")
            held = {int(t): float(v) for t, v in zip(before[0].t, before[0].v, strict=True)} if before else {}
            new, known = taken(store, f"file {number}", minutes, np.full(minutes.size, float(value)))
            same = [h for h in range(first, first + hours)
                    if all(held.get(T0 + h * HOUR + m * MINUTE) == value for m in range(60))]  # fmt: skip
            assert (new, known) == (60 * (hours - len(same)), 60 * len(same))
            model |= {T0 + int(m) * MINUTE: float(value) for m in minutes}
        found: DeviceSamples = store.samples("E1", channel="leak")[0]
        assert {int(t): float(v) for t, v in zip(found.t, found.v, strict=True)} == model
