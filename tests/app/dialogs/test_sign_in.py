"""Who logs changes in two keys: the action's, and the digit of somebody who logged lately."""

import pytest
from PySide6.QtCore import Qt, QTimer
from PySide6.QtWidgets import QApplication

from app.dialogs.sign_in import SignInDialog, logged_lately
from app.look.theme import LIGHT
from app.operations import entry
from core.record.instant import MINUTE
from storage.store import Store
from tests.support.open_window import NOW, ZONE, make_store, open_window, settled

Key, Mod = Qt.Key, Qt.KeyboardModifier


@pytest.fixture
def path(tmp_path):
    path = make_store(tmp_path / "ward.luffmark")
    with Store.open(path) as store:
        for minutes, who in ((3, "CD"), (2, "EF"), (1, "CD")):
            request = entry.LineRequest("bed-7", f"{minutes}m ago note seen", ZONE, confirmed=True)
            entry.log_line(store, who, NOW - minutes * MINUTE, request)
    return path


def test_two_keys_change_the_person(qtbot, path):
    with open_window(qtbot, path) as window:

        def choose():
            dialog = QApplication.activeModalWidget()
            assert isinstance(dialog, SignInDialog)
            assert dialog.recent == ("CD", "EF")
            qtbot.keyClick(dialog.initials, Key.Key_2)

        QTimer.singleShot(0, choose)
        qtbot.keyClick(window.pages.ward.lanes, Key.Key_I, Mod.ControlModifier)
        settled(qtbot, window)
        assert window.model.session.person == "EF"
        assert window.top.person.text() == "EF"


def test_those_who_logged_lately_come_newest_first_without_the_person_who_logs(path):
    with Store.open(path) as store:
        records = [store.episode(key) for key in store.episode_keys()]
    assert logged_lately(records, "AB") == ("CD", "EF")
    assert logged_lately(records, "cd") == ("AB", "EF")


def test_initials_are_typed_and_a_digit_nobody_has_is_a_letter_of_them(qtbot):
    dialog = SignInDialog("AB", LIGHT, recent=("CD",))
    qtbot.addWidget(dialog)
    dialog.show()
    dialog.initials.selectAll()
    qtbot.keyClicks(dialog.initials, "2x")
    assert dialog.isVisible()
    assert dialog.person == "2X"
    qtbot.keyClick(dialog.initials, Key.Key_Return)
    assert dialog.result() == SignInDialog.DialogCode.Accepted
    dialog.close()


def test_nothing_typed_is_refused_in_words(qtbot):
    dialog = SignInDialog("", LIGHT)
    qtbot.addWidget(dialog)
    dialog.submit()
    assert "Type your initials" in dialog.wrong.text()


def test_signing_in_takes_initials(qtbot):
    dialog = SignInDialog("AB", LIGHT)
    qtbot.addWidget(dialog)
    dialog.initials.clear()
    dialog.go.click()
    assert dialog.result() == 0
    assert dialog.wrong.text()
    qtbot.keyClicks(dialog.initials, "xy")
    dialog.go.click()
    assert dialog.person == "XY"
    assert dialog.result() == 1
