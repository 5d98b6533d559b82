"""A Qt application for commands that draw without a window: it needs no display."""

from __future__ import annotations

import os
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
    from PySide6.QtWidgets import QApplication

    running = QApplication.instance()
    made = running if isinstance(running, QApplication) else QApplication(["luffmark"])
    yield made
    made.processEvents()
