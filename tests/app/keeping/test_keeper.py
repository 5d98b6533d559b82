"""A store that cannot be written to opens for reading, and the window says so for as long as it is so."""

import sys
from functools import partial

import pytest

from app.dialogs.restore import RestoreDialog
from app.keeping.preferences import Preferences
from app.session.clock import still
from app.session.model import SessionModel
from app.session.runner import Runner
from app.session.state import Session
from app.window.main import MainWindow
from storage import place
from storage.backup_rotation import backups_in
from storage.engine import PAGE_BYTES, raw_connection
from storage.store import Store
from tests.support.open_window import NOW, ZONE, make_store, open_window, settled, until


def test_a_place_that_takes_no_writing(qtbot, tmp_path, monkeypatch):
    path = make_store(tmp_path / "ward.luffmark")
    monkeypatch.setattr(place, "can_write", lambda _path: False)
    with open_window(qtbot, path) as window:
        notices = window.keeping.notices
        assert notices.isVisible()
        assert "may not write" in notices.plain()
        assert notices.seen.isHidden()
        assert not window.strip.line.isEnabled()
        assert "reading only" in window.strip.plain()
        assert not window.actions_by_key["new_episode"].isEnabled()
        assert window.actions_by_key["show_handover"].isEnabled()
        window.doers.review.step(-30)
        settled(qtbot, window)
        window.doers.review.do_known_live()
        settled(qtbot, window)
        assert "reading only" in window.strip.plain()
        assert not window.strip.line.isEnabled()


def test_a_store_of_a_newer_program(qtbot, tmp_path):
    path = make_store(tmp_path / "ward.luffmark")
    c = raw_connection(path, None)
    c.execute("UPDATE store_facts SET value = '2' WHERE key = 'format'")
    c.close()
    with open_window(qtbot, path) as window:
        assert "newer program" in window.keeping.notices.plain()
        assert not window.strip.line.isEnabled()
        assert "Bed 7" in window.pages.ward.first.text()


def test_a_store_that_another_program_holds_is_read_and_takes_entries_once_it_is_free(qtbot, tmp_path):
    path = make_store(tmp_path / "ward.luffmark")
    other = raw_connection(path, None)
    other.execute("BEGIN IMMEDIATE")
    with open_window(qtbot, path) as window:
        notices = window.keeping.notices
        assert "Another program is writing" in notices.plain()
        assert "Bed 7" in window.pages.ward.first.text()
        assert not window.strip.line.isEnabled()
        notices.again.click()
        settled(qtbot, window)
        assert notices.isVisible()
        other.execute("ROLLBACK")
        other.close()
        notices.again.click()
        until(qtbot, lambda: not notices.isVisible())
        assert window.strip.line.isEnabled()
        head = window.model.session.head
        window.strip.set_text("rr 24")
        settled(qtbot, window)
        window.strip.line.returnPressed.emit()
        until(qtbot, lambda: window.model.session.head > head)


def test_a_damaged_page_that_opening_does_not_read_is_told_soon_after_with_the_ways_out(qtbot, tmp_path):
    path = make_store(tmp_path / "ward.luffmark")
    with open_window(qtbot, path) as window:
        window.keeping.backups.take_now()
        settled(qtbot, window)
    lose_page_of(path, "ix_batch_recorded_at")
    with open_window(qtbot, path) as window:
        backups, notices = window.keeping.backups, window.keeping.notices
        assert notices.plain() == ""
        backups._look_first()  # no backup is due: the pages are read all the same
        until(qtbot, lambda: "is damaged" in notices.plain())
        assert list(notices.ways) == ["restore", "salvage"]
        notices.seen.click()
        assert "is damaged" in notices.plain()  # it stays for as long as it is so
        notices.ways["restore"].click()
        dialog = next(d for d in window.findChildren(RestoreDialog) if d.isVisible())
        assert dialog.source.text() == str(max(backups_in(backups.folder, path).items())[1])
        assert dialog.new.text().endswith("ward-restored.luffmark")
        dialog.reject()


@pytest.mark.skipif(sys.platform == "win32", reason="an open file cannot be removed there")
def test_a_file_that_was_taken_away_under_the_window_is_told_and_the_line_stays(qtbot, tmp_path):
    path = make_store(tmp_path / "ward.luffmark")
    with open_window(qtbot, path) as window:
        path.rename(tmp_path / "elsewhere.luffmark")
        window.strip.set_text("rr 24")
        settled(qtbot, window)
        window.strip.line.returnPressed.emit()
        until(qtbot, lambda: "no longer there" in window.keeping.notices.plain())
        assert list(window.keeping.notices.ways) == ["restore"]
        assert window.strip.line.text() == "rr 24"
        assert "Not recorded" in window.strip.plain()
    with Store.open(tmp_path / "elsewhere.luffmark", read_only=True) as store:
        assert store.verify() == ()


def lose_page_of(path, index):
    """The disk loses the first page of an index."""
    c = raw_connection(path, None)
    (page,) = c.execute("SELECT rootpage FROM sqlite_master WHERE name = ?", (index,)).fetchone()
    c.close()
    with path.open("r+b") as file:
        file.seek((page - 1) * PAGE_BYTES)
        file.write(b"\xff" * PAGE_BYTES)


def test_a_network_share_is_refused_with_the_reason(qtbot, tmp_path, monkeypatch):
    path = make_store(tmp_path / "ward.luffmark")
    monkeypatch.setattr(place, "_share_kind", lambda _path: "cifs")
    window = MainWindow(Preferences(cautions_seen=True))
    qtbot.addWidget(window)
    window.show()
    window.doers.file.open_path(path)
    until(qtbot, lambda: window.first is not None and bool(window.first.said.text()))
    assert "network share (cifs)" in window.first.said.text()
    assert "local disk" in window.first.said.text()
    window.close()


@pytest.mark.parametrize(("passphrase", "says"), [(None, True), ("a long passphrase of words", False)])
def test_the_title_says_where_anybody_could_read_the_file(qtbot, tmp_path, passphrase, says):
    path = tmp_path / "ward.luffmark"
    Store.create(path, now=NOW, passphrase=passphrase).close()
    window = MainWindow(Preferences(cautions_seen=True))
    qtbot.addWidget(window)
    window.show()
    session = Session(path, zone=ZONE, clock=still(NOW), person="AB")
    window.show_model(SessionModel(session, Runner(partial(Store.open, path, passphrase=passphrase)), window))
    until(qtbot, lambda: window.feed.is_ready and not window.model.runner.is_busy)
    assert ("not encrypted" in window.windowTitle()) is says
    window.close()
