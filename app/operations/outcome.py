"""What every operation returns, and how a long one reports and is stopped.

An operation is a function `(store, who, now, request) -> Outcome`. The window runs it on its worker, the
command line calls it; neither does anything to the store by another door.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator
from contextlib import contextmanager
from contextvars import ContextVar
from dataclasses import dataclass
from typing import Generic, TypeVar

T = TypeVar("T")
Step = Callable[[int, int], None]


@dataclass(frozen=True, slots=True)
class Outcome(Generic[T]):
    """The value that was asked for or written, and the ledger's head after it."""

    value: T
    head: int


class CancelledError(Exception):
    """The person stopped the work. Whatever it had begun in the store is rolled back."""


def _silent(_done: int, _total: int) -> None:
    pass


_watch: ContextVar[Step] = ContextVar("watch", default=_silent)


def report(done: int, total: int) -> None:
    """Say how far the work is. Raises `CancelledError` when the person has stopped it.

    A context variable carries the listener, so that an operation's signature stays the same for all.
    """
    _watch.get()(done, total)


@contextmanager
def watched(step: Step) -> Iterator[None]:
    """Everything reported inside goes to `step`, which may raise `CancelledError`.

    >>> seen = []
    >>> with watched(lambda done, total: seen.append((done, total))):
    ...     report(1, 2)
    >>> seen
    [(1, 2)]
    """
    token = _watch.set(step)
    try:
        yield
    finally:
        _watch.reset(token)
