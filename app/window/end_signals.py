"""Ctrl+C and a request to end close the window as its button would: nothing half written, no sample left behind."""

from __future__ import annotations

import signal
import threading
from types import FrameType

from PySide6.QtCore import QTimer
from PySide6.QtWidgets import QApplication, QWidget

TICK_MS = 200
"""Python hears a signal only when it runs: Qt's loop calls it this often, in milliseconds."""


def close_on_signals(window: QWidget) -> QTimer | None:
    """Close `window` and end the application on SIGINT, SIGTERM and (where there is one) SIGHUP.

    Returns the timer that listens; None where the caller is not on the main thread, which alone hears signals.
    """
    if threading.current_thread() is not threading.main_thread():
        return None
    asked = threading.Event()

    def heard(_number: int, _frame: FrameType | None) -> None:
        asked.set()

    for name in ("SIGINT", "SIGTERM", "SIGHUP"):
        if hasattr(signal, name):
            signal.signal(getattr(signal, name), heard)

    def look() -> None:
        if asked.is_set():
            tick.stop()
            for dialog in QApplication.topLevelWidgets():
                if dialog.isModal() and dialog is not window:
                    dialog.close()
            window.close()
            QApplication.quit()

    tick = QTimer(window)
    tick.timeout.connect(look)
    tick.start(TICK_MS)
    return tick
