"""A second passphrase, held by the ward lead, opens the store too; changing one leaves the other."""

import pytest

from app.dialogs.second_passphrase import SecondPassphraseDialog
from app.operations import passphrase as operations
from core.record.message import RecordError
from storage import people
from storage.errors import StoreError
from storage.keys import Cost, envelope_path, is_recovery_code, open_envelope
from storage.store import Store
from tests.support.open_window import NOW, open_window, settled, until

SECRET, SECOND, NEXT, CHEAP = "four quiet boats tonight", "the lead's own words", "five other boats", Cost(64, 1, 1)


@pytest.fixture
def path(tmp_path):
    with Store.create(tmp_path / "ward.luffmark", now=NOW, passphrase=SECRET, cost=CHEAP) as store:
        store.put_draft("code", store.recovery_code)
    return tmp_path / "ward.luffmark"


def opens(path, secret):
    try:
        open_envelope(envelope_path(path).read_text(), secret)
    except StoreError:
        return False
    Store.open(path, passphrase=secret).close()
    return True


def test_it_opens_the_store_beside_the_first_and_outlives_its_change(path):
    with Store.open(path, passphrase=SECRET) as store:
        code = store.draft("code")
        assert not store.has_second_passphrase
        store.set_second_passphrase(SECRET, SECOND, CHEAP)
        assert store.has_second_passphrase
        store.change_passphrase(SECOND, NEXT, CHEAP)
    assert [opens(path, s) for s in (SECRET, NEXT, SECOND, code)] == [False, True, True, True]
    assert not is_recovery_code(envelope_path(path).read_text(), SECOND)
    with Store.open(path, passphrase=SECOND) as store:
        store.set_second_passphrase(code, None, CHEAP)
        assert not store.has_second_passphrase
        assert store.verify() == ()
    assert [opens(path, s) for s in (NEXT, SECOND, code)] == [True, False, True]


def test_a_wrong_secret_changes_nothing_and_a_short_one_is_refused(path):
    before = envelope_path(path).read_text()
    with Store.open(path, passphrase=SECRET) as store:
        with pytest.raises(StoreError, match=r"key.wrong_passphrase"):
            store.set_second_passphrase("wrong wrong", SECOND, CHEAP)
        with pytest.raises(RecordError, match=r"passphrase.too_short"):
            store.set_second_passphrase(SECRET, "short", CHEAP)
    assert envelope_path(path).read_text() == before


def test_where_people_sign_in_a_ward_lead_sets_it(path, monkeypatch):
    monkeypatch.setattr(people.hashed, "__defaults__", (CHEAP,))
    with Store.open(path, passphrase=SECRET) as store:
        people.add(store, "AB", "2580", people.LEAD, by="AB", now=NOW)
        people.add(store, "CD", "7391", people.STAFF, by="AB", now=NOW)
        request = operations.SecondRequest(SECRET, SECOND)
        with pytest.raises(RecordError, match=r"people.lead_needed"):
            operations.set_second(store, "CD", NOW, request)
        assert operations.set_second(store, "AB", NOW, request).value
        assert [e.person for e in store.person_events((operations.SECOND_SET,))] == ["AB"]


def test_from_the_window(qtbot, path):
    with open_window(qtbot, path, passphrase=SECRET) as window:
        window.actions_by_key["second_passphrase"].trigger()
        dialog = next(d for d in window.findChildren(SecondPassphraseDialog) if d.isVisible())
        settled(qtbot, window)
        assert "none now" in dialog.stands.text()
        assert dialog.none.isHidden()
        for line, text in ((dialog.old, "wrong wrong"), (dialog.second, SECOND), (dialog.again, SECOND)):
            line.setText(text)
        dialog.go.click()
        until(qtbot, lambda: "passphrase is wrong" in dialog.wrong.text())
        dialog.old.setText(SECRET)
        dialog.go.click()
        until(qtbot, lambda: "opens the store from now on" in dialog.wrong.text())
        assert opens(path, SECOND)
        dialog.none.setChecked(True)
        dialog.old.setText(SECOND)
        dialog.go.click()
        until(qtbot, lambda: "taken away" in dialog.wrong.text())
        assert not opens(path, SECOND)
        dialog.reject()
