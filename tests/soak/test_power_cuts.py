"""Power cuts: programs killed at 200 random moments, and writes that the disk had not yet been asked to keep.

Run with `python -m pytest -m soak tests/soak`.
"""

from __future__ import annotations

import random
import shutil
import subprocess
import sys
from pathlib import Path

import pytest

from storage.keys import Cost
from storage.store import Store
from tests.support.ended_early import acknowledged, assert_all_there, kill_while_logging, rest_of, start
from tests.support.flips import SECRET
from tests.support.logging_child import NOW

pytestmark = [
    pytest.mark.soak,
    pytest.mark.timeout(3600),
    pytest.mark.skipif(sys.platform == "win32", reason="ends programs as POSIX does"),
]
COMPILER = shutil.which("cc")


@pytest.mark.parametrize("secret", [None, SECRET])
def test_killed_at_random_moments(tmp_path: Path, secret: str | None, capsys: pytest.CaptureFixture[str]) -> None:
    path, chance = tmp_path / "ward.luff", random.Random(11)
    Store.create(path, now=NOW, passphrase=secret, cost=Cost(64, 1, 1)).close()
    taken: dict[str, list[int]] = {}
    for n in range(100):
        taken[f"E{n}"] = kill_while_logging(path, f"E{n}", chance, secret)
        if n % 10 == 9:
            assert_all_there(path, taken, secret)
    with capsys.disabled():
        print(f"\n100 kills, {sum(map(len, taken.values()))} acknowledged entries, none lost")


@pytest.mark.skipif(COMPILER is None or sys.platform != "linux", reason="needs a C compiler and Linux")
@pytest.mark.parametrize("secret", [None, SECRET])
def test_unsynced_writes_dropped_under_1000_commits(
    tmp_path: Path, secret: str | None, capsys: pytest.CaptureFixture[str]
) -> None:
    """At each of 10 cuts everything that was not synced is gone: the file, its journal, both as last synced."""
    library = tmp_path / "unsynced.so"
    source = Path(__file__).parents[1] / "support" / "unsynced.c"
    subprocess.run([str(COMPILER), "-shared", "-fPIC", "-O2", "-o", str(library), str(source), "-ldl"], check=True)
    live, cut = tmp_path / "live", tmp_path / "cut"
    live.mkdir()
    path = live / "ward.luff"
    Store.create(path, now=NOW, passphrase=secret, cost=Cost(64, 1, 1)).close()
    shutil.copyfile(path, live / "ward.luff.durable")
    taken: dict[str, list[int]] = {}
    for n in range(10):
        child = start(path, f"E{n}", 100_000, secret=secret, preload=str(library))
        assert child.stdout is not None
        lines = [child.stdout.readline() for _ in range(110)]
        child.kill()
        taken[f"E{n}"] = acknowledged(lines + rest_of(child))
        shutil.rmtree(cut, ignore_errors=True)
        cut.mkdir()
        for kept in live.glob("*.durable"):
            shutil.copyfile(kept, cut / kept.name.removesuffix(".durable"))
        for envelope in live.glob("*.key"):
            shutil.copyfile(envelope, cut / envelope.name)
        assert_all_there(cut / "ward.luff", taken, secret)
        shutil.rmtree(live)
        shutil.copytree(cut, live)
        shutil.copyfile(path, live / "ward.luff.durable")
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
