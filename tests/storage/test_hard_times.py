"""Power cuts, full disks, two windows, flipped bytes: short forms. The long ones stand in tests/soak."""

from __future__ import annotations

import random
import sys
from pathlib import Path

import pytest

from storage.keys import Cost
from storage.store import Store
from storage.store_file import data_key
from tests.storage.conftest import NOW
from tests.support import bad_stores
from tests.support.ended_early import (
    COMPILER,
    acknowledged,
    assert_all_there,
    kill_while_logging,
    log_until_power_fails,
    shim,
    start,
)
from tests.support.flips import SECRET, changed_by_flips, filled, missed_by_pages, outcomes, small
from tests.support.mutations import fuzz

posix = pytest.mark.skipif(sys.platform == "win32", reason="ends and limits programs as POSIX does")


@posix
@pytest.mark.parametrize("secret", [None, SECRET])
def test_what_was_acknowledged_survives_a_kill(tmp_path: Path, secret: str | None) -> None:
    path, chance = tmp_path / "ward.luff", random.Random(7)
    Store.create(path, now=NOW, passphrase=secret, cost=Cost(64, 1, 1)).close()
    taken = {f"E{n}": kill_while_logging(path, f"E{n}", chance, secret) for n in range(2)}
    assert_all_there(path, taken, secret)


@pytest.mark.skipif(COMPILER is None or sys.platform != "linux", reason="needs a C compiler and Linux")
@pytest.mark.parametrize("careless", [False, True])
def test_what_was_acknowledged_survives_a_power_cut(tmp_path: Path, careless: bool) -> None:
    """With every unsynced write gone. That the proof bites: a program that syncs nothing loses what it took."""
    live, cut = tmp_path / "live", tmp_path / "cut"
    live.mkdir()
    Store.create(live / "ward.luff", now=NOW).close()
    taken = log_until_power_fails(live, cut, shim(tmp_path), "E1", 30, None, careless=careless)
    assert len(taken) >= 30
    if careless:
        with Store.open(cut / "ward.luff") as store:
            assert len(store.entries("E1")) < len(taken)
    else:
        assert_all_there(cut / "ward.luff", {"E1": taken})


@posix
def test_a_file_that_cannot_grow_is_a_clear_error_and_nothing_half_written(tmp_path: Path) -> None:
    path = tmp_path / "ward.luff"
    Store.create(path, now=NOW).close()
    child = start(path, "E1", 100_000, str(400_000))
    lines = child.communicate()[0].splitlines(keepends=True)
    assert lines[-1].split()[0] == "error"
    assert lines[-1].split()[1] in ("store.disk_full", "store.disk_error")
    assert_all_there(path, {"E1": acknowledged(lines)})


def test_two_programs_write_and_nothing_is_lost(tmp_path: Path) -> None:
    path, count = tmp_path / "ward.luff", 120
    Store.create(path, now=NOW).close()
    children = [start(path, f"E{n}", count) for n in range(2)]
    lines = [c.communicate()[0].splitlines(keepends=True) for c in children]
    assert_all_there(path, {f"E{n}": acknowledged(lines[n]) for n in range(2)})
    assert [len(x) for x in lines] == [count, count]


@pytest.mark.parametrize("encrypted", [False, True])
def test_flipped_bytes_are_found(tmp_path: Path, encrypted: bool) -> None:
    path = filled(tmp_path / "ward.luff", encrypted=encrypted)
    places = random.Random(5).sample(range(path.stat().st_size), 60)
    found = outcomes(path, places, encrypted=encrypted)
    assert found.keys() <= ({"refused", "found"} if encrypted else {"refused", "found", "same"})


@pytest.mark.parametrize("encrypted", [False, True])
def test_changed_bytes_never_change_a_value_in_silence(tmp_path: Path, encrypted: bool) -> None:
    """The long form in tests/soak flips every byte."""
    path = small(tmp_path / "ward.luff", encrypted=encrypted)
    places = random.Random(6).sample(range(path.stat().st_size), 150)
    if encrypted:
        assert missed_by_pages(path, data_key(path, SECRET) or b"", places) == []
    else:
        assert changed_by_flips(path, places).keys() <= {"unchanged", "refused", "found", "same"}


@pytest.mark.parametrize("encrypted", [False, True])
def test_bad_stores_open_or_are_refused(tmp_path: Path, encrypted: bool) -> None:
    tally = fuzz(40, 23, bad_stores.opening(tmp_path, encrypted=encrypted))
    assert tally.counts["refused"] > 10
    assert tally.slowest < 20


@pytest.mark.parametrize("encrypted", [False, True])
def test_bad_backups_restore_whole_or_not_at_all(tmp_path: Path, encrypted: bool) -> None:
    tally = fuzz(20, 29, bad_stores.restoring(tmp_path, encrypted=encrypted))
    assert tally.counts["refused"] > 5


@pytest.mark.parametrize("encrypted", [False, True])
def test_bad_stores_are_salvaged_without_making_anything_up(tmp_path: Path, encrypted: bool) -> None:
    tally = fuzz(15, 31, bad_stores.salvaging(tmp_path, encrypted=encrypted))
    assert tally.counts["saved"] > 5


def test_a_bad_key_file_is_refused_and_costs_no_time(tmp_path: Path) -> None:
    tally = fuzz(40, 37, bad_stores.opening(tmp_path, encrypted=True, key_too=True))
    assert tally.counts["refused"] > 10
    assert tally.slowest < 20
