"""The ward view paints first: nothing slow that it does not need is loaded on the way."""

import os
import subprocess
import sys
from pathlib import Path

PAINT = """
import sys
from pathlib import Path
from functools import partial
from PySide6.QtCore import QEventLoop
from PySide6.QtWidgets import QApplication
app = QApplication([])
from app.keeping.preferences import Preferences
from app.window.main import MainWindow
window = MainWindow(Preferences(cautions_seen=True))
window.show()
window.doers.file.open_path(Path(sys.argv[1]))
while not window.feed.is_ready:
    app.processEvents(QEventLoop.ProcessEventsFlag.WaitForMoreEvents, 50)
app.processEvents()
window.grab()
print(" ".join(m for m in sys.argv[2:] if m in sys.modules))
window.close()
"""


def test_no_slow_library_on_the_way_to_the_first_picture(tmp_path):
    from tests.support.open_window import make_store

    store = make_store(tmp_path / "ward.luffmark")
    slow = ("pandas", "scipy", "alembic", "pyqtgraph", "app.window.screens", "app.demo", "sample_data")
    root = Path(__file__).parents[2]
    done = subprocess.run(
        [sys.executable, "-c", PAINT, str(store), *slow], cwd=root, capture_output=True, text=True, timeout=120,
        env={**os.environ, "QT_QPA_PLATFORM": "offscreen", "PYTHONPATH": str(root)},
    )  # fmt: skip
    assert done.returncode == 0, done.stderr
    assert done.stdout.split() == []
