"""Backups from the window: taken by the clock, told of when they fail, restored and salvaged."""

from collections import namedtuple
from dataclasses import replace

import pytest
from PySide6.QtWidgets import QFileDialog

from app.dialogs.backups import BackupsDialog
from app.dialogs.restore import RestoreDialog
from app.dialogs.salvage import SalvageDialog
from app.dialogs.table import TableDialog
from app.keeping.backups import folder_for
from app.keeping.preferences import Preferences
from app.operations import backup as operations
from app.operations.backup import RestoreRequest, Rotation
from app.session.clock import still
from app.window.main import MainWindow
from core.record.instant import HOUR
from core.record.message import RecordError
from storage import backup, people
from storage.backup_rotation import backups_in
from storage.errors import store_error
from storage.keys import Cost
from storage.store import Store
from tests.support.open_window import NOW, make_store, open_window, settled, until

SECRET = "four quiet boats tonight"
Usage = namedtuple("Usage", "total used free")


@pytest.fixture
def path(tmp_path):
    return make_store(tmp_path / "ward.luffmark")


def log(qtbot, window, line):
    head = window.model.session.head
    window.strip.set_text(line)
    settled(qtbot, window)
    window.strip.line.returnPressed.emit()
    until(qtbot, lambda: window.model.session.head > head)


def test_one_is_taken_soon_after_opening_and_then_each_hour(qtbot, path):
    folder = path.parent / "backups"
    with open_window(qtbot, path) as window:
        keeper = window.keeping.backups
        assert keeper._first.isActive()
        assert keeper._look.isActive()
        keeper.look()
        settled(qtbot, window)
        assert list(backups_in(folder, path)) == [NOW]
        keeper.look()
        settled(qtbot, window)
        assert len(backups_in(folder, path)) == 1
    with open_window(qtbot, path, clock=still(NOW + HOUR)) as window:
        window.keeping.backups.look()
        settled(qtbot, window)
        assert len(backups_in(folder, path)) == 2
        assert window.keeping.notices.plain() == ""


def test_a_backup_that_fails_is_said(qtbot, path, monkeypatch):
    def fails(*_):
        raise store_error("store.disk_full", path="ward")

    with open_window(qtbot, path) as window:
        monkeypatch.setattr(backup, "backup", fails)
        window.keeping.backups.look()
        settled(qtbot, window)
        assert "No backup was taken" in window.keeping.notices.plain()
        assert "disk is full" in window.keeping.notices.plain()
        monkeypatch.undo()
        window.keeping.backups.look()
        settled(qtbot, window)
        assert window.keeping.notices.plain() == ""


def test_a_disk_that_is_nearly_full_is_said_until_there_is_room(qtbot, path, monkeypatch):
    with open_window(qtbot, path) as window:
        monkeypatch.setattr(operations.shutil, "disk_usage", lambda _: Usage(10**12, 10**12 - 10**8, 10**8))
        window.keeping.backups.look()
        settled(qtbot, window)
        assert "nearly full: 100 MB are free" in window.keeping.notices.plain()
        assert window.keeping.notices.seen.isHidden()
        monkeypatch.setattr(operations.shutil, "disk_usage", lambda _: Usage(10**12, 0, 10**12))
        window.keeping.backups.look()
        settled(qtbot, window)
        assert window.keeping.notices.plain() == ""


def test_of_one_disk_one_word_is_said(qtbot, path, monkeypatch):
    with open_window(qtbot, path) as window:
        monkeypatch.setattr(operations.shutil, "disk_usage", lambda _: Usage(10**12, 10**12 - 10**7, 10**7))
        window.keeping.surroundings.look()
        window.keeping.backups.look()
        settled(qtbot, window)
        assert window.keeping.notices.plain().count("disk") == 1
        assert "nothing more can be" in window.keeping.notices.plain()  # the stronger of the two
        monkeypatch.setattr(operations.shutil, "disk_usage", lambda _: Usage(10**12, 0, 10**12))
        window.keeping.surroundings.look()
        window.keeping.backups.look()
        settled(qtbot, window)
        assert window.keeping.notices.plain() == ""


def test_two_stores_of_one_name_keep_their_backups_apart_in_a_chosen_folder(tmp_path):
    stores = [tmp_path / ward / "ward.luffmark" for ward in ("a", "b")]
    chosen = {folder_for(str(tmp_path / "backups"), path) for path in stores}
    assert len(chosen) == 2
    for folder, path in zip(sorted(chosen), stores, strict=True):
        path.parent.mkdir()
        with Store.create(path, now=NOW) as store:
            for hours in range(30):
                operations.rotate(store, "AB", NOW + hours * HOUR, Rotation(_made(folder), now=True))
        assert len(backups_in(folder, path)) == 14  # twelve hours, and one of each day
    assert {len(backups_in(f, stores[0])) for f in chosen} == {14}


def _made(folder):
    folder.mkdir(parents=True, exist_ok=True)
    return folder


def test_another_folder_leaves_the_old_backups_and_says_so(qtbot, path, tmp_path, monkeypatch):
    with open_window(qtbot, path) as window:
        window.keeping.backups.take_now()
        settled(qtbot, window)
        window.actions_by_key["backups"].trigger()
        dialog = next(d for d in window.findChildren(BackupsDialog) if d.isVisible())
        assert dialog.table.rowCount() == 1
        monkeypatch.setattr(QFileDialog, "getExistingDirectory", lambda *_: str(tmp_path / "disk"))
        dialog.folder.click()
        assert "The 1 backups" in dialog.wrong.text()
        assert "do not expire" in dialog.wrong.text()
        assert dialog.table.rowCount() == 0
        dialog.go.click()
        until(qtbot, lambda: dialog.table.rowCount() == 1)
        assert next(iter((tmp_path / "disk").rglob("*.luff"))).parent.parent == tmp_path / "disk"
        dialog.reject()


def test_a_user_backs_up_damages_and_restores_from_the_window(qtbot, path):
    with open_window(qtbot, path) as window:
        window.actions_by_key["backups"].trigger()
        dialog = next(d for d in window.findChildren(BackupsDialog) if d.isVisible())
        assert not dialog.restore.isEnabled()
        dialog.go.click()
        until(qtbot, lambda: dialog.table.rowCount() == 1)
        assert "taken and opened" in dialog.wrong.text()
        dialog.reject()
        log(qtbot, window, "rr 25")
        window.actions_by_key["backups"].trigger()
        dialog = next(d for d in window.findChildren(BackupsDialog) if d.isVisible())
        dialog.restore.click()
        restore = next(d for d in window.findChildren(RestoreDialog) if d.isVisible())
        assert restore.new.text().endswith("ward-restored.luffmark")
        restore.go.click()
        until(qtbot, lambda: restore.told.isVisible())
        told = restore.told.toPlainText()
        assert "Bed 7: 1 logged" in told or "Bed 3: 1 logged" in told
        assert "Respiratory rate 25/min, AB" in told
        restore.open_new.click()
        until(qtbot, lambda: window.model is not None and "restored" in window.model.session.store_path.name)
        until(qtbot, lambda: window.feed.is_ready)
        settled(qtbot, window)
        window.actions_by_key["check_store"].trigger()
        until(qtbot, lambda: "sound" in window.strip.plain())


def test_a_damaged_store_leads_from_the_first_page_to_what_is_left_of_it(qtbot, path):
    sound = path.read_bytes()
    path.write_bytes(sound[:100] + bytes(4000) + sound[4100:])
    window = MainWindow(Preferences(cautions_seen=True, person="AB"))
    qtbot.addWidget(window)
    window.show()
    window.doers.file.open_path(path)
    until(qtbot, lambda: window.first is not None and "damaged" in window.first.said.text())
    assert list(window.first.steps) == ["restore", "salvage"]
    window.first.steps["salvage"].click()
    dialog = next(d for d in window.findChildren(SalvageDialog) if d.isVisible())
    assert dialog.source.text() == str(path)
    dialog.go.click()
    assert "initials" in dialog.wrong.text()  # no store is open: nobody is signed in
    dialog.initials.setText("cd")
    dialog.go.click()
    until(qtbot, lambda: dialog.told.isVisible())
    assert "Saved:" in dialog.told.toPlainText()
    assert not dialog.go.isEnabled()
    dialog.open_new.click()
    until(qtbot, lambda: window.feed is not None and window.feed.is_ready)
    assert window.model.session.store_path.name == "ward-salvaged.luffmark"
    assert "Bed 7" in window.pages.ward.first.text()
    window.close()


def test_only_a_ward_lead_restores_where_people_sign_in(path, tmp_path, monkeypatch):
    monkeypatch.setattr(people.hashed, "__defaults__", (Cost(64, 1, 1),))
    with Store.open(path) as store:
        people.add(store, "AB", "2580", people.LEAD, by="AB", now=NOW)
        people.add(store, "CD", "7391", people.STAFF, by="AB", now=NOW)
        store.backup(tmp_path / "copy.luff")
    request = RestoreRequest(tmp_path / "copy.luff", tmp_path / "new.luffmark", None, path, proven=True)
    with pytest.raises(RecordError, match=r"people.lead_needed"):
        operations.restore(None, "CD", NOW, request)
    for who, pin, key in (("AB", "7391", "people.wrong_pin"), ("AB", "", "people.wrong_pin"),
                          ("CD", "7391", "people.lead_needed"), ("XY", "2580", "people.unknown")):  # fmt: skip
        unproven = replace(request, proven=False, pin=pin)
        with pytest.raises(RecordError, match=key):
            operations.restore(None, who, NOW, unproven)
    assert not request.new.exists()
    proved = replace(request, proven=False, pin="2580", new=tmp_path / "proved.luffmark")
    assert operations.restore(None, "AB", NOW, proved).value.newer.batches == 0
    made = operations.restore(None, "AB", NOW, request).value
    assert made.newer.batches == 0
    with Store.open(request.new) as new:
        assert [e.event for e in new.person_events((operations.RESTORED,))] == [operations.RESTORED]
        assert new.verify() == ()


def test_a_witness_takes_the_head_after_each_backup(qtbot, path, tmp_path):
    with open_window(qtbot, path) as window:
        window.doers.store.set_witness(tmp_path / "witness.txt")
        window.keeping.backups.take_now()
        settled(qtbot, window)
        with Store.open(path, read_only=True) as store:
            assert store.printed_head() in (tmp_path / "witness.txt").read_text()
        window.actions_by_key["check_store"].trigger()
        until(qtbot, lambda: "every head of the witness file" in window.strip.plain())


def test_the_check_finds_that_the_newest_entries_were_cut_off(qtbot, path, tmp_path):
    before = path.read_bytes()
    with open_window(qtbot, path) as window:
        window.doers.store.set_witness(tmp_path / "witness.txt")
        log(qtbot, window, "rr 25")
        window.keeping.backups.take_now()
        settled(qtbot, window)
    path.write_bytes(before)  # an old copy is put in the store's place
    preferences = Preferences(cautions_seen=True, witness_file=str(tmp_path / "witness.txt"))
    with open_window(qtbot, path, preferences=preferences) as window:
        window.actions_by_key["check_store"].trigger()
        until(qtbot, lambda: any("cut off or replaced" in t for t in _cells(window)))
        assert "not sound" in window.keeping.notices.plain()
        assert list(window.keeping.notices.ways) == ["restore", "salvage"]


def _cells(window):
    return [d.table.item(r, 1).text() for d in window.findChildren(TableDialog) for r in range(d.table.rowCount())]


@pytest.fixture
def secret_ward(tmp_path, monkeypatch):
    """An encrypted store whose people sign in, with a backup; its recovery code."""
    monkeypatch.setattr(people.hashed, "__defaults__", (Cost(64, 1, 1),))
    with Store.create(tmp_path / "ward.luffmark", now=NOW, passphrase=SECRET, cost=Cost(64, 1, 1)) as store:
        people.add(store, "AB", "2580", people.LEAD, by="AB", now=NOW)
        (tmp_path / "backups").mkdir()
        operations.rotate(store, "AB", NOW, Rotation(tmp_path / "backups", now=True))
        return store.path, store.recovery_code


def test_at_three_in_the_morning_the_recovery_code_restores_without_a_lead(secret_ward, tmp_path):
    path, code = secret_ward
    backup = max(backups_in(tmp_path / "backups", path).items())[1]
    made = operations.restore(None, "XY", NOW, RestoreRequest(backup, tmp_path / "new.luffmark", code, path)).value
    assert made.unchecked is None
    assert made.newer.batches == 0
    with Store.open(tmp_path / "new.luffmark", passphrase=SECRET) as new:
        assert [(e.person, e.event) for e in new.person_events((operations.RESTORED,))] == [
            ("XY", operations.RESTORED)
        ]


def test_a_copy_that_nobody_can_check_is_a_choice_of_its_own_and_says_so(qtbot, secret_ward, tmp_path):
    path, _ = secret_ward
    window = MainWindow(Preferences(cautions_seen=True, recent_stores=(str(path),)))
    qtbot.addWidget(window)
    window.show()
    dialog = window.doers.store.restore(None)
    assert "Taken 28-Mar-2026" in dialog.noted.text()
    dialog.initials.setText("AB")
    dialog.go.click()
    assert "Type its passphrase" in dialog.wrong.text()
    assert not dialog.unchecked.isChecked()
    dialog.unchecked.setChecked(True)
    dialog.go.click()
    until(qtbot, lambda: dialog.told.isVisible())
    assert "NOT checked" in dialog.told.toPlainText()
    assert "its pages, its chain and its rules were not checked" in dialog.told.toPlainText()
    dialog.reject()
    window.close()
