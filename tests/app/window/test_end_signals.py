"""A demonstration that is ended from outside leaves no throw-away store behind."""

import os
import signal
import subprocess
import sys
import time
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[3]


def waited(done, seconds=60.0):
    end = time.monotonic() + seconds
    while time.monotonic() < end:
        if done():
            return True
        time.sleep(0.05)
    return False


@pytest.mark.skipif(sys.platform == "win32", reason="a signal from outside ends a process there at once")
@pytest.mark.parametrize("number", [signal.SIGTERM, signal.SIGINT])
def test_a_demonstration_ended_by_a_signal_takes_its_store_away(tmp_path, number):
    temporary, home = tmp_path / "tmp", tmp_path / "home"
    temporary.mkdir()
    home.mkdir()
    surroundings = os.environ | {
        "TMPDIR": str(temporary), "HOME": str(home), "QT_QPA_PLATFORM": "offscreen", "XDG_CONFIG_HOME": str(home),
        "XDG_DATA_HOME": str(home), "XDG_STATE_HOME": str(home), "XDG_CACHE_HOME": str(home),
    }  # fmt: skip
    process = subprocess.Popen(
        [sys.executable, "-m", "app.cli", "demo"], cwd=ROOT, env=surroundings, stderr=subprocess.PIPE, text=True
    )
    try:
        assert waited(lambda: any(temporary.glob("luffmark-sample-*/*.luffmark")))
        process.send_signal(number)
        _, err = process.communicate(timeout=60)
    finally:
        process.kill()
    assert process.returncode == 0, err
    assert "Traceback" not in err
    assert not list(temporary.glob("luffmark-sample-*"))
