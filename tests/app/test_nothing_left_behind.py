"""After work with a marked patient nothing of the mark stands anywhere but on the screen and inside the store."""

import logging
from functools import partial

import pytest
from PySide6.QtCore import QDir, Qt
from PySide6.QtWidgets import QApplication, QWidget

from app.keeping.preferences import Preferences
from app.operations.entry import LineRequest, log_line
from app.operations.episode import BeginRequest, begin
from app.session.clock import still
from app.session.failure import failure_of
from app.session.model import SessionModel
from app.session.runner import Runner
from app.session.state import Session
from app.window.main import MainWindow
from storage import backup_rotation
from storage.store import Store, StoreError
from tests.support.open_window import NOW, ZONE, settled, until

MARK, SECRET = "Zyxquv", "five boats at night"


def holding(folder, mark=MARK):
    """Every file under a folder whose bytes or name hold the mark, in either usual encoding."""
    texts = [mark.encode(e) for e in ("utf-8", "utf-16-le", "utf-16-be")]
    found = [p for p in folder.rglob("*") if p.is_file() and any(t in p.read_bytes() for t in texts)]
    return [*found, *folder.rglob(f"*{mark}*")]


@pytest.fixture
def folders(tmp_path, monkeypatch):
    made = {name: tmp_path / name for name in ("ward", "settings", "temporary")}
    for path in made.values():
        path.mkdir()
    for name in ("TMPDIR", "TEMP", "TMP"):
        monkeypatch.setenv(name, str(made["temporary"]))
    monkeypatch.setattr("tempfile.tempdir", None)
    assert QDir.tempPath() == str(made["temporary"])
    return made


def fails(store, who, now, request):
    """An error of the program, with what somebody typed in its words."""
    raise KeyError(f"{request} is not there")


def test_nothing_of_a_patient_is_left_behind(qtbot, folders, caplog, capsys):
    caplog.set_level(logging.DEBUG)
    path = folders["ward"] / "ward.luffmark"
    store = Store.create(path, now=NOW, passphrase=SECRET, by="AB")
    begin(store, "AB", NOW, BeginRequest("bed-1", {"label": MARK, "contact": f"Dr {MARK}"}, zone=ZONE))
    log_line(store, "AB", NOW, LineRequest("bed-1", "04:00 ph 7.25 paco2 70", ZONE, confirmed=True))
    store.close()
    window = MainWindow(Preferences(cautions_seen=True, person="AB"), folders["settings"] / "preferences.toml")
    qtbot.addWidget(window)
    window.show()
    session = Session(path, zone=ZONE, clock=still(NOW), person="AB")
    window.show_model(SessionModel(session, Runner(partial(Store.open, path, passphrase=SECRET)), window))
    until(qtbot, lambda: window.feed.is_ready and not window.model.runner.is_busy)
    until(qtbot, lambda: MARK in window.strip.whom.text())
    for line in ("bpap-st 16/6 35", f"note {MARK} restless"):
        window.strip.set_text(line)
        settled(qtbot, window)
        qtbot.keyClick(window.strip.line, Qt.Key.Key_Return)
        settled(qtbot, window)
    window.prefer(theme="dark")
    for page in ("episode", "handover", "compare", "map", "statistics", "ward"):
        window.show_page(page)
        settled(qtbot, window)
    window.strip.set_text(f"note {MARK} half typed")
    window.doers.log.do_end_episode()
    window.doers.log.form.put({"reason": "weaned", "remark": f"to {MARK}"})
    window.keeping.drafts.keep()
    failures = []
    window.model.failed.connect(failures.append)
    window.model.ask(fails, f"note {MARK}")
    until(qtbot, lambda: bool(failures))
    report = failures[0].trace
    assert "fails" in report
    assert "KeyError" in report
    assert MARK not in report

    window.keeping.lock_now("AB")
    settled(qtbot, window)
    seen = [w for top in QApplication.topLevelWidgets() if top.isVisible() for w in [top, *top.findChildren(QWidget)]
            if w.isVisible()]  # fmt: skip
    told = [str(getattr(w, n)()) for w in seen for n in ("windowTitle", "accessibleName", "toolTip", "text")
            if callable(getattr(w, n, None))]  # fmt: skip
    assert "Locked" in told
    assert not any(MARK in t for t in told)
    assert MARK not in window.windowTitle()
    assert holding(folders["ward"]) == []  # file, journal and key while the store is open
    window.close()

    with Store.open(path, passphrase=SECRET) as again:
        backup_rotation.rotate(again, folders["ward"], NOW)
        assert sum(MARK in d for d in again.drafts().values()) == 2  # the line and the form
    assert len(list(folders["ward"].glob("*.luff"))) == 1
    for folder in folders.values():
        assert holding(folder) == []
    assert (folders["settings"] / "preferences.toml").exists()
    assert MARK not in caplog.text
    said = capsys.readouterr()
    assert MARK not in said.out + said.err


def test_the_search_would_find_a_mark(tmp_path):
    with Store.create(tmp_path / "plain.luffmark", now=NOW) as store:
        begin(store, "AB", NOW, BeginRequest("bed-1", {"label": MARK}, zone=ZONE))
        assert holding(tmp_path)


def test_a_driver_error_carries_no_value(tmp_path):
    import sqlalchemy as sa

    from storage import schema

    with Store.create(tmp_path / "plain.luffmark", now=NOW) as store:
        begin(store, "AB", NOW, BeginRequest("bed-1", {"label": MARK}, zone=ZONE))
        with pytest.raises(StoreError, match=r"store.failed") as caught, store._opened.database.write() as connection:
            connection.execute(sa.insert(schema.layout), {"name": MARK, "text": None, "revision": 1, "sha": ""})
        assert MARK not in str(caught.value)
        assert MARK not in failure_of(caught.value).trace
