"""The runner: answers reach bound methods, stale ones are dropped, errors are shown, no thread is left."""

import gc
import threading
from collections.abc import Iterator
from typing import Any

import pytest
from PySide6.QtCore import QObject
from pytestqt.qtbot import QtBot

from app.operations.outcome import Outcome, report
from app.session.failure import Failure
from app.session.runner import Runner
from core.record.message import refuse


class FakeStore:
    """Only what the runner itself needs of a store."""

    def __init__(self) -> None:
        self.thread = threading.get_ident()
        self.closed_on = 0

    def close(self) -> None:
        self.closed_on = threading.get_ident()


class View(QObject):
    def __init__(self) -> None:
        super().__init__()
        self.got: list[Any] = []
        self.failures: list[Failure] = []

    def take(self, outcome: Outcome[Any]) -> None:
        self.got.append(outcome.value)

    def refuse(self, failure: Failure) -> None:
        self.failures.append(failure)


def echo(store: Any, who: str, now: int, request: Any) -> Outcome[Any]:
    return Outcome((request, who, now, threading.get_ident() == store.thread), 7)


@pytest.fixture
def store() -> list[FakeStore]:
    return []


@pytest.fixture
def runner(store: list[FakeStore], qtbot: QtBot) -> Iterator[Runner]:
    def opener() -> Any:
        store.append(FakeStore())
        return store[-1]

    made = Runner(opener)
    yield made
    made.close()


def test_outcome_reaches_the_bound_method_and_the_store_stays_on_the_worker(runner, store, qtbot) -> None:
    view = View()
    with qtbot.waitSignal(runner.committed) as head:
        runner.submit(echo, "q", who="AB", now=5, done=view.take)
    qtbot.waitUntil(lambda: bool(view.got))
    assert view.got == [("q", "AB", 5, True)]
    assert head.args == [7]
    assert store[0].thread != threading.get_ident()
    runner.close()
    assert store[0].closed_on == store[0].thread


def test_only_the_newest_of_a_subject_is_answered(runner, qtbot) -> None:
    view, gate, begun = View(), threading.Event(), []

    def slow(store: Any, who: str, now: int, request: Any) -> Outcome[Any]:
        begun.append(request)
        gate.wait(5)
        return Outcome(request, 1)

    for n in (1, 2, 3):
        runner.submit(slow, n, now=0, done=view.take, subject="ward")
    gate.set()
    qtbot.waitUntil(lambda: not runner.is_busy)
    assert view.got == [3]
    assert 2 not in begun, "a waiting older question was begun"


def test_a_write_without_subject_is_always_answered(runner, qtbot) -> None:
    view = View()
    for n in (1, 2):
        runner.submit(echo, n, now=0, done=view.take)
    qtbot.waitUntil(lambda: len(view.got) == 2)
    assert [v[0] for v in view.got] == [1, 2]


def test_running_work_stops_at_its_next_report(runner, qtbot) -> None:
    view, begun, ended = View(), threading.Event(), []

    def long_work(store: Any, who: str, now: int, request: Any) -> Outcome[Any]:
        for done in range(10_000):
            begun.set()
            report(done, 10_000)
            threading.Event().wait(0.001)
        ended.append(True)
        return Outcome(None, 1)

    number = runner.submit(long_work, None, now=0, done=view.take, failed=view.refuse)
    with qtbot.waitSignal(runner.progressed) as told:
        begun.wait(5)
    runner.cancel(number)
    qtbot.waitUntil(lambda: not runner.is_busy)
    assert not ended
    assert not view.got
    assert not view.failures
    assert (told.args[0].number, told.args[0].total) == (number, 10_000)


def test_errors_are_told_and_do_not_stop_the_worker(runner, qtbot) -> None:
    view = View()

    def bad(store: Any, who: str, now: int, request: Any) -> Outcome[Any]:
        if request == "record":
            raise refuse("unit.unknown", unit="psi", channel="ipap", accepted="cmH2O")
        raise ZeroDivisionError("ours")

    runner.submit(bad, "record", now=0, failed=view.refuse)
    runner.submit(bad, "ours", now=0, failed=view.refuse)
    runner.submit(echo, "after", now=0, done=view.take)
    qtbot.waitUntil(lambda: bool(view.got))
    first, second = view.failures
    assert (first.message.key, first.is_ours) == ("unit.unknown", False)
    assert (second.message.key, second.is_ours) == ("error.unexpected", True)
    assert "ZeroDivisionError" in second.trace


def test_a_failure_nobody_takes_is_signalled(runner, qtbot) -> None:
    def bad(store: Any, who: str, now: int, request: Any) -> Outcome[Any]:
        raise refuse("unit.unknown", unit="psi", channel="ipap", accepted="cmH2O")

    with qtbot.waitSignal(runner.failed) as told:
        runner.submit(bad, None, now=0)
    assert told.args[0].message.key == "unit.unknown"


def test_an_opener_that_fails_is_a_failure_of_the_submission(qtbot) -> None:
    view = View()

    def opener() -> Any:
        raise FileNotFoundError(2, "No such file", "ward.luff")

    with Runner(opener) as runner:
        runner.submit(echo, None, now=0, failed=view.refuse)
        qtbot.waitUntil(lambda: bool(view.failures))
    assert view.failures[0].message.key == "file.missing"
    assert view.failures[0].message.values["path"] == "ward.luff"


def test_an_answer_for_a_view_that_is_gone_is_dropped(runner, qtbot) -> None:
    view = View()
    runner.submit(echo, 1, now=0, done=view.take)
    view.deleteLater()
    del view
    gc.collect()
    qtbot.waitUntil(lambda: not runner.is_busy)


def test_closing_still_does_the_waiting_writes_and_leaves_no_thread(qtbot) -> None:
    before, written = threading.active_count(), []
    gate = threading.Event()

    def write(store: Any, who: str, now: int, request: Any) -> Outcome[Any]:
        gate.wait(5)
        written.append(request)
        return Outcome(None, 1)

    runner = Runner(lambda: FakeStore())  # type: ignore[arg-type, return-value]
    runner.submit(write, "a", now=0)
    runner.submit(write, "question", now=0, subject="ward")
    runner.submit(write, "b", now=0)
    gate.set()
    runner.close()
    assert written[0] == "a"
    assert written[-1] == "b"
    assert "question" not in written
    assert threading.active_count() == before
    with pytest.raises(RuntimeError, match="closed"):
        runner.submit(write, "c", now=0)
