"""The lock hides every screen and keeps what was typed; who proves who they are sees it again."""

import pytest
from PySide6.QtCore import QEvent, QPoint, QPointF, Qt, QTimer
from PySide6.QtGui import QGuiApplication, QKeyEvent, QMouseEvent
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QApplication, QDialog, QFileDialog, QLabel

from app.dialogs.passphrase import RecoveryCodeDialog
from app.dialogs.people import PeopleDialog
from app.keeping.lock import IdleWatch
from app.keeping.lock_page import Way
from app.keeping.preferences import Preferences
from app.window.start import application
from storage import people
from storage.keys import Cost
from storage.store import Store
from tests.support.open_window import NOW, make_store, open_window, settled, until

PIN, OTHER, SECRET = "2580", "7391", "five boats at night"


@pytest.fixture(autouse=True)
def cheap(monkeypatch):
    monkeypatch.setattr(people.hashed, "__defaults__", (Cost(64, 1, 1),))


@pytest.fixture
def with_people(tmp_path):
    path = make_store(tmp_path / "ward.luffmark")
    with Store.open(path) as store:
        people.add(store, "AB", PIN, people.LEAD, by="AB", now=NOW)
        people.add(store, "CD", OTHER, people.STAFF, by="AB", now=NOW)
    return path


def sign_in(qtbot, window, initials, pin):
    page = window.keeping.lock.page
    page.initials.setText(initials)
    qtbot.keyClicks(page.secret, pin)
    qtbot.keyClick(page.secret, Qt.Key.Key_Return)


def words_in_sight(window):
    """Every text that could be read on the screen."""
    shown = [w for top in QApplication.topLevelWidgets() if top.isVisible() for w in [top, *top.findChildren(QLabel)]
             if w.isVisible()]  # fmt: skip
    return " ".join([w.text() if isinstance(w, QLabel) else w.windowTitle() for w in shown])


def test_where_people_sign_in_nothing_is_seen_and_nothing_logged_before(qtbot, with_people):
    with open_window(qtbot, with_people, preferences=Preferences(cautions_seen=True, person="CD")) as window:
        page = window.keeping.lock.page
        assert window.keeping.lock.is_locked
        assert page.way is Way.PIN
        assert window.model.session.person == ""
        assert page.isVisible()
        assert not window.pages.isVisible()
        assert "Bed 7" not in words_in_sight(window)
        assert "ward" not in window.windowTitle()
        assert not any(a.isEnabled() for k, a in window.actions_by_key.items() if k != "quit")
        sign_in(qtbot, window, "CD", PIN)
        until(qtbot, lambda: "PIN of CD is wrong" in page.wrong.text())
        assert page.secret.text() == ""
        sign_in(qtbot, window, "cd", OTHER)
        until(qtbot, lambda: not window.keeping.lock.is_locked)
        assert window.model.session.person == "CD"
        assert window.pages.isVisible()
        assert "ward.luffmark" in window.windowTitle()
        events = [(e.person, e.event) for e in events_of(with_people)]
        assert events == [("CD", people.TURNED_AWAY), ("CD", people.SIGNED_IN)]


def events_of(path):
    with Store.open(path, read_only=True) as store:
        return store.person_events((people.SIGNED_IN, people.TURNED_AWAY))


def test_no_pin_is_asked_per_entry_and_change_person_closes_the_screen(qtbot, with_people):
    with open_window(qtbot, with_people) as window:
        sign_in(qtbot, window, "AB", PIN)
        until(qtbot, lambda: not window.keeping.lock.is_locked)
        for line in ("rr 24", "hr 95"):
            settled(qtbot, window)  # that they signed in is an entry of the ledger too
            head = window.model.session.head
            window.strip.set_text(line)
            settled(qtbot, window)
            qtbot.keyClick(window.strip.line, Qt.Key.Key_Return)
            until(qtbot, lambda head=head: window.model.session.head > head)
        window.actions_by_key["sign_in"].trigger()
        assert window.keeping.lock.is_locked
        sign_in(qtbot, window, "CD", OTHER)
        until(qtbot, lambda: window.model.session.person == "CD")


def test_what_is_typed_outlives_the_lock_dialogs_too(qtbot, with_people):
    with open_window(qtbot, with_people) as window:
        sign_in(qtbot, window, "AB", PIN)
        until(qtbot, lambda: not window.keeping.lock.is_locked)
        window.strip.set_text("22/6 3")
        window.actions_by_key["people"].trigger()
        dialog = next(d for d in window.findChildren(PeopleDialog) if d.isVisible())
        dialog.initials.setText("EF")
        window.actions_by_key["lock"].trigger()
        assert not dialog.isVisible()
        settled(qtbot, window)
        window._tell_session()  # the clock ticks on
        assert window.windowTitle() == "Luffmark - locked"
        sign_in(qtbot, window, "AB", PIN)
        until(qtbot, lambda: not window.keeping.lock.is_locked)
        assert dialog.isVisible()
        assert dialog.isModal()
        assert dialog.initials.text() == "EF"
        assert window.strip.line.text() == "22/6 3"
        dialog.reject()


def test_a_print_dialog_goes_when_the_lock_comes_and_comes_back_no_more(qtbot, on_bed_7):
    """It pointed to a printer that was gone by then: showing it again ended the program."""
    window = on_bed_7
    code = RecoveryCodeDialog("ward.luffmark", "4F7K-92QM-TX3B-HW8D", window.theme, window)
    code.open()
    QTimer.singleShot(50, window, window.keeping.lock_now)
    code.print.click()
    assert window.keeping.lock.is_locked
    assert not code.isVisible()
    qtbot.keyClick(window.keeping.lock.page, Qt.Key.Key_Space)
    assert code.isVisible()
    assert not any(d.isVisible() for d in code.findChildren(QDialog))
    QDialog.reject(code)
    code.deleteLater()
    QApplication.sendPostedEvents(None, QEvent.Type.DeferredDelete)  # and the threads of the print dialog with it


def test_a_dialog_whose_answer_came_while_it_was_hidden_is_over(qtbot, on_bed_7):
    """A correction is sent and the screen is hidden before it is answered: what was done is not offered again."""
    window = on_bed_7
    window.actions_by_key["correct"].trigger()
    dialog = window.doers.log.form
    dialog.list.setCurrentItem(dialog.list.topLevelItem(0))
    dialog.act.setCurrentIndex(1)
    dialog.reason.setText("read off the wrong monitor")
    settled(qtbot, window)
    head = window.model.session.head
    dialog.submit()
    window.keeping.lock_now()
    until(qtbot, lambda: window.model.session.head > head)
    settled(qtbot, window)
    qtbot.keyClick(window.keeping.lock.page, Qt.Key.Key_Space)
    assert not window.keeping.lock.is_locked
    assert not dialog.isVisible()
    window.actions_by_key["correct"].trigger()
    assert window.doers.log.form.isVisible()
    window.doers.log.form.reject()


def test_a_dialog_that_opens_late_stays_out_of_sight(qtbot, with_people):
    with open_window(qtbot, with_people) as window:
        sign_in(qtbot, window, "AB", PIN)
        until(qtbot, lambda: not window.keeping.lock.is_locked)
        window.keeping.lock_now("AB")
        late = PeopleDialog(window.model, window.reader, window.theme, window)
        late.open()
        until(qtbot, lambda: not late.isVisible())
        sign_in(qtbot, window, "AB", PIN)
        until(qtbot, lambda: late.isVisible())
        late.reject()


def test_an_encrypted_store_without_people_opens_by_passphrase_or_code(qtbot, tmp_path):
    path = tmp_path / "secret.luffmark"
    with Store.create(path, now=NOW, passphrase=SECRET) as made:
        code = made.recovery_code
    with open_window(qtbot, path, passphrase=SECRET) as window:
        for secret in (SECRET, code):
            window.keeping.locking.idle()
            page = window.keeping.lock.page
            assert page.way is Way.PASSPHRASE
            assert page.initials.isHidden()
            qtbot.keyClicks(page.secret, "something else")
            page.go.click()
            until(qtbot, lambda page=page: "passphrase is wrong" in page.wrong.text())
            qtbot.keyClicks(page.secret, secret)
            page.go.click()
            until(qtbot, lambda: not window.keeping.lock.is_locked)
            assert window.model.session.person == "AB"


def test_a_plain_store_without_people_is_hidden_and_any_key_or_click_shows_it(qtbot, tmp_path):
    with open_window(qtbot, make_store(tmp_path / "ward.luffmark")) as window:
        page, watch = window.keeping.lock.page, window.keeping.watch
        window.strip.set_text("16/6")
        ways_back = (
            lambda: qtbot.keyClick(QApplication.focusWidget(), Qt.Key.Key_7),
            lambda: qtbot.mouseClick(page, Qt.MouseButton.LeftButton, pos=QPoint(4, 4)),
            page.go.click,
        )
        for back in ways_back:
            watch._last = (watch._last[0] - 601, watch._last[1] - 601)
            watch.look()
            assert window.keeping.lock.is_locked
            assert "Bed 7" not in words_in_sight(window)
            assert "No sign-in is set up" in page.told.text()
            assert page.title.text() == "Screen hidden"
            back()
            assert not window.keeping.lock.is_locked
            assert window.pages.isVisible()
            assert window.strip.line.text() == "16/6", "the key that shows the screen again types nothing"


def test_a_dialog_that_asks_for_a_file_goes_when_the_lock_comes(qtbot, with_people):
    """A dialog of the operating system would stay, with the names of files on it, and could still be used."""
    application()
    assert QApplication.testAttribute(Qt.ApplicationAttribute.AA_DontUseNativeDialogs)
    with open_window(qtbot, with_people) as window:
        sign_in(qtbot, window, "AB", PIN)
        until(qtbot, lambda: not window.keeping.lock.is_locked)
        seen = []

        def lock():
            seen.extend(d for d in QApplication.topLevelWidgets() if isinstance(d, QFileDialog) and d.isVisible())
            window.keeping.lock_now("AB")
            seen.append(any(isinstance(d, QFileDialog) and d.isVisible() for d in QApplication.topLevelWidgets()))

        QTimer.singleShot(300, lock)
        chosen, _ = QFileDialog.getOpenFileName(window, "Take in", str(with_people.parent))
        assert (len(seen), seen[-1], chosen) == (2, False, "")
        assert window.keeping.lock.is_locked
        sign_in(qtbot, window, "AB", PIN)
        until(qtbot, lambda: not window.keeping.lock.is_locked)


def test_a_display_on_a_wall_is_never_hidden_by_itself(qtbot, tmp_path):
    with open_window(qtbot, make_store(tmp_path / "ward.luffmark")) as window:
        window.doers.store.lock_after(0)
        assert (window.preferences.hide_minutes, window.preferences.lock_minutes) == (0, 10)
        assert not window.keeping.watch._look.isActive()
        window.keeping.locking.idle()
        assert not window.keeping.lock.is_locked
        window.actions_by_key["lock"].trigger()
        assert window.keeping.lock.is_locked, "at will it is hidden all the same"


def test_the_first_person_added_must_sign_in_at_once(qtbot, tmp_path):
    with open_window(qtbot, make_store(tmp_path / "ward.luffmark")) as window:
        window.actions_by_key["people"].trigger()
        dialog = next(d for d in window.findChildren(PeopleDialog) if d.isVisible())
        until(qtbot, lambda: "lead" in dialog.told.text())
        assert dialog.lead.isChecked()
        dialog.initials.setText("ab")
        dialog.pin.setText("1234")
        dialog.go.click()
        assert "not the same" in dialog.wrong.text()
        dialog.again.setText("1234")
        dialog.go.click()
        until(qtbot, lambda: "guessed first" in dialog.wrong.text())
        for line in (dialog.pin, dialog.again):
            line.setText(PIN)
        dialog.go.click()
        until(qtbot, lambda: window.keeping.lock.is_locked)
        assert window.model.session.person == ""
        sign_in(qtbot, window, "AB", PIN)
        until(qtbot, lambda: not window.keeping.lock.is_locked)
        until(qtbot, lambda: dialog.table.rowCount() == 1)
        dialog.table.selectRow(0)
        dialog.retire.click()
        until(qtbot, lambda: "only ward lead" in dialog.wrong.text())
        dialog.reject()


def test_keys_and_mouse_put_the_lock_off_and_stillness_brings_it(qtbot, tmp_path):
    with open_window(qtbot, make_store(tmp_path / "ward.luffmark")) as window:
        watch = IdleWatch(window)
        told = []
        watch.idle.connect(lambda: told.append(1))
        watch.start(10)
        handle = window.windowHandle()
        for event in (
            QKeyEvent(QEvent.Type.KeyPress, Qt.Key.Key_Shift, Qt.KeyboardModifier.NoModifier),
            QMouseEvent(QEvent.Type.MouseMove, QPointF(5, 5), QPointF(5, 5), Qt.MouseButton.NoButton,
                        Qt.MouseButton.NoButton, Qt.KeyboardModifier.NoModifier),
        ):  # fmt: skip
            watch._last = (watch._last[0] - 700, watch._last[1] - 700)
            QGuiApplication.sendEvent(handle, event)
            watch.look()
            assert told == []
        watch._last = (watch._last[0], watch._last[1] - 700)  # the computer slept: its wall clock went on
        watch.look()
        assert told == [1]
        watch._last = (watch._last[0], watch._last[1] + 3600)  # the wall clock was set back
        watch.look()
        assert told == [1]
        watch.stop()
        QTest.qWait(1)


def test_the_time_is_a_preference(qtbot, with_people):
    with open_window(qtbot, with_people) as window:
        sign_in(qtbot, window, "AB", PIN)
        until(qtbot, lambda: not window.keeping.lock.is_locked)
        window.doers.store.lock_after(3)
        assert window.preferences.lock_minutes == 3
        assert window.keeping.watch._limit_s == 180
        window.keeping.watch._last = (0.0, 0.0)
        window.keeping.watch.look()
        assert window.keeping.lock.is_locked
        assert window.keeping.lock.page.initials.text() == "AB"
