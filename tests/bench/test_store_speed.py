"""What the store costs: one entry committed, opening, the size of device samples and the time to decode them.

Ratios and differences of interleaved medians inside one run; the limits are those of the design.
"""

from __future__ import annotations

import shutil
import subprocess
import sys
from collections.abc import Callable
from dataclasses import fields
from pathlib import Path
from statistics import median
from time import perf_counter

import numpy as np
import pytest

from app.operations import episode_shelf
from app.operations import figures as figure_operations
from app.operations import flag as flag_operations
from app.operations import store as store_operations
from core.figures.episode_figures import episode_figures
from core.judgement.policy import shipped_policy
from core.record.entries import NewEntry
from core.record.instant import DAY, HOUR, MINUTE, SECOND
from core.record.samples import DeviceSamples
from storage.draft_batch import DraftBatch, DraftEntry
from storage.keys import Cost
from storage.store import Store
from tests.support.bare_insert import NOW, bare_insert, bare_table, entry, store_insert
from tests.support.long_episode import END, long_entries, long_samples

pytestmark = pytest.mark.bench
SECRET = "correct horse ward 7"


def interleaved(runs: int, *calls: Callable[[int], object]) -> list[float]:
    """The median seconds of each call, taken in turns so that the machine's mood is shared."""
    times: list[list[float]] = [[] for _ in calls]
    for i in range(runs):
        for call, own in zip(calls, times, strict=True):
            begun = perf_counter()
            call(i)
            own.append(perf_counter() - begun)
    return [median(own) for own in times]


def test_one_entry_committed(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    bare = bare_table(tmp_path / "bare.db")
    plain = Store.create(tmp_path / "ward.luff", now=NOW)
    locked = Store.create(tmp_path / "locked.luff", now=NOW, passphrase=SECRET, cost=Cost(64, 1, 1))
    b, p, e = interleaved(
        300,
        lambda i: bare_insert(bare, i),
        lambda i: store_insert(plain, i),
        lambda i: store_insert(locked, i),
    )
    for opened in (bare, plain, locked):
        opened.close()
    with capsys.disabled():
        print(f"\none entry: bare {b * 1e3:.2f} ms, store +{(p - b) * 1e3:.2f}, encrypted +{(e - p) * 1e3:.2f} more")
    assert p - b <= 3e-3
    assert e - p <= 1e-3


@pytest.mark.skipif(shutil.which("strace") is None, reason="needs strace to count calls")
def test_one_entry_costs_as_many_syncs_as_a_bare_insert(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    Store.create(tmp_path / "ward.luff", now=NOW).close()
    bare_table(tmp_path / "bare.db").close()

    def syncs(kind: str, count: int) -> int:
        log = tmp_path / "calls"
        command = ["strace", "-f", "-o", str(log), "-e", "trace=fsync,fdatasync", sys.executable, "-m",
                   "tests.support.bare_insert", kind, str(tmp_path), str(count)]  # fmt: skip
        subprocess.run(command, check=True, cwd=Path(__file__).parents[2])
        return sum("sync(" in line for line in log.read_text().splitlines())

    per_entry = {kind: (syncs(kind, 60) - syncs(kind, 10)) / 50 for kind in ("bare", "store")}
    with capsys.disabled():
        print(f"\nsyncs for one entry: {per_entry}")
    assert per_entry["store"] <= per_entry["bare"] + 0.1


def filled(path: Path, episodes: int, still_open: int = 0) -> Path:
    """A store of closed episodes with a few entries each, and some that are still open."""
    with Store.create(path, now=NOW) as store:
        for start in range(0, episodes, 500):
            rows = [_few_entries(f"E{i}") for i in range(start, min(start + 500, episodes))]
            drafts = tuple(DraftEntry(e) for row in rows for e in row)
            store.append_drafts((DraftBatch("AB", "log", drafts),), (NOW,))
        for i in range(still_open):
            store.append(_few_entries(f"O{i}")[:-1], by="AB", operation="log", now=NOW)
    return path


def _few_entries(key: str) -> list[NewEntry]:
    ended = NewEntry(key, "ended_at", NOW, float(NOW))
    return [NewEntry(key, "label", NOW, words=key), entry(1, key), entry(2, key), entry(3, key), ended]


def test_opening_a_store_of_20000_closed_episodes(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    small, large = filled(tmp_path / "small.luff", 20), filled(tmp_path / "large.luff", 20_000)

    def opened(path: Path) -> Callable[[int], object]:
        def run(_i: int) -> None:
            with Store.open(path) as store:
                assert store.open_episode_keys() == ()
                store.changes_since(store.head())
                store.episode("E7")

        return run

    few, many = interleaved(30, opened(small), opened(large))
    with capsys.disabled():
        print(f"\nopening: 20 episodes {few * 1e3:.1f} ms, 20,000 {many * 1e3:.1f} ms, ratio {many / few:.2f}")
    assert many <= 1.3 * few


def test_a_window_opening_a_store_of_20000_closed_episodes(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """What a window asks before its first ward view stands, and right after: the same operations in their order."""
    stores = [filled(tmp_path / f"{n}.luff", n, still_open=12) for n in (20, 20_000)]
    now = NOW + 3 * DAY

    def opened(path: Path) -> Callable[[int], object]:
        def run(_i: int) -> None:
            episode_shelf._shelves.clear()  # a window that was just started has read nothing yet
            with Store.open(path) as store:
                facts = store_operations.describe(store, "AB", now, None).value
                ward = figure_operations.of_ward(store, "AB", now, figure_operations.WardRequest(now)).value
                flag_operations.keep_transitions(store, "AB", now, sorted(facts.episodes))
                store_operations.changes(store, "AB", now, store.head())
                assert len(ward.episodes) == len(facts.episodes) == 12

        return run

    few, many = interleaved(20, *(opened(p) for p in stores))
    with capsys.disabled():
        print(f"\nwindow opening: 20 closed {few * 1e3:.0f} ms, 20,000 {many * 1e3:.0f} ms, ratio {many / few:.2f}")
    assert many <= 1.3 * few


def test_logging_costs_the_same_beside_10000_episodes(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    stores = [Store.open(filled(tmp_path / f"{n}.luff", n)) for n in (10, 10_000)]

    def log(store: Store) -> Callable[[int], object]:
        def run(i: int) -> None:
            seq = store.append([entry(i, f"E{i % 10}")], by="AB", operation="log", now=NOW + i).last_seq
            for key in store.changes_since(seq - 1).episodes:
                store.episode(key)

        return run

    few, many = interleaved(200, *(log(s) for s in stores))
    for store in stores:
        store.close()
    with capsys.disabled():
        print(f"\nlog and read: 10 episodes {few * 1e3:.2f} ms, 10,000 {many * 1e3:.2f}, ratio {many / few:.2f}")
    assert many <= 1.3 * few


def minutes_of_a_year(mean: float, spread: float, decimals: int, seed: int) -> np.ndarray:
    """A device's values by the minute: a slow drift over days and noise from minute to minute."""
    rng = np.random.default_rng(seed)
    n = 365 * 24 * 60
    drift = np.cumsum(rng.normal(0, spread / 60, n))
    drift -= np.linspace(0, drift[-1], n)
    return np.round(np.maximum(mean + drift % (4 * spread) + rng.normal(0, spread, n), 0), decimals)


@pytest.mark.parametrize(
    ("channel", "mean", "spread", "decimals"),
    [("leak", 24, 4, 0), ("vte", 480, 45, 0), ("mv", 8, 0.8, 1), ("rr_total", 18, 2, 0), ("spo2", 91, 1, 0)],
)
def test_a_channel_year_by_the_minute(
    tmp_path: Path,
    capsys: pytest.CaptureFixture[str],
    channel: str,
    mean: float,
    spread: float,
    decimals: int,
) -> None:
    v = np.minimum(minutes_of_a_year(mean, spread, decimals, 1), {"spo2": 100.0}.get(channel, 3000.0))
    t = NOW // HOUR * HOUR + MINUTE * np.arange(v.size, dtype=np.int64)
    with Store.create(tmp_path / "ward.luff", now=NOW) as store:
        store.append(
            [],
            by="AB",
            operation="intake",
            now=NOW,
            samples=[DeviceSamples("E1", channel, "s", t, v, decimals)],
        )
    size = (tmp_path / "ward.luff").stat().st_size
    with capsys.disabled():
        print(f"\n{channel}: {size / 1e6:.2f} MB a channel-year, {size / v.size:.2f} bytes a sample")
    assert size <= 2e6


@pytest.mark.parametrize("encrypted", [False, True])
def test_six_channels_of_72_hours_at_1_hz(
    tmp_path: Path, capsys: pytest.CaptureFixture[str], encrypted: bool
) -> None:
    rng = np.random.default_rng(2)
    t = NOW + SECOND * np.arange(72 * 3600, dtype=np.int64)
    blocks = [
        DeviceSamples("E1", c, "s", t, np.round(rng.normal(mean, mean / 8, t.size), d), d)
        for c, mean, d in (
            ("leak", 24, 0),
            ("vte", 480, 0),
            ("mv", 8, 1),
            ("rr_total", 18, 0),
            ("pip", 16, 1),
            ("hr", 88, 0),
        )
    ]
    secret = SECRET if encrypted else None
    with Store.create(tmp_path / "ward.luff", now=NOW, passphrase=secret, cost=Cost(64, 1, 1)) as store:
        store.append([], by="AB", operation="intake", now=NOW, samples=blocks)
        (seconds,) = interleaved(9, lambda _i: store.samples("E1"))
    with capsys.disabled():
        print(f"\n6 channels x 72 h at 1 Hz: decoded in {seconds * 1e3:.0f} ms")
    assert seconds <= 0.1


def test_figures_of_rows_that_are_held_against_what_was_written(
    tmp_path: Path, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    """A plain store proves each row that a figure rests on: what that costs of the first figures of 72 h (500 values
    logged one by one, six channels by the minute), and that it costs the same beside 10,000 episodes."""
    few, many = (_with_a_long_episode(tmp_path / f"{n}.luff", n) for n in (10, 10_000))
    held = Store._held
    policy = shipped_policy()

    def read(store: Store) -> None:
        store.episode("LONG")

    def figures(store: Store) -> None:
        episode_figures(store.episode("LONG"), END, policy)

    def unheld(store: Store, what: Callable[[Store], None]) -> None:
        monkeypatch.setattr(Store, "_held", lambda _self, _c: False)
        what(store)
        monkeypatch.setattr(Store, "_held", held)

    bare_read, plain_read, bare, plain, beside_many = interleaved(
        15, lambda _i: unheld(few, read), lambda _i: read(few), lambda _i: unheld(few, figures),
        lambda _i: figures(few), lambda _i: figures(many),
    )  # fmt: skip
    for store in (few, many):
        store.close()
    with capsys.disabled():
        print(f"\nrows held: reading {plain_read * 1e3:.1f} ms against {bare_read * 1e3:.1f}, figures "
              f"{plain * 1e3:.1f} against {bare * 1e3:.1f}, ratio {plain / bare:.2f}; beside 10,000 episodes "
              f"{beside_many * 1e3:.1f}, ratio {beside_many / plain:.2f}")  # fmt: skip
    assert plain <= 1.5 * bare
    assert beside_many <= 1.3 * plain


def _with_a_long_episode(path: Path, others: int) -> Store:
    store = Store.create(path, now=NOW)
    drafts = [DraftBatch("AB", "log", (DraftEntry(entry(0, f"E{i}")),)) for i in range(others)]
    names = {f.name for f in fields(NewEntry)}
    for one in long_entries():
        new = NewEntry(**{name: getattr(one, name) for name in names})
        drafts.append(DraftBatch("AB", "log", (DraftEntry(new),)))
    store.append_drafts(drafts, [NOW + i for i in range(len(drafts))])
    store.append([], by="AB", operation="intake", now=NOW + DAY, samples=long_samples())
    return store
