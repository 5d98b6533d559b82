"""Two windows on one store: each shows the other's entries by itself, nothing is lost, no driver's words are seen."""

from functools import partial

from PySide6.QtCore import Qt

from app.keeping.preferences import Preferences
from app.session.clock import still
from app.session.model import POLL_MS, SessionModel
from app.session.runner import Runner
from app.session.state import Session
from app.window.main import MainWindow
from core.record.knowledge import standing
from storage.engine import raw_connection
from storage.store import Store
from tests.support.open_window import NOW, ZONE, make_store, open_window, settled, until


def second_window(qtbot, path):
    window = MainWindow(Preferences(cautions_seen=True))
    qtbot.addWidget(window)
    window.show()
    session = Session(path, zone=ZONE, clock=still(NOW), person="CD")
    window.show_model(SessionModel(session, Runner(partial(Store.open, path)), window))
    until(qtbot, lambda: window.feed.is_ready and not window.model.runner.is_busy)
    return window


def type_line(qtbot, window, episode, line):
    window.select(episode)
    window.strip.set_text(line)
    settled(qtbot, window)
    qtbot.keyClick(window.strip.line, Qt.Key.Key_Return)


def shown(window, episode, channel):
    """The newest value of a channel on a window's ward."""
    return window.feed.answers[episode].record.latest(channel)


def test_each_sees_what_the_other_logs_and_nothing_is_lost(qtbot, tmp_path):
    path = make_store(tmp_path / "ward.luffmark")
    with open_window(qtbot, path) as first:
        second = second_window(qtbot, path)
        for n in range(5):
            type_line(qtbot, first, "bed-7", f"05:{10 + n} rr {30 + n}")
            type_line(qtbot, second, "bed-7", f"05:{10 + n} hr {90 + n}")
            type_line(qtbot, first, "bed-3", f"05:{10 + n} spo2 {90 + n}")
        for window in (first, second):
            until(qtbot, lambda w=window: shown(w, "bed-7", "rr") == 34 and shown(w, "bed-7", "hr") == 94)
            until(qtbot, lambda w=window: shown(w, "bed-3", "spo2") == 94)
            assert "locked" not in window.keeping.notices.plain() + window.strip.plain()
        second.close()
    with Store.open(path, read_only=True) as store:
        assert store.verify() == ()
        raw = [(e.channel, e.raw, e.by) for key in ("bed-7", "bed-3") for e in store.entries(key)]
    for n in range(5):
        assert ("rr", str(30 + n), "AB") in raw
        assert ("hr", str(90 + n), "CD") in raw
        assert ("spo2", str(90 + n), "AB") in raw


def test_the_other_s_entries_are_looked_for_within_a_second():
    assert POLL_MS <= 1_000


def test_a_store_held_for_too_long_says_so_in_our_words_and_the_line_comes_back(qtbot, tmp_path, monkeypatch):
    monkeypatch.setattr("storage.opening.BUSY_SECONDS", 0.3)
    path = make_store(tmp_path / "ward.luffmark")
    with open_window(qtbot, path) as window:
        window.model.runner.close()
        session = window.model.session
        window.show_model(SessionModel(session, Runner(partial(Store.open, path, busy_seconds=0.3)), window))
        until(qtbot, lambda: window.feed.is_ready and not window.model.runner.is_busy)
        other = raw_connection(path, None)
        other.execute("BEGIN IMMEDIATE")
        type_line(qtbot, window, "bed-7", "rr 33")
        until(qtbot, lambda: "is busy" in window.strip.plain())
        assert "locked" not in window.strip.plain()
        assert window.strip.line.text() == "rr 33"
        other.execute("ROLLBACK")
        other.close()
        settled(qtbot, window)
    with Store.open(path, read_only=True) as store:
        assert "33" not in {s.entry.raw for s in standing(store.entries("bed-7"))}
