"""A Qt application for commands that draw without a window: it needs no display."""

from __future__ import annotations

import os
import sys
from collections.abc import Iterator
from contextlib import contextmanager
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from PySide6.QtWidgets import QApplication


@contextmanager
def gui_application() -> Iterator[QApplication]:
    """The running application, or an off-screen one for as long as the block lasts."""
    if "QT_QPA_PLATFORM" not in os.environ:
        os.environ["QT_QPA_PLATFORM"] = "offscreen"
    from PySide6.QtCore import qInstallMessageHandler
    from PySide6.QtWidgets import QApplication

    running = QApplication.instance()
    made = running if isinstance(running, QApplication) else QApplication(["luffmark"])
    before = qInstallMessageHandler(_tell)
    try:
        yield made
        made.processEvents()
    finally:
        qInstallMessageHandler(before)


def _tell(_kind: object, _context: object, text: str) -> None:
    """Qt's warnings on stderr, but for the one that every window shown without a display brings."""
    if "propagateSizeHints" not in text:
        print(text, file=sys.stderr)
