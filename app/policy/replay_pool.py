"""Replays past episodes in several processes, and stops them all at once.

Processes are spawned, never forked: a fork of a program with threads and open databases is not safe. A worker gets
the policies' texts once and then one episode at a time, so that memory does not grow with the store.
"""

from __future__ import annotations

import multiprocessing
import os
import signal
from collections.abc import Callable, Iterable, Iterator, Sequence
from concurrent.futures import FIRST_COMPLETED, Future, ProcessPoolExecutor, wait
from concurrent.futures.process import BrokenProcessPool
from contextlib import contextmanager
from itertools import islice
from typing import TYPE_CHECKING

from core.figures.replay import PastEpisode
from core.figures.replay_summary import ReplayedEpisode, ReplayStoppedError, Span, replayed
from core.judgement.policy import Policy, read_policy
from core.record.message import refuse

if TYPE_CHECKING:
    from multiprocessing.synchronize import Event

AHEAD = 2
"""Episodes that wait for each worker: enough to keep it busy, few enough to keep memory flat."""
FEW = 3
"""So few episodes are replayed sooner than processes start."""
_LOOK_S = 0.2
Beat = Callable[[], None]
"""Called several times a second; may raise to stop the work."""


def replay_all(
    past: Iterable[PastEpisode],
    count: int,
    policies: Sequence[str],
    span: Span,
    *,
    beat: Beat,
    workers: int | None = None,
) -> Iterator[ReplayedEpisode | None]:
    """Replay `count` episodes under the policies' TOML texts, in the order in which they are done.

    None stands for an episode outside the span. However the caller leaves, the workers end.

    Raises:
        RecordError: `policy.*`, `replay.worker_lost`.
    """
    read = [read_policy(text) for text in policies]
    wanted = min(workers or os.cpu_count() or 1, count)
    if wanted < 2 or (workers is None and count <= FEW):
        yield from _in_this_process(past, read, span, beat)
    else:
        yield from _in_processes(past, policies, span, beat, wanted)


def _in_this_process(
    past: Iterable[PastEpisode], policies: Sequence[Policy], span: Span, beat: Beat
) -> Iterator[ReplayedEpisode | None]:
    def alive() -> bool:
        beat()
        return True

    for one in past:
        yield replayed(one, policies, span, alive)


def _in_processes(
    past: Iterable[PastEpisode], policies: Sequence[str], span: Span, beat: Beat, workers: int
) -> Iterator[ReplayedEpisode | None]:
    spawn = multiprocessing.get_context("spawn")
    stop = spawn.Event()
    pool = ProcessPoolExecutor(workers, spawn, _begin_worker, (stop, tuple(policies)))
    try:
        with _interrupts_for_us_alone():  # workers are started by the first submissions and inherit the mask
            source = iter(past)
            waiting = {pool.submit(_replay_one, one, span) for one in islice(source, workers * AHEAD)}
        while waiting:
            done = _next_done(waiting, beat)
            waiting -= done
            waiting |= {pool.submit(_replay_one, one, span) for one in islice(source, len(done))}
            for future in done:
                yield future.result()
    except BrokenProcessPool:
        raise refuse("replay.worker_lost") from None
    finally:
        stop.set()
        pool.shutdown(wait=True, cancel_futures=True)


def _next_done(waiting: set[Future[ReplayedEpisode | None]], beat: Beat) -> set[Future[ReplayedEpisode | None]]:
    while True:
        beat()
        done, _ = wait(waiting, timeout=_LOOK_S, return_when=FIRST_COMPLETED)
        if done:
            return set(done)


@contextmanager
def _interrupts_for_us_alone() -> Iterator[None]:
    """Ctrl+C goes to every process of the terminal: the workers must hear of it from us, not die by it halfway."""
    if not hasattr(signal, "pthread_sigmask"):
        yield
        return
    before = signal.pthread_sigmask(signal.SIG_BLOCK, {signal.SIGINT})
    try:
        yield
    finally:
        signal.pthread_sigmask(signal.SIG_SETMASK, before)


_stop: Event | None = None
_policies: tuple[Policy, ...] = ()


def _begin_worker(stop: Event, texts: tuple[str, ...]) -> None:
    """In a worker: know when to stop, and read the policies once."""
    global _stop, _policies  # a worker serves one replay in its life
    signal.signal(signal.SIGINT, signal.SIG_IGN)
    _stop, _policies = stop, tuple(read_policy(text) for text in texts)


def _replay_one(past: PastEpisode, span: Span) -> ReplayedEpisode | None:
    try:
        return replayed(past, _policies, span, _alive)
    except ReplayStoppedError:
        return None


def _alive() -> bool:
    return _stop is None or not _stop.is_set()
