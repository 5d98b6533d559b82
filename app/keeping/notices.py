"""Watching the computer: it slept, its clock was set, its disk fills up. Calm notices, each said once.

What judges is plain and has no clock of its own, so that a test can give it any night; the Qt half reads the clocks.
"""

from __future__ import annotations

import shutil
import sys
import time
from dataclasses import dataclass, field
from pathlib import Path

from PySide6.QtCore import QObject, QTimer, Signal

from core.record.instant import MINUTE, Instant
from core.record.message import Message

LOOK_MS = 5_000
SLEEP = 2 * MINUTE
"""A look that comes so late means that the computer slept."""
STEP = 30_000_000
"""A clock that moved so many microseconds beside the steady one was set; less is the drift that networks correct."""
LOW, VERY_LOW = 500_000_000, 50_000_000
"""Bytes free: a night of one ward's log takes some 20 MB."""
CLOCK, DISK = "surroundings.clock", "surroundings.disk"


@dataclass
class ClockWatch:
    """Compares the wall clock with a steady one. `counts_sleep`: the steady clock runs on while the computer
    sleeps; where it stands still, a sleep and a clock set forward look alike, and the notice says both."""

    counts_sleep: bool = True
    _wall: Instant | None = None
    _steady: int = 0

    def look(self, wall: Instant, steady: int) -> Message | None:
        """What happened since the last look; both clocks in microseconds.

        >>> watch = ClockWatch()
        >>> watch.look(0, 0)
        >>> watch.look(5_000_000, 5_000_000)
        >>> watch.look(-3_600_000_000 + 10_000_000, 10_000_000).key
        'notice.clock_back'
        """
        before, self._wall = self._wall, wall
        passed, self._steady = steady - self._steady, steady
        if before is None:
            return None
        step = wall - before - passed
        if step <= -STEP:
            return Message("notice.clock_back", {"minutes": -step / MINUTE, "at": wall})
        if step >= STEP:
            key = "notice.clock_forward" if self.counts_sleep else "notice.slept_or_forward"
            return Message(key, {"minutes": step / MINUTE, "at": wall})
        if passed >= SLEEP:
            return Message("notice.slept", {"minutes": passed / MINUTE, "at": wall})
        return None


@dataclass
class DiskWatch:
    """Tells once when room gets low, and once more when it is nearly gone."""

    _told: str = field(default="")

    def look(self, free: int) -> tuple[bool, Message | None]:
        """Whether what is told has changed, and what is to be told now (None: nothing any more).

        >>> watch = DiskWatch()
        >>> watch.look(10**12)
        (False, None)
        >>> watch.look(10**8)[1].key
        'notice.disk_low'
        >>> watch.look(10**8)[0]
        False
        """
        key = "notice.disk_nearly_full" if free < VERY_LOW else "notice.disk_low" if free < LOW else ""
        changed, self._told = key != self._told, key
        return changed, Message(key, {"mb": free / 1e6}) if key else None


class Surroundings(QObject):
    """Looks every few seconds while a store is open. `told(key, message)`; message None takes the notice back."""

    told = Signal(str, object)
    CLOCK, DISK = CLOCK, DISK

    def __init__(self, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._folder: Path | None = None
        self._clock, self._disk = ClockWatch(counts_sleep=_steady_counts_sleep()), DiskWatch()
        self._timer = QTimer(self)
        self._timer.setInterval(LOOK_MS)
        self._timer.timeout.connect(self.look)

    def start(self, store_path: Path) -> None:
        """Watch the computer, and the disk that a store lies on."""
        self._folder = store_path.parent
        self._clock, self._disk = ClockWatch(counts_sleep=_steady_counts_sleep()), DiskWatch()
        self.look()
        self._timer.start()

    def stop(self) -> None:
        """Look no more."""
        self._timer.stop()
        self._folder = None

    def look(self) -> None:
        """Look once."""
        happened = self._clock.look(time.time_ns() // 1000, steady_now())
        if happened is not None:
            self.told.emit(CLOCK, happened)
        free = self._free()
        if free is not None:
            changed, message = self._disk.look(free)
            if changed:
                self.told.emit(DISK, message)

    def _free(self) -> int | None:
        try:
            return shutil.disk_usage(self._folder).free if self._folder is not None else None
        except OSError:
            return None  # the disk is gone: the store itself says so at the next step


def steady_now() -> int:
    """Microseconds of a clock that nobody sets; one that runs on in sleep where the system has it."""
    if sys.platform == "linux":
        return time.clock_gettime_ns(time.CLOCK_BOOTTIME) // 1000
    return time.monotonic_ns() // 1000


def _steady_counts_sleep() -> bool:
    return sys.platform in ("linux", "win32")
