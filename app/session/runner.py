"""The runner: one worker thread that owns the store, runs operations, drops stale answers, cancels, reports.

    number = runner.submit(operations.figures.of_ward, request, who="AB", now=now,
                           done=self.show_figures, failed=self.show_failure, subject="ward figures")

`done(outcome)` and `failed(failure)` are bound methods, called on the thread of the runner. They are held
weakly: an answer for a view that is gone is dropped. Of several submissions with one `subject` only the
newest is answered; a waiting older one is never begun and a running one is cancelled. So questions have a
subject, and writes have none.
"""

from __future__ import annotations

import itertools
from collections import deque
from collections.abc import Callable
from dataclasses import dataclass, field
from threading import Condition
from typing import TYPE_CHECKING, Any
from weakref import WeakMethod

from PySide6.QtCore import QObject, QThread, QTimer, Signal, Slot

from app.operations.outcome import CancelledError, Outcome, watched
from app.session import garbage
from app.session.failure import Failure, failure_of
from core.record.instant import Instant

if TYPE_CHECKING:
    from storage.store import Store

Operation = Callable[["Store", str, Instant, Any], Outcome[Any]]
Opener = Callable[[], "Store"]


@dataclass(frozen=True, slots=True)
class Progress:
    """How far a submission is: `done` of `total` (0 where the total is not known)."""

    number: int
    subject: str
    done: int
    total: int


@dataclass(slots=True, eq=False)
class _Job:
    number: int
    subject: str
    operation: Operation
    request: Any
    who: str
    now: Instant
    done: WeakMethod[Callable[[Outcome[Any]], None]] | None
    failed: WeakMethod[Callable[[Failure], None]] | None
    outcome: Outcome[Any] | None = None
    failure: Failure | None = None
    cancelled: bool = field(default=False)


class _Worker(QThread):
    """Takes jobs from a queue; opens the store at the first and closes it at the end, all on this thread."""

    finished_job = Signal(object)
    progressed = Signal(object)

    def __init__(self, opener: Opener, parent: QObject) -> None:
        super().__init__(parent)
        self._opener = opener
        self._store: Store | None = None
        self._queue: deque[_Job] = deque()
        self._running: _Job | None = None
        self._condition = Condition()
        self._stopping = False

    def put(self, job: _Job) -> None:
        with self._condition:
            self._queue.append(job)
            self._condition.notify()

    def cancel(self, wanted: Callable[[_Job], bool]) -> None:
        """Cancel the jobs that are wanted gone; a running one stops at its next report."""
        with self._condition:
            for job in [*self._queue, *([self._running] if self._running else [])]:
                if wanted(job):
                    job.cancelled = True

    def stop(self) -> None:
        """End after the jobs that have no subject: those write, and what was typed must not be lost."""
        self.cancel(lambda job: bool(job.subject))
        with self._condition:
            self._stopping = True
            self._condition.notify()

    def run(self) -> None:
        try:
            while (job := self._next()) is not None:
                self._do(job)
                with self._condition:
                    self._running = None
                self.finished_job.emit(job)
        finally:
            if self._store is not None:
                self._store.close()
                self._store = None

    def _next(self) -> _Job | None:
        with self._condition:
            while not self._queue and not self._stopping:
                self._condition.wait()
            if not self._queue:
                return None
            self._running = self._queue.popleft()
            return self._running

    def _do(self, job: _Job) -> None:
        def step(done: int, total: int) -> None:
            if job.cancelled:
                raise CancelledError
            self.progressed.emit(Progress(job.number, job.subject, done, total))

        if job.cancelled:
            return
        try:
            if self._store is None:
                self._store = self._opener()
            with watched(step):
                job.outcome = job.operation(self._store, job.who, job.now, job.request)
        except CancelledError:
            job.cancelled = True
        except Exception as error:  # an error on a worker is lost unless caught and shown
            job.failure = failure_of(error, job.subject, job.number)


class Runner(QObject):
    """Owns the worker. Close it before the application ends; `with` or `close()` leaves no thread behind."""

    busy_changed = Signal(bool)
    progressed = Signal(object)
    """`Progress` of the running submission."""
    failed = Signal(object)
    """A `Failure` that no view takes."""
    troubled = Signal(object)
    """Every `Failure`, taken by a view or not."""
    committed = Signal(int)
    """The ledger's head that the latest outcome reported."""

    def __init__(self, opener: Opener, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._numbers = itertools.count(1)
        self._newest: dict[str, int] = {}
        self._open: dict[int, _Job] = {}
        self._closed = False
        self._worker = _Worker(opener, self)
        self._worker.finished_job.connect(self._deliver)
        self._worker.progressed.connect(self._progress)
        self._collecting = QTimer(self)
        self._collecting.timeout.connect(garbage.collect)
        self._collecting.start(garbage.EVERY_MS)
        garbage.worker_begins()
        self._worker.start()

    def submit(
        self, operation: Operation, request: Any = None, *, who: str = "", now: Instant,
        done: Callable[[Outcome[Any]], None] | None = None,
        failed: Callable[[Failure], None] | None = None, subject: str = "",
    ) -> int:  # fmt: skip
        """Queue an operation; returns its number. A submission without a subject is always answered."""
        if self._closed:
            raise RuntimeError("the runner is closed: nothing can be submitted")
        number = next(self._numbers)
        if subject:
            self._newest[subject] = number
            self._worker.cancel(lambda job: job.subject == subject)
        job = _Job(number, subject, operation, request, who, now,
                   WeakMethod(done) if done else None, WeakMethod(failed) if failed else None)  # fmt: skip
        self._open[number] = job
        if len(self._open) == 1:
            self.busy_changed.emit(True)
        self._worker.put(job)
        return number

    def cancel(self, number: int) -> None:
        """Stop a submission: it gives no answer, and a running one is rolled back at its next report."""
        self._worker.cancel(lambda job: job.number == number)

    @property
    def is_busy(self) -> bool:
        """Whether anything is waiting or running."""
        return bool(self._open)

    def close(self) -> None:
        """Stop the worker and wait for it. Waiting questions are dropped; waiting writes are still done."""
        if not self._closed:
            self._closed = True
            self._worker.stop()
            self._worker.wait()
            self._collecting.stop()
            garbage.worker_ended()
            self._open.clear()

    def __enter__(self) -> Runner:
        return self

    def __exit__(self, *_: object) -> None:
        self.close()

    @Slot(object)
    def _progress(self, progress: Progress) -> None:
        if progress.number in self._open and not self._closed:
            self.progressed.emit(progress)

    @Slot(object)
    def _deliver(self, job: _Job) -> None:
        if self._closed:
            return
        self._open.pop(job.number, None)
        stale = bool(job.subject) and self._newest.get(job.subject) != job.number
        if job.outcome is not None:
            self.committed.emit(job.outcome.head)
        if not job.cancelled and not stale:
            self._answer(job)
        if not self._open and not self._closed:
            self.busy_changed.emit(False)

    def _answer(self, job: _Job) -> None:
        if job.failure is not None:
            self.troubled.emit(job.failure)
            taker = job.failed() if job.failed else None
            if taker is not None and _lives(taker):
                taker(job.failure)
            else:
                self.failed.emit(job.failure)
        elif job.outcome is not None and job.done is not None:
            receiver = job.done()
            if receiver is not None and _lives(receiver):
                receiver(job.outcome)


def _lives(method: Callable[..., None]) -> bool:
    """Whether the object a bound method belongs to still has its Qt half."""
    from shiboken6 import isValid

    owner = getattr(method, "__self__", None)
    return not isinstance(owner, QObject) or isValid(owner)
