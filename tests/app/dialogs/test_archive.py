"""Ended episodes from the window: archived, opened again for reading, and removed when their time is over."""

from app.dialogs.archive import ArchiveDialog
from app.operations.entry import LineRequest, log_line
from app.session.clock import still
from core.record.entries import NewEntry
from core.record.instant import DAY, HOUR
from storage import archive
from storage.store import Store
from tests.support.open_window import NOW, ZONE, make_store, open_window, settled, until


def test_an_ended_episode_is_archived_opened_and_removed(qtbot, tmp_path):
    path, old = make_store(tmp_path / "ward.luffmark"), tmp_path / "archive.luffmark"
    with Store.open(path) as store:
        ended = NewEntry("bed-3", "ended_at", NOW - HOUR, float(NOW - HOUR))
        store.append([ended], by="AB", operation="log", now=NOW)
    with open_window(qtbot, path, clock=still(NOW + 40 * DAY)) as window:
        window.actions_by_key["archive"].trigger()
        dialog = next(d for d in window.findChildren(ArchiveDialog) if d.isVisible())
        until(qtbot, lambda: dialog.table.rowCount() == 1)
        assert "nothing can be removed" in dialog.told.text()
        assert not dialog.go.isEnabled()
        dialog.table.selectRow(0)
        assert dialog.chosen() == ("bed-3",)
        assert not dialog.remove.isEnabled()
        dialog.archive(old)
        until(qtbot, lambda: "made and checked" in dialog.wrong.text())
        dialog.days.setValue(30)
        dialog.keep.click()
        until(qtbot, lambda: "kept for 30 days" in dialog.told.text())
        dialog.table.selectRow(0)
        assert dialog.remove.isEnabled()
        dialog.remove_chosen()
        until(qtbot, lambda: dialog.table.rowCount() == 0)
        dialog.reject()
        settled(qtbot, window)
        until(qtbot, lambda: "bed-3" not in window.pages.ward.shown_keys())
    with Store.open(path) as store:
        assert store.verify() == ()
        log_line(store, "AB", NOW + 40 * DAY, LineRequest("bed-7", "rr 24", ZONE, confirmed=True))
    with open_window(qtbot, old) as window:
        assert "archive of closed episodes" in window.keeping.notices.plain()
        assert not window.strip.line.isEnabled()
        assert window.pages.ward.shown_keys() == ("bed-3",) or "bed-3" in window.feed.answers


def test_handovers_older_than_the_retention_time_go_alone(qtbot, tmp_path):
    path = make_store(tmp_path / "ward.luffmark")
    with Store.open(path) as store:
        store.put_document("handover", "old", b"%PDF", "AB", NOW)
        archive.set_retention(store, 30, by="AB", now=NOW)
    with open_window(qtbot, path, clock=still(NOW + 40 * DAY)) as window:
        window.actions_by_key["archive"].trigger()
        dialog = next(d for d in window.findChildren(ArchiveDialog) if d.isVisible())
        until(qtbot, lambda: dialog.remove.isEnabled())
        assert dialog.remove.text() == "Remove old handovers..."
        dialog.remove_chosen()
        until(qtbot, lambda: "1 closed handover(s)" in dialog.wrong.text())
        until(qtbot, lambda: not dialog.remove.isEnabled())
        dialog.reject()
        settled(qtbot, window)
    with Store.open(path) as store:
        assert store.documents() == ()
        assert store.verify() == ()
