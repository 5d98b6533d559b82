"""Power cuts, full disks, two windows, flipped bytes: short forms. The long ones stand in tests/soak."""

from __future__ import annotations

import random
import sys
from pathlib import Path

import pytest

from core.record.entries import NewEntry
from storage.keys import Cost
from storage.store import Store, StoreError
from tests.storage.conftest import NOW
from tests.support.ended_early import acknowledged, assert_all_there, kill_while_logging, start
from tests.support.flips import SECRET, filled, mutated, outcomes, read_all

posix = pytest.mark.skipif(sys.platform == "win32", reason="ends and limits programs as POSIX does")


@posix
@pytest.mark.parametrize("secret", [None, SECRET])
def test_what_was_acknowledged_survives_a_kill(tmp_path: Path, secret: str | None) -> None:
    path, chance = tmp_path / "ward.luff", random.Random(7)
    Store.create(path, now=NOW, passphrase=secret, cost=Cost(64, 1, 1)).close()
    taken = {f"E{n}": kill_while_logging(path, f"E{n}", chance, secret) for n in range(2)}
    assert_all_there(path, taken, secret)


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


@posix
def test_a_file_removed_under_the_program_is_said(tmp_path: Path) -> None:
    path = tmp_path / "ward.luff"
    with Store.create(path, now=NOW) as store:
        entry = NewEntry("E1", "rr", NOW, 20.0)
        store.append([entry], by="AB", operation="log", now=NOW)
        path.rename(tmp_path / "elsewhere.luff")
        with pytest.raises(StoreError, match=r"store.file_gone"):
            store.append([entry], by="AB", operation="log", now=NOW)
        Store.create(tmp_path / "other.luff", now=NOW).close()
        (tmp_path / "other.luff").rename(path)
        with pytest.raises(StoreError, match=r"store.file_gone"):
            store.append([entry], by="AB", operation="log", now=NOW)


@pytest.mark.parametrize("encrypted", [False, True])
def test_mutated_stores_open_or_are_refused(tmp_path: Path, encrypted: bool) -> None:
    chance = random.Random(23)
    sound = filled(tmp_path / "ward.luff", encrypted=encrypted).read_bytes()
    keys: set[str] = set()
    for _ in range(40):
        (tmp_path / "ward.luff").write_bytes(mutated(sound, chance))
        try:
            with Store.open(tmp_path / "ward.luff", passphrase=SECRET) as store:
                store.verify()
                read_all(store)
        except StoreError as error:  # any other error fails the test
            keys.add(error.message.key)
        for end in ("-wal", "-shm"):
            (tmp_path / f"ward.luff{end}").unlink(missing_ok=True)
    assert "store.damaged" in keys
    assert keys <= TOLD


TOLD = {
    "store.damaged", "store.damaged_chunk", "store.not_a_store", "store.disk_error", "store.cannot_open",
    "store.failed", "document.damaged", "key.envelope_missing",
}  # fmt: skip
