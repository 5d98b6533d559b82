"""First painted ward view against a bare script that imports the same libraries and paints one empty plot.

Each is a process of its own; they alternate, and the ratio of the medians counts. Both find their modules compiled,
as an installation has them: the warming run writes them into a folder of the test's own. Run with `-m bench -s`.
"""

import os
import statistics
import subprocess
import sys
import time
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[2]
LIMIT = 1.5
ROUNDS = 7

BARE = """
from PySide6.QtWidgets import QApplication
import sqlalchemy
import pyqtgraph as pg
app = QApplication([])
plot = pg.PlotWidget()
plot.resize(1280, 800)
plot.show()
app.processEvents()
plot.grab()
"""

WARD = """
import sys
from pathlib import Path
from PySide6.QtCore import QEventLoop
from PySide6.QtWidgets import QApplication
from app.window.start import make_window
window = make_window()
window.show()
window.doers.file.open_path(Path(sys.argv[1]))
app = QApplication.instance()
while not window.feed.is_ready:
    app.processEvents(QEventLoop.ProcessEventsFlag.WaitForMoreEvents, 50)
app.processEvents()
window.grab()
window.close()
"""


def seconds(code: str, home: Path, *arguments: str) -> float:
    env = {k: v for k, v in os.environ.items() if k != "PYTHONDONTWRITEBYTECODE"}
    env |= {"QT_QPA_PLATFORM": "offscreen", "PYTHONPATH": str(ROOT), "HOME": str(home),
            "PYTHONPYCACHEPREFIX": str(home / "compiled")}  # fmt: skip
    began = time.perf_counter()
    subprocess.run([sys.executable, "-c", code, *arguments], cwd=ROOT, env=env, check=True, capture_output=True)
    return time.perf_counter() - began


@pytest.mark.bench
def test_first_painted_ward_view(tmp_path):
    from tests.support.open_window import make_store

    store = str(make_store(tmp_path / "ward.luffmark"))
    seconds(BARE, tmp_path)  # warm the disk for both
    seconds(WARD, tmp_path, store)
    bare, ward = [], []
    for _ in range(ROUNDS):
        bare.append(seconds(BARE, tmp_path))
        ward.append(seconds(WARD, tmp_path, store))
    ratio = statistics.median(ward) / statistics.median(bare)
    print(
        f"\nfirst painted ward view {statistics.median(ward):.2f} s, bare script {statistics.median(bare):.2f} s, "
        f"ratio {ratio:.2f} (limit {LIMIT})"
    )
    assert ratio <= LIMIT
