"""Starting the window: one application, the kept preferences, and what is to be shown first."""

from __future__ import annotations

import gc
import sys
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import TYPE_CHECKING

from PySide6.QtCore import Qt, QTimer
from PySide6.QtWidgets import QApplication

if TYPE_CHECKING:
    from app.window.main import MainWindow


def application() -> QApplication:
    """The one application of this process, made when there is none."""
    QApplication.setAttribute(Qt.ApplicationAttribute.AA_DontUseNativeDialogs)  # the lock can hide only what is ours
    found = QApplication.instance()
    if isinstance(found, QApplication):
        return found
    app = QApplication(sys.argv[:1])
    app.setApplicationName("luffmark")
    app.setApplicationDisplayName("Luffmark")
    app.setDesktopFileName("luffmark")
    return app


@contextmanager
def loading() -> Iterator[None]:
    """The garbage collector rests while the program is loaded: a tenth of the start went into walking
    over classes that will never go. What was loaded is left out of later collections."""
    was_on = gc.isenabled()
    gc.disable()
    try:
        yield
    finally:
        if was_on:
            gc.enable()
            gc.freeze()


def make_window() -> MainWindow:
    """The window with the kept preferences, dressed and not yet shown."""
    with loading():
        from app.keeping import preferences as kept
        from app.look.style_sheet import apply_theme
        from app.look.theme import THEMES
        from app.window.main import MainWindow

        app = application()
        path = kept.default_path()
        preferences = kept.load(path)
        apply_theme(app, THEMES[preferences.theme].scaled(preferences.text_scale))
        return MainWindow(preferences, path)


def _start_log() -> None:
    """The first screen comes before the log."""
    from app.keeping.log_file import default_folder, start_log

    start_log(default_folder())


def _clean_up(window: MainWindow) -> None:
    """The first screen comes before what a killed program left behind."""
    QTimer.singleShot(0, window.keeping.clean_up)


def _close_on_signals(window: MainWindow) -> None:
    from app.window.end_signals import close_on_signals

    close_on_signals(window)


def run_window(store: Path | None = None, passphrase: str | None = None, by: str = "") -> int:
    """Open the window on a store, or on the first page; returns when it is closed."""
    window = make_window()
    _close_on_signals(window)
    window.show()
    QTimer.singleShot(0, _start_log)
    _clean_up(window)
    if by:
        window.prefer(person=by)
    if store is not None and (store.exists() or passphrase is not None):
        window.doers.file.open_path(store, passphrase=passphrase, create=not store.exists())
    elif store is not None:
        window.doers.file.make_store(store)
    return application().exec()


def run_demo() -> int:
    """Open the window on the sample shift in a throw-away store; returns when it is closed."""
    window = make_window()
    _close_on_signals(window)
    window.show()
    QTimer.singleShot(0, _start_log)
    _clean_up(window)
    QTimer.singleShot(0, window.doers.file.do_sample_shift)
    return application().exec()
