"""What was being typed when a program ended is back on the line; what another window types stays its own."""

import json
import sys
from functools import partial

import pytest

from app.keeping.preferences import Preferences
from app.session.clock import still
from app.session.model import SessionModel
from app.session.runner import Runner
from app.session.state import Session
from app.strip.log_strip import LogStrip
from app.window.main import MainWindow
from storage.store import Store
from tests.support.crashing import crash_while
from tests.support.open_window import NOW, ZONE, make_store, open_window, settled, until

TYPED = """
def typed():
    if not window.feed.is_ready:
        return
    if not window.strip.line.text():
        window.select("bed-3")
        window.strip.set_text("22/6 3")
    elif window.keeping.drafts._kept and not window.model.runner.is_busy:
        os._exit(9)  # as a crash ends it: nothing is closed
"""


def drafts(path):
    with Store.open(path, read_only=True) as store:
        return {n: json.loads(t) for n, t in store.drafts().items()}


@pytest.mark.skipif(sys.platform == "win32", reason="ends a program as POSIX does")
def test_what_is_put_back_is_read_in_the_unit_of_this_window(qtbot, tmp_path, monkeypatch):
    path = make_store(tmp_path / "ward.luffmark")
    crash_while(TYPED.replace("22/6 3", "ph 7.30 co2 8.1"), path)
    units, of_strip = set(), LogStrip.set_patient

    def heard(strip, record, label, zone, gas_unit, **more):
        units.update({gas_unit} if record is not None else set())
        of_strip(strip, record, label, zone, gas_unit, **more)

    monkeypatch.setattr(LogStrip, "set_patient", heard)
    with open_window(qtbot, path, preferences=Preferences(cautions_seen=True, gas_unit="kPa")) as window:
        until(qtbot, lambda: window.strip.line.text() == "ph 7.30 co2 8.1")
        until(qtbot, lambda: "8.1 kPa" in window.strip.plain())
        assert units == {"kPa"}  # at no moment another


@pytest.mark.skipif(sys.platform == "win32", reason="ends a program as POSIX does")
def test_a_line_that_was_being_typed_outlives_a_crash(qtbot, tmp_path):
    path = make_store(tmp_path / "ward.luffmark")
    crash_while(TYPED, path)
    kept = drafts(path)
    assert [d["line"] for d in kept.values()] == ["22/6 3"]
    with open_window(qtbot, path) as window:
        until(qtbot, lambda: window.strip.line.text() == "22/6 3")
        assert window.strip.patient == "bed-3"
        assert "Bed 3" in window.keeping.notices.plain()
        assert "nothing of it is recorded" in window.keeping.notices.plain()
        settled(qtbot, window)
        assert len(drafts(path)) == 1  # this window's own now
        window.keeping.notices.seen.click()
        assert not window.keeping.notices.isVisible()
        window.strip.leave()
        settled(qtbot, window)
        assert drafts(path) == {}


def test_what_another_window_types_stays_its_own(qtbot, tmp_path):
    path = make_store(tmp_path / "ward.luffmark")
    with open_window(qtbot, path) as first:
        first.strip.set_text("22/6 3")
        first.keeping.drafts.keep()
        settled(qtbot, first)
        second = MainWindow(Preferences(cautions_seen=True))
        qtbot.addWidget(second)
        second.show()
        session = Session(path, zone=ZONE, clock=still(NOW), person="CD")
        second.show_model(SessionModel(session, Runner(partial(Store.open, path)), second))
        until(qtbot, lambda: second.feed.is_ready and not second.model.runner.is_busy)
        assert second.strip.line.text() == ""
        assert len(drafts(path)) == 1
        second.close()
        assert len(drafts(path)) == 1


def test_a_recorded_line_leaves_no_draft_and_a_closed_window_keeps_its_line(qtbot, tmp_path):
    path = make_store(tmp_path / "ward.luffmark")
    with open_window(qtbot, path) as window:
        window.strip.set_text("rr 24")
        window.keeping.drafts.keep()
        settled(qtbot, window)
        assert len(drafts(path)) == 1
        window.strip.line.returnPressed.emit()
        settled(qtbot, window)
        assert drafts(path) == {}
        window.strip.set_text("rr 2")
    assert [d["line"] for d in drafts(path).values()] == ["rr 2"]
    with open_window(qtbot, path) as window:
        until(qtbot, lambda: window.strip.line.text() == "rr 2")
        window.strip.leave()
        settled(qtbot, window)
