"""A dialog is sent and left before its answer comes: what came of it is told all the same, nothing else closes."""

from dataclasses import replace

import pytest
from PySide6.QtCore import QEvent
from PySide6.QtWidgets import QApplication, QDialog

from app.dialogs.close_due import CloseDueDialog
from app.dialogs.passphrase import ChangePassphraseDialog, RecoveryCodeDialog
from app.policy.view import PolicyDialog
from core.judgement.policy import shipped_text
from storage import keys
from storage.keys import Cost
from storage.store import Store
from tests.support.open_window import NOW, open_window, settled, until

SECRET, LATER = "four quiet boats tonight", "five other boats tomorrow"
CHEAP = Cost(64, 1, 1)


@pytest.fixture
def encrypted(qtbot, tmp_path, monkeypatch):
    for slow in (keys.change_passphrase, keys.change_recovery_code):
        monkeypatch.setattr(slow, "__defaults__", (CHEAP,))
    path = tmp_path / "ward.luffmark"
    Store.create(path, passphrase=SECRET, now=NOW, by="AB", cost=CHEAP).close()
    with open_window(qtbot, path, passphrase=SECRET) as window:
        yield window


def seen(kind):
    return [w for w in QApplication.topLevelWidgets() if isinstance(w, kind) and w.isVisible()]


def sends_and_leaves(window, secret):
    window.actions_by_key["change_passphrase"].trigger()
    (dialog,) = seen(ChangePassphraseDialog)
    dialog._old.setText(secret)
    dialog._new.setText(LATER)
    dialog._again.setText(LATER)
    dialog.new_code.setChecked(True)
    dialog.submit()
    dialog.reject()
    QApplication.processEvents()  # it is thrown away when it is left


def test_a_new_recovery_code_is_shown_though_the_dialog_that_asked_for_it_was_left(qtbot, encrypted):
    """The old code stops working: one that nobody was shown would leave none."""
    sends_and_leaves(encrypted, SECRET)
    until(qtbot, lambda: bool(seen(RecoveryCodeDialog)))
    (shown,) = seen(RecoveryCodeDialog)
    code, path = shown.code.text(), encrypted.model.session.store_path
    assert "was changed" in encrypted.strip.plain()
    QDialog.reject(shown)
    encrypted.close()
    with Store.open(path, passphrase=code, read_only=True) as store:
        assert store.is_encrypted


def test_a_wrong_passphrase_is_said_and_does_not_close_the_store(qtbot, encrypted):
    sends_and_leaves(encrypted, "not it at all, not this one")
    until(qtbot, lambda: "passphrase is wrong" in encrypted.strip.plain())
    settled(qtbot, encrypted)
    assert encrypted.model is not None
    assert encrypted.pages.isVisible()
    assert seen(QDialog) == []


def test_a_word_that_was_refused_is_said_though_its_dialog_was_left(qtbot, on_bed_7):
    window = on_bed_7
    window.actions_by_key["close_due"].trigger()
    (dialog,) = seen(CloseDueDialog)
    dialog._items = tuple(replace(d, what="weaning") for d in dialog._items)
    dialog.submit()
    dialog.reject()
    settled(qtbot, window)
    assert window.strip.plain().startswith("Weaning is not due")


def test_a_dialog_that_is_opened_again_meanwhile_stays(qtbot, on_bed_7):
    window = on_bed_7
    window.actions_by_key["close_due"].trigger()
    (dialog,) = seen(CloseDueDialog)
    dialog.submit()
    dialog.reject()
    window.actions_by_key["close_due"].trigger()
    (again,) = seen(CloseDueDialog)
    again.reason.setText("half typed")
    until(qtbot, lambda: "recorded for Bed 7" in window.strip.plain())
    assert again.isVisible()
    assert again.reason.text() == "half typed"
    again.reject()


def test_a_policy_is_said_to_be_in_force_though_both_its_dialogs_were_left(qtbot, window, tmp_path):
    path = tmp_path / "policy.toml"
    path.write_text(shipped_text().replace("severe_below_ph = { value = 7.25", "severe_below_ph = { value = 7.20"))
    window.actions_by_key["policy"].trigger()
    until(qtbot, lambda: bool(seen(PolicyDialog)))
    (policy,) = seen(PolicyDialog)
    window.doers.policy.look_at(path)
    asking = window.doers.policy.asking
    asking.submit()
    assert not asking.go.isEnabled()
    asking.reject()
    policy.reject()
    QApplication.sendPostedEvents(None, QEvent.Type.DeferredDelete)  # both are thrown away
    until(qtbot, lambda: "In force now" in window.strip.plain())
    settled(qtbot, window)
