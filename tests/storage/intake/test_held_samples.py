"""What a store has is told sample by sample, however its blocks are cut: nothing is taken twice, nothing missed."""

from itertools import count, pairwise
from pathlib import Path

import numpy as np
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from core.record.channels import channel
from core.record.instant import DAY, HOUR, MINUTE, SECOND, parse
from core.record.samples import DeviceSamples
from storage.block_cuts import NEAR
from storage.draft_batch import DraftBatch
from storage.intake.held_samples import _new_of
from storage.intake.judged import new_chunks
from storage.intake.sample_spool import SampleSpool
from storage.store import Store
from tests.storage.conftest import NOW

T0 = parse("2026-03-27T00:00:00Z")
NUMBERS = count()


def taken(
    store: Store, source: str, minutes: np.ndarray, values: np.ndarray, key: str = "leak"
) -> tuple[int, int, int]:
    """Take minutes of the day in as a file would: how many samples are new, held just so, and laid over."""
    spool = SampleSpool()
    lines = np.arange(minutes.size, dtype=np.int32) + 2
    t = T0 + np.round(minutes * MINUTE).astype(np.int64)
    spool.add("E1", channel(key), channel(key).unit, "", t, values, lines, 0)
    fresh, known = new_chunks(spool, source, store, lambda: None)
    if len(fresh):
        store.append_drafts([DraftBatch("AB", "intake", chunks=tuple(fresh))], (NOW,))
    return fresh.samples, known, sum(span.over for span in fresh.spans.values())


def test_a_days_file_that_grew_brings_only_its_new_hours(store: Store) -> None:
    day = np.arange(24 * 60)
    assert taken(store, "a", day[: 14 * 60], day[: 14 * 60] % 50.0) == (14 * 60, 0, 0)
    assert taken(store, "b", day[: 20 * 60], day[: 20 * 60] % 50.0) == (6 * 60, 14 * 60, 0)
    assert taken(store, "c", day[: 20 * 60], day[: 20 * 60] % 50.0) == (0, 20 * 60, 0)
    changed = day % 50.0
    changed[3 * 60 + 5] += 1
    assert taken(store, "d", day, changed) == (4 * 60 + 1, 20 * 60 - 1, 1)
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


def test_a_file_taken_at_14_and_again_at_20_brings_what_came_between_alone(store: Store) -> None:
    for step, last, later in ((MINUTE, 14 * 60 + 7, 20 * 60 + 3), (10 * SECOND, 84 * 60 + 5, 120 * 60 + 1)):
        name = f"step {step}"
        times = np.arange(later) * step / MINUTE
        first, again = times[:last], times
        key = "leak" if step == MINUTE else "vte"
        assert taken(store, name, first, first % 50.0, key) == (last, 0, 0)
        assert taken(store, f"{name} again", again, again % 50.0, key) == (later - last, last, 0)
        assert taken(store, f"{name} third", again, again % 50.0, key) == (0, later, 0)
        held = store.samples("E1", channel=key)[0]
        assert np.array_equal(held.v, again % 50.0)


def test_how_many_samples_of_earlier_files_would_lie_under_is_counted(store: Store) -> None:
    day = np.arange(10 * 60)
    taken(store, "a", day, np.full(day.size, 20.0))
    assert taken(store, "b", day[120:180], np.full(60, 30.0)) == (60, 0, 60)
    every_other = day[300:400:2]
    assert taken(store, "c", every_other, np.full(50, 40.0)) == (50, 0, 99), "those between lie under it too"
    assert taken(store, "d", np.arange(700, 760), np.full(60, 9.0)) == (60, 0, 0)


@settings(max_examples=60, deadline=None)
@given(st.integers(0, 2**32), st.sampled_from([0.02, 0.3, 0.9]))
def test_what_is_new_is_all_that_differs_and_nothing_before_or_behind_it_in_its_hour(seed: int, share: float) -> None:
    rng = np.random.default_rng(seed)
    t = T0 + np.sort(rng.choice(6 * 3600, 400, replace=False)) * SECOND
    same = rng.random(t.size) > share
    new = _new_of(t, same)
    assert not (~same & ~new).any(), "nothing new is missed"
    for hour in np.unique(t // HOUR):
        inside = np.flatnonzero((t // HOUR == hour) & new)
        if inside.size:
            assert not same[inside[0]]
            assert not same[inside[-1]]
            assert inside.size == inside[-1] - inside[0] + 1


def test_files_of_many_days_are_compared_in_parts_of_days(store: Store, monkeypatch: pytest.MonkeyPatch) -> None:
    """The store may hold every second of what a file has a few values a day of: memory must not follow the span."""
    asked: list[tuple[int, int]] = []
    read = Store.samples

    def watched(self: Store, *args: object, between: tuple[int, int], **named: object) -> object:
        asked.append(between)
        return read(self, *args, between=between, **named)  # type: ignore[arg-type]

    taken(store, "a", np.array([0]), np.array([1.0]))
    monkeypatch.setattr(Store, "samples", watched)
    taken(store, "b", np.arange(0, 200 * 24 * 60, 14), np.full(200 * 24 * 60 // 14 + 1, 20.0))
    assert len(asked) >= 9
    assert max(last - first for first, last in asked) <= 20 * DAY


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
            new, known, _ = taken(store, f"file {number}", minutes, np.full(minutes.size, float(value)))
            changed = [h for h in range(first, first + hours)
                       if any(held.get(T0 + h * HOUR + m * MINUTE) != value for m in range(60))]  # fmt: skip
            assert (new, known) == (60 * len(changed), 60 * (hours - len(changed)))
            model |= {T0 + int(m) * MINUTE: float(value) for m in minutes}
        found: DeviceSamples = store.samples("E1", channel="leak")[0]
        assert {int(t): float(v) for t, v in zip(found.t, found.v, strict=True)} == model


@settings(max_examples=40, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(seed=st.integers(0, 2**32))
def test_whatever_lay_there_a_file_is_seen_as_it_is_and_hides_nothing_in_its_pauses(
    tmp_path: Path, seed: int
) -> None:
    """Files of any step, hole and order: the newest's samples are seen, none is made up, its pauses are free."""
    rng = np.random.default_rng(seed)
    with Store.create(tmp_path / f"{next(NUMBERS)}.luff", now=NOW) as store:
        seen: dict[int, float] = {}
        for number in range(4):
            step = rng.choice([10, 60, 300, 1200])
            at = np.arange(rng.integers(0, 3600), rng.integers(4000, 40_000), step)
            at = at[rng.random(at.size) > rng.choice([0, 0.1, 0.7])]
            hole = rng.integers(0, 40_000)
            at = at[(at < hole) | (at > hole + rng.choice([0, 600, 5000]))]
            if at.size == 0:
                continue
            values = np.floor(at / 600) % 3 + (number if rng.random() < 0.3 else 0)
            taken(store, f"file {number}", at / 60, values)
            (found,) = store.samples("E1", channel="leak")
            now = dict(zip(((found.t - T0) // SECOND).tolist(), found.v.tolist(), strict=True))
            newest = dict(zip(at.tolist(), values.tolist(), strict=True))
            assert newest.items() <= now.items()
            assert now.items() <= (seen | newest).items()
            edges = [-(10**9), *at.tolist(), 10**9]
            free = [t for t in seen if any(a < t < b for a, b in pairwise(edges) if b - a > NEAR // SECOND)]
            assert {t: seen[t] for t in free}.items() <= now.items(), "a pause hides nothing"
            seen = now
