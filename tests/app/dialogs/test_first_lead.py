"""A new store asks who looks after it: a ward lead with a PIN, or initials alone for now."""

import pytest

from app.dialogs.passphrase import RecoveryCodeDialog
from app.keeping.preferences import Preferences
from app.window.main import MainWindow
from storage import people
from storage.keys import Cost
from storage.store import Store
from tests.support.open_window import settled, until


@pytest.fixture
def window(qtbot, monkeypatch):
    monkeypatch.setattr(people.hashed, "__defaults__", (Cost(64, 1, 1),))
    made = MainWindow(Preferences(cautions_seen=True))
    qtbot.addWidget(made)
    made.show()
    yield made
    made.close()


def plain_store(qtbot, window, path):
    """A store without a passphrase, up to the question who looks after it."""
    dialog = window.doers.file.make_store(path)
    dialog.without.setChecked(True)
    dialog.go.click()
    until(qtbot, lambda: window.doers.file.lead_dialog is not None and window.feed.is_ready)
    return window.doers.file.lead_dialog


def test_a_ward_lead_of_a_plain_store_is_signed_in_and_shown_a_code_for_its_people(qtbot, window, tmp_path):
    path = tmp_path / "ward.luffmark"
    lead = plain_store(qtbot, window, path)
    lead.initials.setText("ab")
    lead.pin.setText("2580")
    lead.go.click()
    assert "not the same" in lead.wrong.text()
    for line in (lead.pin, lead.again):
        line.setText("1234")
    lead.go.click()
    until(qtbot, lambda: "guessed first" in lead.wrong.text())
    for line in (lead.pin, lead.again):
        line.setText("2580")
    lead.go.click()
    until(qtbot, lambda: window.doers.codes.dialog is not None)
    assert window.model.session.person == "AB"
    assert not window.keeping.lock.is_locked
    shown = window.findChild(RecoveryCodeDialog)
    code = shown.code.text()
    shown.kept.setChecked(True)
    shown.accept()
    settled(qtbot, window)
    assert not window.keeping.lock.is_locked
    with Store.open(path, read_only=True) as store:
        assert people.of_store(store)["AB"].is_lead
        assert people.is_code(store, code)
        assert [e.event for e in store.person_events((people.SIGNED_IN,))] == [people.SIGNED_IN]


def test_initials_alone_are_a_choice_and_a_pin_can_come_later(qtbot, window, tmp_path):
    path = tmp_path / "ward.luffmark"
    lead = plain_store(qtbot, window, path)
    lead.initials.setText("cd")
    lead.leave.click()
    settled(qtbot, window)
    assert window.model.session.person == "CD"
    assert window.preferences.person == "CD"
    with Store.open(path, read_only=True) as store:
        assert people.of_store(store) == {}


def test_taking_in_a_file_waits_until_the_store_is_made(qtbot, window, tmp_path, monkeypatch):
    asked = []
    files = window.doers.file
    monkeypatch.setattr(type(files), "do_take_in", lambda _self: asked.append(files.lead_dialog))
    files._then_take_in = True
    lead = plain_store(qtbot, window, tmp_path / "ward.luffmark")
    assert asked == []
    lead.leave.click()
    assert asked == [None]
    settled(qtbot, window)
