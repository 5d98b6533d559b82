"""A random walk through the window, in a program of its own: a crash is a finding and not the end of the tests.

    python -m tests.support.random_walk SEED [--steps 200] [--only 3,17,40] [--harsh] [--slow]

Each step is settled by the seed and its number alone, so that a walk that failed can be walked again with a part of
its steps (`--only`). It says each step before it does it. `--harsh`: garbage is collected all the time. `--slow`: the
worker takes its time, and now and then the disk is full.
"""

from __future__ import annotations

import argparse
import faulthandler
import os
import subprocess
import sys
import tempfile
import time
import warnings
from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass
from pathlib import Path
from random import Random
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from PySide6.QtCore import QObject

    from storage.store import Store

ROOT = Path(__file__).parents[2]
HANG_S = 120
PATIENCE_S = 3.0


@dataclass(frozen=True, slots=True)
class Walked:
    """How a walk ended: 0, the number of a signal below it, or 1 with faults. `said` is every step and fault."""

    code: int
    said: str


def walk(seed: int, steps: int, *how: str) -> Walked:
    """Walk in a program of its own; `how` as on the command line."""
    command = [
        sys.executable,
        "-X",
        "faulthandler",
        "-m",
        "tests.support.random_walk",
        str(seed),
        "--steps",
        str(steps),
    ]
    command += how
    env = {**os.environ, "QT_QPA_PLATFORM": "offscreen", "QT_SCALE_FACTOR": "1", "PYTHONPATH": str(ROOT)}
    ended = subprocess.run(
        command, check=False, cwd=ROOT, env=env, text=True, stdout=subprocess.PIPE, stderr=subprocess.STDOUT
    )
    return Walked(ended.returncode, ended.stdout)


def retold(walked: Walked, seed: int, steps: int, *how: str) -> str:
    """A walk that failed: how it ended, how it is walked again, and every step of it."""
    again = f"python -m tests.support.random_walk {seed} --steps {steps} {' '.join(how)}"
    return f"ended with {walked.code}; again: {again}\n{walked.said}"


class Walker:
    """Who walks. Steps know it: the window, the clock, the files, and how something is done beside the window."""

    def __init__(self, seed: int, numbers: Sequence[int], folder: Path) -> None:
        from PySide6.QtCore import QTimer

        from tests.support.open_window import NOW
        from tests.support.walk_answers import Answerer
        from tests.support.walk_stores import Files
        from tests.support.walk_watch import Watch

        self._seed, self._numbers = seed, numbers
        self.clock, self.inside = NOW, False
        self.files = Files(folder)
        self.watch = Watch(self.say, self.files.secret_of)
        self._preferences = folder / "preferences.toml"
        self._held: Any = None
        self._hold_steps = 0
        self.answers = Answerer(self)
        self._then: list[tuple[Callable[[], bool], Callable[[], None]]] = []
        self._ready: Callable[[], bool] = lambda: True
        self._since = self._rest_until = time.monotonic()
        self._course = self._walked()
        self._timer = QTimer()
        self._timer.setInterval(2)
        self._timer.timeout.connect(self._go_on)

    def say(self, text: str) -> None:
        """Say it at once: a crash may come next."""
        print(text, flush=True)

    # the window

    def starts_anew(self) -> None:
        """Close the window, if there is one, and open another with the kept preferences."""
        from app.keeping.preferences import load
        from app.window.main import MainWindow

        if self.watch.window is not None:
            self._close()
        self.window = self.watch.window = MainWindow(load(self._preferences), self._preferences)
        self.window.prefer(cautions_seen=True, person="AB")
        self.window.show()
        self.window.activateWindow()

    def opens(self, path: Path) -> None:
        """Open a store by the way of recent ones, with the passphrase where it has one."""
        self.window.doers.file.open_path(path, passphrase=self.files.secret_of(path))

    def fitting_secret(self) -> str:
        """What unlocks the store that is open."""
        from tests.support.walk_stores import PIN, SECRET

        model = self.window.model
        return SECRET if model is not None and model.session.store_path == self.files.secret else PIN

    def lives(self, thing: QObject) -> bool:
        """Whether Qt still has it."""
        from shiboken6 import isValid

        return isValid(thing)

    def _close(self) -> None:
        window = self.watch.window
        self.watch.window = None
        if window is not None:
            window.close()
            window.deleteLater()

    # beside the window

    def beside(self, work: Callable[[Store, int], object]) -> None:
        """Something on the open store by another connection; what is refused there is nobody's fault."""
        from core.record.message import RecordError
        from storage.errors import StoreError
        from storage.store import Store

        model = self.window.model
        if model is None or not model.session.store_path.exists():
            return
        path = self.files.as_others_name_it(model.session.store_path)
        try:
            with Store.open(path, passphrase=self.files.secret_of(path)) as store:
                work(store, self.clock)
        except (RecordError, StoreError) as error:
            self.say(f"  refused there: {error}")

    def other_logs(self, chance: Random) -> None:
        """Another program logs, also while an action waits here."""
        from tests.support.walk_steps import others_log

        others_log(self, chance)

    def holds(self, steps: int) -> None:
        """Another connection holds the write lock for some steps."""
        from storage.engine import raw_connection

        model = self.window.model
        if (
            self._held is None
            and model is not None
            and model.session.store_path in (self.files.plain, self.files.other)
        ):
            self._held, self._hold_steps = raw_connection(model.session.store_path, None), steps
            self._held.execute("BEGIN IMMEDIATE")

    def _let_go(self, *, now: bool = False) -> None:
        self._hold_steps -= 1
        if self._held is not None and (now or self._hold_steps < 0):
            self._held.rollback()
            self._held.close()
            self._held = None

    def after(self, wait_ms: int, deeds: Sequence[Callable[[], None]], *, apart: int) -> None:
        """Do things a little later, one after the other, while the window lives on."""
        from PySide6.QtCore import QTimer

        for n, deed in enumerate(deeds):
            QTimer.singleShot(wait_ms + n * apart, self.window, deed)
        self._rest_until = time.monotonic() + (wait_ms + len(deeds) * apart) / 1000

    def then(self, ready: Callable[[], bool], deed: Callable[[], None]) -> None:
        """Do something once the window is ready for it, as somebody does who waits for what stands there."""
        self._then.append((ready, deed))

    def _soon(self, ready: Callable[[], bool]) -> Callable[[], bool]:
        end = time.monotonic() + PATIENCE_S
        return lambda: ready() or time.monotonic() > end

    def _is_behind(self, told: list[str]) -> bool:
        told[0] = self.watch.behind()
        return bool(told[0])

    def _every(self, ready: Callable[[], bool]) -> Callable[[], bool]:
        """The same, asked ten times a second."""
        asked = [0.0]

        def look() -> bool:
            if time.monotonic() < asked[0]:
                return False
            asked[0] = time.monotonic() + 0.1
            return ready()

        return look

    # the course

    def run(self) -> int:
        """Walk to the end; the number of faults."""
        from PySide6.QtWidgets import QApplication

        self.watch.stand()
        self._timer.start()
        app = QApplication.instance()
        assert app is not None
        QApplication.setQuitOnLastWindowClosed(False)
        QApplication.exec()
        self._timer.stop()
        self.answers.stop()
        return len(self.watch.wrong)

    def _go_on(self) -> None:
        from PySide6.QtWidgets import QApplication

        if self.inside or not self._may_go_on():
            return
        self.inside = True
        try:
            self._ready = next(self._course)
            self._since = time.monotonic()
        except StopIteration:
            QApplication.exit()
        except Exception:
            sys.excepthook(*sys.exc_info())
            QApplication.exit()
        finally:
            self.inside = False

    def _may_go_on(self) -> bool:
        waited = time.monotonic() - self._since
        if self._ready():
            return True
        if waited > HANG_S / 2:
            self.watch.fault(f"not at rest after {waited:.0f} s")
            return True
        return False

    def _walked(self) -> Iterator[Callable[[], bool]]:
        self.starts_anew()
        self.opens(self.files.plain)
        yield self.is_at_rest
        for number in self._numbers:
            faulthandler.dump_traceback_later(HANG_S, exit=True)
            chance = Random(f"{self._seed}/{number}")
            self.answers.begin(Random(f"{self._seed}/{number}/answers"))
            print(f"{number}: ", end="", flush=True)
            steps = self._steps()
            step = chance.choices([s for _, s in steps], [w for w, _ in steps])[0]
            self._do(step, chance)
            while self._then:
                ready, deed = self._then.pop(0)
                yield self._soon(ready)
                self._do(lambda _walker, _chance, deed=deed: deed() or "", chance)
            self.watch.note_dialogs()
            self._let_go()
            if chance.random() < 0.4:
                pause = time.monotonic() + chance.choice((0.0, 0.005, 0.05))
                yield lambda until=pause: time.monotonic() >= until
                continue
            yield self.is_at_rest
            self.watch.look()
            if number % 7 == 0:
                told = [""]
                yield self._soon(self._every(lambda told=told: not self._is_behind(told)))
                if told[0]:  # for all that time: what is written just now may not be shown just yet
                    self.watch.fault(told[0])
        yield from self._ended()

    def _steps(self) -> Sequence[tuple[int, Callable[[Walker, Random], str]]]:
        from tests.support import walk_steps, walk_stores
        from tests.support.walk_watch import front_dialog

        if front_dialog() is not None:
            return (*walk_steps.IN_DIALOG, *walk_stores.IN_DIALOG)
        if self.window.keeping.lock.is_locked:
            return (*walk_steps.LOCKED, *walk_stores.LOCKED)
        if self.window.model is None:
            return (*walk_steps.NO_STORE, *walk_stores.NO_STORE)
        return (*walk_steps.ALONE, *walk_stores.ALONE)

    def _do(self, step: Callable[[Walker, Random], str], chance: Random) -> None:
        try:
            if not_done := step(self, chance):
                self.say(not_done)
        except Exception:  # told, and the walk goes on to its end, so that nothing else is blamed
            sys.excepthook(*sys.exc_info())

    def is_at_rest(self) -> bool:
        """Whether every question is answered and the figures stand there."""
        from app.strip.state import State
        from tests.support.walk_watch import dialogs_seen

        if time.monotonic() < max(self._since + 0.02, self._rest_until) or any(
            getattr(d, "_runner", None) for d in dialogs_seen()
        ):
            return False
        o = self.window.opened
        return o is None or not (o.model.runner.is_busy or o.strip.state is State.AWAITED)

    def _ended(self) -> Iterator[Callable[[], bool]]:
        from PySide6.QtWidgets import QApplication

        self._let_go(now=True)
        yield self.is_at_rest
        self.watch.look()
        for dialog in QApplication.topLevelWidgets():
            if dialog.isModal() and dialog is not self.window:
                dialog.close()
        self._close()
        end = time.monotonic() + 0.1
        yield lambda: time.monotonic() >= end
        for path in (self.files.plain, self.files.other, self.files.secret, self.files.signed):
            self.watch.look_whole(path)
        self.say(f"{len(self._numbers)} steps, {self.watch.recorded} entries acknowledged and found")


def main() -> int:
    """Walk once, in this very program."""
    asked = argparse.ArgumentParser(description=__doc__)
    asked.add_argument("seed", type=int)
    asked.add_argument("--steps", type=int, default=200)
    asked.add_argument("--only", default="")
    asked.add_argument("--harsh", action="store_true")
    asked.add_argument("--slow", action="store_true")
    given = asked.parse_args()
    numbers = [int(n) for n in given.only.split(",")] if given.only else list(range(1, given.steps + 1))
    warnings.simplefilter("error")
    with tempfile.TemporaryDirectory() as folder:
        return _walk_here(given, numbers, Path(folder))


def _walk_here(given: argparse.Namespace, numbers: Sequence[int], folder: Path) -> int:
    from tests.support import nothing_left, walk_world

    nothing_left.see_timers()
    walk_world.move_home(folder)
    from app.window.start import application
    from tests.support.walk_stores import make_secrets_cheap

    application()
    before = nothing_left.threads()
    make_secrets_cheap()
    walk_world.quicken()
    if given.harsh:
        walk_world.collect_all_the_time()
    if given.slow:
        walk_world.slow_down(Random(given.seed))
    walker = Walker(given.seed, numbers, folder)
    walk_world.set_clock(lambda: walker.clock)
    walk_world.stay_inside(walker.say)
    walker.run()
    faulthandler.cancel_dump_traceback_later()
    for left in nothing_left.left_behind(before):
        walker.watch.fault(f"left behind: {left}")
    return 1 if walker.watch.wrong else 0


if __name__ == "__main__":
    sys.exit(main())
