"""The world of a random walk: a home of its own, clocks that run faster, a worker that is slow, nothing outside."""

from __future__ import annotations

import gc
import os
import tempfile
import time
from collections.abc import Callable
from importlib import import_module
from pathlib import Path
from random import Random
from typing import Any

FASTER = {"app.session.model": {"POLL_MS": 120, "TICK_MS": 400}, "app.keeping.chain_watch": {"FIRST_MS": 300},
          "app.keeping.backups": {"FIRST_MS": 700}, "app.session.flag_keeper": {"EVERY_MS": 900},
          "app.keeping.keeper": {"RETRY_MS": 300}, "app.keeping.notices": {"LOOK_MS": 500},
          "app.keeping.form_drafts": {"AFTER_MS": 150}, "app.strip.settle_time": {"SETTLE_S": 0.15}}  # fmt: skip
"""Clocks of the program that run faster, so that what they do falls between steps."""
THRESHOLD, COLLECT_MS = 50, 20
SLOW_POLL_MS = 600
WAITS_S = (0.0, 0.0, 0.01, 0.05, 0.3)
FULL = 0.02
"""How often the disk is full."""


def move_home(folder: Path) -> None:
    """Settings, stores, cache and what is thrown away lie in one folder; the night is the one before summer time."""
    homes = (f"XDG_{kind}_HOME" for kind in ("DATA", "CONFIG", "CACHE", "STATE"))
    for name in ("HOME", "LOCALAPPDATA", "APPDATA", "TMPDIR", *homes):
        os.environ[name] = str(folder)
    os.environ.setdefault("QT_QPA_PLATFORM", "offscreen")
    os.environ["TZ"] = "Europe/London"
    tempfile.tempdir = None


def quicken() -> None:
    """Clocks run faster."""
    for name, values in FASTER.items():
        for constant, value in values.items():
            _set(name, constant, value)


def collect_all_the_time() -> None:
    """Garbage is collected as often as can be waited for."""
    _set("app.session.garbage", "EVERY_MS", COLLECT_MS)
    gc.set_threshold(THRESHOLD)


def slow_down(chance: Random) -> None:
    """The worker takes its time for each job, so that much happens before an answer; some find the disk full."""
    from app.session import runner
    from app.session.failure import failure_of
    from storage.errors import store_error

    _set("app.session.model", "POLL_MS", SLOW_POLL_MS)
    do = runner._Worker._do

    def slowly(worker: Any, job: Any) -> None:
        time.sleep(chance.choice(WAITS_S))
        if worker._store is not None and not job.cancelled and chance.random() < FULL:
            job.failure = failure_of(store_error("store.disk_full", path="ward.luffmark"), job.subject, job.number)
        else:
            do(worker, job)

    runner._Worker._do = slowly  # type: ignore[method-assign]


def set_clock(now: Callable[[], int]) -> None:
    """What the computer's clock says."""
    import_module("app.session.clock").real_now = now  # type: ignore[attr-defined]


def stay_inside(say: Callable[[str], None]) -> None:
    """No other program is opened."""

    class Nobody:
        @staticmethod
        def openUrl(url: Any) -> bool:
            assert url.isLocalFile(), url
            say(f"  would open {Path(url.toLocalFile()).name}")
            return True

    _set("app.deeds.closing", "QDesktopServices", Nobody)


def _set(module: str, name: str, value: object) -> None:
    found = import_module(module)
    assert hasattr(found, name), f"{module} has no {name} any more"
    setattr(found, name, value)
