"""Power cuts: programs killed at 200 random moments, and writes that the disk had not yet been asked to keep.

Run with `python -m pytest -m soak tests/soak`.
"""

from __future__ import annotations

import os
import random
import shutil
import sys
from pathlib import Path

import pytest

from storage.keys import Cost
from storage.store import Store
from tests.support.ended_early import (
    COMPILER,
    acknowledged,
    assert_all_there,
    kill_while_logging,
    log_until_power_fails,
    shim,
    start,
)
from tests.support.flips import SECRET
from tests.support.logging_child import NOW

pytestmark = [
    pytest.mark.soak,
    pytest.mark.timeout(3600),
    pytest.mark.skipif(sys.platform == "win32", reason="ends programs as POSIX does"),
]
KILLS = int(os.environ.get("LUFF_KILLS", "200"))
"""Kills of a plain store, and as many of an encrypted one."""


@pytest.mark.parametrize("secret", [None, SECRET])
def test_killed_at_random_moments(tmp_path: Path, secret: str | None, capsys: pytest.CaptureFixture[str]) -> None:
    path, chance = tmp_path / "ward.luff", random.Random(11)
    Store.create(path, now=NOW, passphrase=secret, cost=Cost(64, 1, 1)).close()
    taken: dict[str, list[int]] = {}
    for n in range(KILLS):
        taken[f"E{n}"] = kill_while_logging(path, f"E{n}", chance, secret)
        if n % 10 == 9:
            assert_all_there(path, taken, secret)
    assert_all_there(path, taken, secret)
    with capsys.disabled():
        print(f"\n{KILLS} kills, {sum(map(len, taken.values()))} acknowledged entries, none lost")


@pytest.mark.skipif(COMPILER is None or sys.platform != "linux", reason="needs a C compiler and Linux")
@pytest.mark.parametrize("secret", [None, SECRET])
def test_unsynced_writes_dropped_under_1000_commits(
    tmp_path: Path, secret: str | None, capsys: pytest.CaptureFixture[str]
) -> None:
    """At each of 10 cuts everything that was not synced is gone: the file, its journal, both as last synced."""
    library, live, cut = shim(tmp_path), tmp_path / "live", tmp_path / "cut"
    live.mkdir()
    Store.create(live / "ward.luff", now=NOW, passphrase=secret, cost=Cost(64, 1, 1)).close()
    taken: dict[str, list[int]] = {}
    for n in range(10):
        taken[f"E{n}"] = log_until_power_fails(live, cut, library, f"E{n}", 110, secret)
        assert_all_there(cut / "ward.luff", taken, secret)
        shutil.rmtree(live)
        shutil.copytree(cut, live)
    with capsys.disabled():
        print(f"\n10 cuts, {sum(map(len, taken.values()))} commits with unsynced writes dropped, none lost")


@pytest.mark.parametrize("secret", [None, SECRET])
def test_two_programs_write_2500_entries_each(
    tmp_path: Path, secret: str | None, capsys: pytest.CaptureFixture[str]
) -> None:
    path, count = tmp_path / "ward.luff", 2500
    Store.create(path, now=NOW, passphrase=secret, cost=Cost(64, 1, 1)).close()
    children = [start(path, f"E{n}", count, secret=secret) for n in range(2)]
    lines = [child.communicate()[0].splitlines(keepends=True) for child in children]
    assert_all_there(path, {f"E{n}": acknowledged(lines[n]) for n in range(2)}, secret)
    assert [len(acknowledged(x)) for x in lines] == [count, count]
    with capsys.disabled():
        print(f"\ntwo programs, {count} entries each, none lost, none refused")
