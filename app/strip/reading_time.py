"""How long words about one text may stand after it has changed, while the store is busy reading the next."""

from __future__ import annotations

from collections.abc import Callable

from PySide6.QtCore import QObject, QTimer

STALE_MS = 150
"""Shorter than anybody reads, longer than a preview takes when nothing else is going on: so nothing flickers."""


class ReadingTime(QTimer):
    """Calls `say_reading` (a bound method) once the old words have stood too long. Start it with each edit."""

    def __init__(self, say_reading: Callable[[], None], parent: QObject) -> None:
        super().__init__(parent)
        self.setSingleShot(True)
        self.setInterval(STALE_MS)
        self.timeout.connect(say_reading)
