"""What a test may not leave behind: a thread, a timer that still runs, a window."""

from __future__ import annotations

import os
import threading
import time
import weakref
from pathlib import Path
from typing import TYPE_CHECKING

import shiboken6
from PySide6 import QtCore
from PySide6.QtCore import QCoreApplication, QEvent, QObject, QThreadPool

if TYPE_CHECKING:
    from PySide6.QtWidgets import QWidget

TASKS = Path("/proc/self/task")
QT_S_OWN = ("Thread (pooled)", "QDBusConnection", "QFontDatabase")
"""Threads that Qt keeps for itself: a pool's idle ones among them, which is why its busy ones are counted."""
PATIENCE_S = 5.0

_timers: weakref.WeakSet[QtCore.QTimer] = weakref.WeakSet()
_Timer = QtCore.QTimer


class SeenTimer(_Timer):
    """A timer that is known here for as long as it lives."""

    def __init__(self, parent: QObject | None = None) -> None:
        super().__init__(parent)
        _timers.add(self)


def see_timers() -> None:
    """Have every module that is imported from now on use timers that are seen; to be called before any is."""
    QtCore.QTimer = SeenTimer  # type: ignore[misc]


def threads() -> set[str]:
    """Every thread that Python or Qt started, by name and number."""
    found = {f"{t.name} ({t.native_id})" for t in threading.enumerate() if not isinstance(t, threading._DummyThread)}
    known = {str(t.native_id) for t in threading.enumerate() if not isinstance(t, threading._DummyThread)}
    ours = _name_of(TASKS / str(os.getpid()))
    for task in TASKS.iterdir() if TASKS.is_dir() else ():
        name = _name_of(task)
        # a thread of the process's own name is a library's: Python's are known, and Qt names each of ours
        if name and name != ours and task.name not in known and not name.startswith(QT_S_OWN):
            found.add(f"{name} ({task.name})")
    return found


def _name_of(task: Path) -> str:
    """How the system names a thread; empty once it has ended."""
    try:
        return (task / "comm").read_text().strip()
    except OSError:
        return ""


def left_behind(before: set[str]) -> list[str]:
    """What is there now and should not be; threads get a moment to end, the rest is stopped."""
    deadline = time.monotonic() + PATIENCE_S
    while (extra := threads() - before) and time.monotonic() < deadline:
        time.sleep(0.01)
    found = [f"thread {name}" for name in sorted(extra)]
    if QCoreApplication.instance() is None:
        return found
    if not QThreadPool.globalInstance().waitForDone(round(PATIENCE_S * 1000)):
        found.append("work in the thread pool")
    QCoreApplication.sendPostedEvents(None, QEvent.Type.DeferredDelete)
    found += [_stopped(t) for t in list(_timers) if shiboken6.isValid(t) and t.isActive()]
    from PySide6.QtWidgets import QApplication

    if isinstance(QCoreApplication.instance(), QApplication):
        found += [_hidden(w) for w in QApplication.topLevelWidgets() if w.isVisible()]
    return found


def _stopped(timer: QtCore.QTimer) -> str:
    """Its name; it is stopped, so that the next test is not blamed for it."""
    timer.stop()
    return f"timer of {timer.parent()!r}"


def _hidden(window: QWidget) -> str:
    window.hide()
    return f"window {window!r}"
