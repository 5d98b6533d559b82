"""Runs the logging child and ends it early: what it had acknowledged must be there afterwards."""

from __future__ import annotations

import os
import random
import shutil
import subprocess
import sys
from pathlib import Path

from storage.store import Store

ROOT = Path(__file__).parents[2]


def start(
    path: Path, episode: str, count: int, *more: str, secret: str | None = None, preload: str = "",
    careless: bool = False,
) -> subprocess.Popen[str]:  # fmt: skip
    """A logging child that is ready to log."""
    env = {
        **os.environ,
        **({"LUFF_SECRET": secret} if secret else {}),
        **({"LD_PRELOAD": preload} if preload else {}),
        **({"LUFF_CARELESS": "yes"} if careless else {}),
    }
    command = [sys.executable, "-m", "tests.support.logging_child", str(path), episode, str(count), *more]
    child = subprocess.Popen(command, stdout=subprocess.PIPE, text=True, cwd=ROOT, env=env)
    assert child.stdout is not None
    assert child.stdout.readline() == "ready\n"
    return child


def acknowledged(lines: list[str]) -> list[int]:
    """The numbers of the entries that the child said were taken. A line cut off by the kill counts for nothing."""
    return [int(line.split()[1]) for line in lines if line.endswith("\n") and not line.startswith("error")]


def kill_while_logging(path: Path, episode: str, chance: random.Random, secret: str | None = None) -> list[int]:
    """Kill a child at a random moment while it logs; what it had acknowledged."""
    child = start(path, episode, 100_000, secret=secret)
    assert child.stdout is not None
    lines = [child.stdout.readline() for _ in range(chance.randint(0, 40))]
    try:
        child.wait(chance.random() * 0.02)
    except subprocess.TimeoutExpired:
        child.kill()
    return acknowledged(lines + rest_of(child))


def rest_of(child: subprocess.Popen[str]) -> list[str]:
    """What a child that ended still had to say; it is waited for and its pipe closed."""
    assert child.stdout is not None
    with child.stdout:
        lines = child.stdout.readlines()
    child.wait()
    return lines


def assert_all_there(path: Path, taken: dict[str, list[int]], secret: str | None = None) -> None:
    """Every acknowledged entry is there, at most one more of each child, and the chain holds."""
    with Store.open(path, passphrase=secret) as store:
        for episode, numbers in taken.items():
            found = [int(e.raw) for e in store.entries(episode)]
            assert found[: len(numbers)] == numbers
            assert found == list(range(len(found)))
            assert len(found) <= len(numbers) + 1
        assert store.verify() == ()


COMPILER = shutil.which("cc")


def shim(folder: Path) -> Path:
    """The library that keeps, beside each file, what a power cut would leave of it."""
    library, source = folder / "unsynced.so", Path(__file__).parent / "unsynced.c"
    subprocess.run([str(COMPILER), "-shared", "-fPIC", "-O2", "-o", str(library), str(source), "-ldl"], check=True)
    return library


def log_until_power_fails(
    live: Path, cut: Path, library: Path, episode: str, commits: int, secret: str | None, *, careless: bool = False
) -> list[int]:
    """Log into the store of folder `live`, end the program, and leave in `cut` what the disk holds then: every file
    as it was last synced. What the program had acknowledged.
    """
    path = live / "ward.luff"
    shutil.copyfile(path, live / "ward.luff.durable")
    child = start(path, episode, 100_000, secret=secret, preload=str(library), careless=careless)
    assert child.stdout is not None
    lines = [child.stdout.readline() for _ in range(commits)]
    child.kill()
    taken = acknowledged(lines + rest_of(child))
    shutil.rmtree(cut, ignore_errors=True)
    cut.mkdir()
    for kept in live.glob("*.durable"):
        shutil.copyfile(kept, cut / kept.name.removesuffix(".durable"))
    for envelope in live.glob("*.key"):
        shutil.copyfile(envelope, cut / envelope.name)
    return taken
