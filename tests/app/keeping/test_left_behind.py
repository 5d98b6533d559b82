"""What a killed program left in the temporary folder goes at the next start; what another program uses stays."""

import os
import subprocess
import sys
import tempfile
from pathlib import Path

import pytest

from app.deeds import closing
from app.keeping.left_behind import HANDOVERS, SAMPLE, OwnFolder, own_lock, sweep
from app.keeping.preferences import Preferences
from app.window.main import MainWindow
from core.record.instant import MINUTE
from tests.support.open_window import NOW, make_store, open_window, settled, until

KILLED = """
import os, sys
sys.path.insert(0, {tree!r})
from pathlib import Path
from app.keeping.left_behind import HANDOVERS, SAMPLE, OwnFolder, own_lock
held = [OwnFolder(kind) for kind in (HANDOVERS, SAMPLE)]
for folder in held:
    (folder.path / "Bed 7.pdf").write_text("Bed 7")
lock = own_lock(Path({temporary!r}) / "luffmark-0123.lock")
os._exit(9)
"""


@pytest.fixture
def temporary(tmp_path, monkeypatch):
    folder = tmp_path / "temporary"
    folder.mkdir()
    for name in ("TMPDIR", "TEMP", "TMP"):
        monkeypatch.setenv(name, str(folder))
    monkeypatch.setattr(tempfile, "tempdir", None)
    return folder


def killed(temporary: Path) -> None:
    """A program ends as a crash ends it, with a handover, a sample and a lock lying about."""
    script = KILLED.format(tree=os.getcwd(), temporary=str(temporary))
    ended = subprocess.run([sys.executable, "-c", script], check=False, timeout=120)
    assert ended.returncode == 9
    assert len(list(temporary.rglob("Bed 7.pdf"))) == 2


@pytest.mark.skipif(sys.platform == "win32", reason="ends a program as POSIX does")
def test_a_killed_program_s_folders_and_locks_go_and_those_in_use_stay(temporary):
    killed(temporary)
    mine = OwnFolder(HANDOVERS)
    lock = own_lock(temporary / "luffmark-4567.lock")
    (temporary / "luffmark-something-else").mkdir()
    found = sweep()
    assert found.handovers == 1
    assert found.stuck == ()
    left = {p.name for p in temporary.iterdir()}
    assert left == {mine.path.name, "luffmark-4567.lock", "luffmark-something-else"}
    mine.forget()
    lock.unlock()
    assert {p.name for p in temporary.iterdir()} == {"luffmark-something-else"}
    assert sweep().handovers == 0


def test_a_folder_that_is_being_made_is_not_taken_for_one_left_behind(temporary):
    new = Path(tempfile.mkdtemp(prefix=SAMPLE))
    sweep()
    assert new.exists()
    os.utime(new, (0, 0))
    sweep()
    assert not new.exists()


@pytest.mark.skipif(sys.platform == "win32", reason="symbolic links need rights there")
def test_a_link_is_not_followed(temporary, tmp_path):
    elsewhere = tmp_path / "elsewhere"
    elsewhere.mkdir()
    (elsewhere / "kept.txt").write_text("kept")
    os.symlink(elsewhere, temporary / f"{HANDOVERS}link")
    sweep()
    assert (elsewhere / "kept.txt").exists()


@pytest.mark.skipif(sys.platform == "win32", reason="ends a program as POSIX does")
def test_the_next_start_says_that_a_handover_was_left_and_is_gone(qtbot, temporary, tmp_path):
    killed(temporary)
    window = MainWindow(Preferences(cautions_seen=True))
    qtbot.addWidget(window)
    window.show()
    window.keeping.clean_up()
    assert "copy in the temporary folder was removed" in window.first.said.text()
    assert not list(temporary.rglob("Bed 7.pdf"))
    window.close()


@pytest.mark.skipif(sys.platform == "win32", reason="ends a program as POSIX does")
def test_where_a_store_is_opened_at_once_the_notice_says_it(qtbot, temporary, tmp_path):
    killed(temporary)
    with open_window(qtbot, make_store(tmp_path / "ward.luffmark")) as window:
        window.keeping.clean_up()
        assert "copy in the temporary folder was removed" in window.keeping.notices.plain()
        window.keeping.notices.seen.click()
        assert window.keeping.notices.plain() == ""


def test_a_handover_that_another_program_shows_goes_with_the_lock(qtbot, temporary, tmp_path, monkeypatch):
    opened = []
    monkeypatch.setattr(closing.QDesktopServices, "openUrl", lambda url: opened.append(Path(url.toLocalFile())))
    path = make_store(tmp_path / "ward.luffmark")
    with open_window(qtbot, path) as window:
        review = window.doers.review
        window.model.ask(_keep_one, None)
        settled(qtbot, window)
        review.do_closed_handovers()
        until(qtbot, lambda: bool(_dialogs(window)))
        _dialogs(window)[0].open_button.click()
        until(qtbot, lambda: bool(opened))
        assert opened[0].exists()
        _dialogs(window)[0].close()
        window.keeping.lock_now("AB")
        assert not opened[0].exists()
        assert "close it there too" in window.keeping.lock.page.told.text()
        window.keeping.lock.page.go.click()


def _keep_one(store, who, now, request):
    from app.operations import handover

    return handover.close(store, who, NOW + MINUTE, handover.ClosedHandover("Shift, AB to CD", b"%PDF-1.4 Bed 7"))


def _dialogs(window):
    from app.dialogs.closed_handovers import ClosedHandoversDialog

    return [d for d in window.findChildren(ClosedHandoversDialog) if d.isVisible()]
