"""A window in a program of its own that ends as in a crash while somebody types: nothing is closed."""

import os
import subprocess
import sys
from pathlib import Path

PROGRAM = """
import os, sys
sys.path.insert(0, {tree!r})
from pathlib import Path
from PySide6.QtCore import QTimer
from PySide6.QtWidgets import QApplication
from functools import partial
from app.session.clock import still
from app.keeping.preferences import Preferences
from app.session.runner import Runner
from app.session.model import SessionModel
from app.session.state import Session
from app.window.main import MainWindow
from storage.store import Store
from tests.support.open_window import NOW, ZONE
app = QApplication([])
window = MainWindow(Preferences(cautions_seen=True))
window.show()
path = Path({path!r})
session = Session(path, zone=ZONE, clock=still(NOW), person="AB")
window.show_model(SessionModel(session, Runner(partial(Store.open, path)), window))
{typed}
timer = QTimer()
timer.timeout.connect(typed)
timer.start(50)
QTimer.singleShot(60_000, app.quit)
app.exec()
"""
CRASHED = 9


def crash_while(typed: str, path: Path) -> None:
    """Open the store and call `typed`, the source of a function of that name, until it ends the program.

    It finds the window as `window` and ends by `os._exit(9)`.
    """
    script = PROGRAM.format(tree=os.getcwd(), path=str(path), typed=typed)
    ended = subprocess.run([sys.executable, "-c", script], check=False, timeout=120)
    assert ended.returncode == CRASHED
