"""No widget is ever collected on a worker: while one runs, only the window's thread collects."""

from __future__ import annotations

import gc
import threading
from collections.abc import Iterator

import pytest

from app.operations.outcome import Outcome
from app.session import garbage
from app.session.runner import Runner
from core.record.instant import parse

NOW = parse("2026-03-28T05:30:00Z")


class _Knot:
    """Lies in a cycle with itself; notes the thread on which it is collected."""

    def __init__(self, ended: list[int]) -> None:
        self.itself, self.ended = self, ended

    def __del__(self) -> None:
        self.ended.append(threading.get_ident())


class _NoStore:
    def close(self) -> None:
        """Nothing was opened."""


@pytest.fixture
def runner(qtbot) -> Iterator[Runner]:
    made = Runner(_NoStore)  # type: ignore[arg-type]
    yield made
    made.close()


def _allocates(_store: object, _who: str, _now: int, request: list[list[int]]) -> Outcome[None]:
    request += [[n] for n in range(50_000)]  # many times what makes Python collect by itself
    return Outcome(None, 0)


def test_a_worker_that_allocates_collects_nothing(runner, qtbot):
    ended: list[int] = []
    kept: list[list[int]] = []
    for _ in range(10):
        _Knot(ended)
    for _ in range(20):
        runner.submit(_allocates, kept, now=NOW)
    qtbot.waitUntil(lambda: not runner.is_busy)
    qtbot.waitUntil(lambda: len(ended) == 10)
    assert set(ended) == {threading.get_ident()}


def test_python_collects_by_itself_again_after_the_last_worker(qtbot):
    assert gc.isenabled()
    first, second = Runner(_NoStore), Runner(_NoStore)  # type: ignore[arg-type]
    assert not gc.isenabled()
    first.close()
    assert not gc.isenabled()
    second.close()
    second.close()
    assert gc.isenabled()


def test_the_generation_that_is_past_its_threshold_is_collected(monkeypatch):
    collected: list[int] = []
    monkeypatch.setattr(gc, "collect", collected.append)
    for counts, expected in (((5, 1, 1), None), ((800, 1, 1), 0), ((800, 11, 1), 1), ((800, 11, 11), 2)):
        monkeypatch.setattr(gc, "get_count", lambda counts=counts: counts)
        monkeypatch.setattr(gc, "get_threshold", lambda: (700, 10, 10))
        assert garbage.collect() == expected
    assert collected == [0, 1, 2]
