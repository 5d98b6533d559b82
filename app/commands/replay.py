"""`luffmark replay`: what a policy would have flagged in past episodes, or two policies side by side."""

from __future__ import annotations

import argparse
import signal
import sys
import threading
import time
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from pathlib import Path
from types import FrameType
from typing import TYPE_CHECKING

from app.commands.context import Context
from app.operations import replay as operations
from app.operations.outcome import CancelledError, watched
from app.policy.replay_words import NamedPolicy, as_json, as_text

if TYPE_CHECKING:
    from storage.store import Store

SHIPPED = "shipped"
"""The word that names the shipped policy in place of a file."""


def run(context: Context, args: argparse.Namespace) -> int:
    """Replay and tell."""
    with context.open(read_only=True) as store:
        policies = [_named(context, store, args.policy)]
        if args.against is not None:
            policies.append(_named(context, store, args.against))
        request = operations.ReplayRequest(
            tuple(p.text for p in policies), tuple(args.episodes or ()), args.start, args.end, args.at_once,
            args.processes,
        )  # fmt: skip
        with _interruptible() as asked, watched(_progress(asked)):
            try:
                answer = operations.run(store, context.by, context.now(), request).value
            except CancelledError:
                print("\nluffmark: the replay was stopped.", file=sys.stderr)
                raise KeyboardInterrupt from None
    reader = context.reader()
    context.answer(as_text(answer, policies, reader), as_json(answer, policies, reader))
    return 0


def _named(context: Context, store: Store, path: Path | None) -> NamedPolicy:
    """The policy of a file, the shipped one, or the one in force where none is named."""
    from app.operations import policy
    from app.policy.file import text_of
    from core.judgement.policy import read_policy, shipped_policy, shipped_text

    if path is None:
        found = policy.show(store, context.by, context.now(), None).value
        return NamedPolicy("in force", found.text, found.policy)
    if str(path) == SHIPPED and not path.exists():
        return NamedPolicy(SHIPPED, shipped_text(), shipped_policy())
    text = text_of(path)
    return NamedPolicy(path.name, text, read_policy(text))


@contextmanager
def _interruptible() -> Iterator[threading.Event]:
    """Ctrl+C sets the event, so that the work ends where it looks at it and not in the middle of anything. A second
    one ends it anywhere."""
    asked = threading.Event()
    if threading.current_thread() is not threading.main_thread():
        yield asked
        return

    def interrupted(_number: int, _frame: FrameType | None) -> None:
        asked.set()
        signal.signal(signal.SIGINT, before)

    before = signal.signal(signal.SIGINT, interrupted)
    try:
        yield asked
    finally:
        signal.signal(signal.SIGINT, before)


def _progress(asked: threading.Event) -> Callable[[int, int], None]:
    """One line on a terminal that writes over itself; silent elsewhere. Stops the work once that was asked for."""
    started, shown, tells = time.monotonic(), [-1], sys.stderr.isatty()

    def step(done: int, total: int) -> None:
        if asked.is_set():
            raise CancelledError
        if not tells or done == shown[0] or time.monotonic() - started < 1:
            return
        shown[0] = done
        end = "\n" if done == total else ""
        print(f"\r{done} of {total} episodes", end=end, file=sys.stderr, flush=True)

    return step
