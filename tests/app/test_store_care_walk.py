"""A new user makes a store, signs in, logs, locks, backs up, damages and restores it: with keys and mouse, from the
window alone, on real files."""

from pathlib import Path

import pytest
from PySide6.QtCore import QCoreApplication, Qt
from PySide6.QtGui import QCursor
from PySide6.QtWidgets import QMenu, QToolTip

from app.dialogs.backups import BackupsDialog
from app.dialogs.first_lead import FirstLeadDialog
from app.dialogs.key_file import KeyFileDialog
from app.dialogs.passphrase import ChangePassphraseDialog, NewStoreDialog, OpenStoreDialog, RecoveryCodeDialog
from app.dialogs.pin_by_code import PinByCodeDialog
from app.dialogs.restore import RestoreDialog
from app.dialogs.salvage import SalvageDialog
from app.forms.begin_form import BeginForm
from app.forms.gas_form import GasForm
from app.keeping.preferences import Preferences, load
from app.look.style_sheet import apply_theme
from app.look.theme import THEMES
from app.window.main import MainWindow
from storage import people
from storage.engine import PAGE_BYTES
from storage.keys import Cost, envelope_path
from storage.people import PIN_COST
from storage.person_events import PersonEvent
from storage.store import Store
from storage.store_file import is_encrypted
from tests.support.walk import Walk

SECRET, LATER = "four quiet boats tonight", "five other boats tomorrow"
PIN, NEW_PIN, BED = "2580", "7391", "Bed 4"


@pytest.fixture
def walk(qtbot, qapp, tmp_path, monkeypatch):
    monkeypatch.setattr(people.hashed, "__defaults__", (Cost(64, 1, 1),))
    QCoreApplication.setAttribute(Qt.ApplicationAttribute.AA_DontUseNativeDialogs)
    apply_theme(qapp, THEMES["light"])
    window = MainWindow(Preferences(), tmp_path / "preferences.toml")
    qtbot.addWidget(window)
    window.show()
    window.activateWindow()
    made = Walk(qtbot, window)
    yield made
    made.window.close()
    QCoreApplication.setAttribute(Qt.ApplicationAttribute.AA_DontUseNativeDialogs, False)


def makes_a_store(walk: Walk, path: Path) -> str:
    """From the first page to a store with a passphrase and a ward lead; the recovery code."""
    first = walk.window.first
    walk.picture("first-page")
    assert not first.new.isEnabled()
    walk.press(first.read)
    with walk.choosing(path):
        walk.press(first.new)
    asked = walk.dialog(NewStoreDialog)
    assert not asked.without.isChecked()
    walk.press(asked.without)
    assert "not be encrypted" in asked.wrong.text()
    walk.picture("going-without")
    walk.press(asked.without)
    walk.write(asked._new, SECRET)
    walk.write(asked._again, SECRET)
    walk.picture("passphrase")
    walk.press(asked.go)
    shown = walk.dialog(RecoveryCodeDialog)
    code = shown.code.text()
    walk.qtbot.keyClick(shown, Qt.Key.Key_Escape)
    assert shown.isVisible()
    walk.picture("recovery-code")
    assert not shown.go.isEnabled()
    walk.press(shown.kept)
    walk.press(shown.go)
    lead = walk.dialog(FirstLeadDialog)
    walk.write(lead.initials, "ab")
    for line in (lead.pin, lead.again):
        walk.write(line, PIN)
    walk.picture("ward-lead")
    walk.press(lead.go)
    walk.until(lambda: walk.window.model.session.person == "AB" and walk.window.model.session.has_people)
    walk.rest()
    assert not walk.window.keeping.lock.is_locked
    assert is_encrypted(path)
    return code


def logs_a_patient(walk: Walk) -> None:
    walk.keys("Ctrl+N")
    form = walk.dialog(BeginForm)
    walk.write(form.words["label"], BED)
    walk.until(lambda: form.go.isEnabled() and not walk.window.model.runner.is_busy)
    walk.press(form.go)
    walk.until(lambda: walk.window.strip.patient is not None)
    walk.rest()
    for line in ("bpap-st 14/5 28", "rr 28 spo2 90 hr 104"):
        walk.log(line)
    walk.picture("logged")


def is_locked_away(walk: Walk) -> None:
    """A form, a menu and a tip are open, a line is half typed: nothing of it is seen while nobody is there."""
    window = walk.window
    window.strip.set_text("note half typ")
    walk.keys("F11")
    form = walk.dialog(GasForm)
    form.gas.fields["ph"].box.lineEdit().setFocus()
    walk.qtbot.keyClicks(form.gas.fields["ph"].box.lineEdit(), "7.3")
    menu = QMenu(BED, form)
    menu.addAction(BED)
    menu.popup(QCursor.pos())
    QToolTip.showText(QCursor.pos(), BED, form)
    walk.rest()
    assert BED in walk.seen()
    window.keeping.watch._last = (0.0, 0.0)  # as long ago as can be
    window.keeping.watch.look()
    walk.picture("locked")
    assert BED not in walk.seen()
    assert "half typ" not in walk.seen()
    assert window.windowTitle() == "Luffmark - locked"
    assert not menu.isVisible()
    assert not form.isVisible()
    page = window.keeping.lock.page
    assert "10 min" in page.told.text()
    for wrong in ("1111", "2222", "3333"):
        walk.write(page.secret, wrong, enter=True)
        walk.until(lambda: "PIN of AB is wrong" in page.wrong.text() and page.go.isEnabled())
    walk.write(page.secret, PIN, enter=True)
    walk.until(lambda: "Too many wrong PINs" in page.wrong.text())
    assert not page.go.isEnabled()
    walk.picture("slowed")
    walk.until(lambda: page.go.isEnabled())
    walk.write(page.secret, PIN, enter=True)
    walk.until(lambda: not window.keeping.lock.is_locked)
    assert form.isVisible()
    assert form.gas.fields["ph"].text == "7.3"
    assert window.strip.line.text() == "note half typ"
    walk.picture("unlocked")
    form.reject()
    window.strip.leave()


def comes_in_by_the_code(walk: Walk, code: str) -> None:
    """The nurse of the night has no PIN, and nobody who could give one is there."""
    window = walk.window
    walk.keys("Ctrl+Shift+X")
    page = window.keeping.lock.page
    walk.press(page.by_code)
    asked = walk.dialog(PinByCodeDialog)
    walk.write(asked.initials, "cd")
    for line in (asked.pin, asked.again):
        walk.write(line, NEW_PIN)
    walk.write(asked.code, SECRET)
    walk.press(asked.go)
    walk.until(lambda: "not the recovery code" in asked.wrong.text())
    assert BED not in walk.seen()
    walk.write(asked.code, code.lower().replace("-", " "))
    walk.picture("in-by-the-code")
    walk.press(asked.go)
    walk.until(lambda: not window.keeping.lock.is_locked)
    assert window.model.session.person == "CD"
    events = [(e.person, e.event) for e in events_of(window)]
    assert ("CD", people.CODE_USED) in events
    walk.keys("Ctrl+I")
    walk.write(page.initials, "AB")
    walk.write(page.secret, PIN, enter=True)
    walk.until(lambda: window.model.session.person == "AB")


def events_of(window: MainWindow) -> tuple[PersonEvent, ...]:
    with Store.open(window.model.session.store_path, passphrase=SECRET, read_only=True) as store:
        return store.person_events()


def backs_up(walk: Walk) -> None:
    walk.keys("Ctrl+Shift+A")
    dialog = walk.dialog(BackupsDialog)
    walk.press(dialog.go)
    walk.until(lambda: dialog.table.rowCount() == 1)
    assert "taken and opened" in dialog.wrong.text()
    walk.picture("backups")
    walk.press(dialog.leave)


def changes_the_passphrase(walk: Walk) -> None:
    walk.keys("Ctrl+Shift+Y")
    dialog = walk.dialog(ChangePassphraseDialog)
    walk.write(dialog._old, SECRET)
    for line in (dialog._new, dialog._again):
        walk.write(line, LATER)
    walk.picture("change-passphrase")
    walk.press(dialog.go)
    walk.until(lambda: "passphrase was changed" in walk.window.strip.plain())
    walk.rest()


def opens(walk: Walk, secret: str | None) -> None:
    """Choose the store on the first page, and type a passphrase where one is asked for."""
    walk.until(walk.window.first.recent[0].isVisible)
    walk.press(walk.window.first.recent[0])
    if secret is not None:
        asked = walk.dialog(OpenStoreDialog)
        walk.write(asked._typed, secret, enter=True)


def trouble(walk: Walk) -> str:
    """What the first page says, once it does."""
    walk.until(lambda: walk.window.first is not None and walk.window.first.said.text())
    return walk.window.first.said.text()


@pytest.mark.qt_log_ignore("This plugin does not support (raise|grabbing)", extend=True)
def test_a_new_user_creates_locks_backs_up_damages_and_restores_a_store(walk: Walk, tmp_path: Path):
    path, kept = tmp_path / "ward" / "ward.luffmark", tmp_path / "preferences.toml"
    path.parent.mkdir()
    code = makes_a_store(walk, path)
    logs_a_patient(walk)
    is_locked_away(walk)
    comes_in_by_the_code(walk, code)
    backs_up(walk)
    walk.log("rr 31 spo2 88")
    changes_the_passphrase(walk)
    walk.start_again(kept)
    assert walk.window.windowTitle() == "Luffmark"
    finds_out_what_is_wrong(walk, path, code)
    restores(walk, path)
    checks(walk)
    assert load(kept).person == "AB"
    assert BED not in kept.read_text()


def finds_out_what_is_wrong(walk: Walk, path: Path, code: str) -> None:
    """A wrong passphrase, an altered key file and a damaged page are told apart; each leads on."""
    window, envelope, sound = walk.window, envelope_path(path), path.read_bytes()
    opens(walk, SECRET)
    asked = walk.dialog(OpenStoreDialog)
    walk.until(lambda: "passphrase is wrong" in walk.dialog(OpenStoreDialog).wrong.text())
    walk.picture("wrong-passphrase")
    walk.dialog(OpenStoreDialog).reject()
    del asked

    kept = envelope.read_text()
    envelope.write_text(kept.replace('"passes": 3', '"passes": 4', 1))
    opens(walk, None)
    assert "key file" in trouble(walk)
    assert "passphrase is not to blame" in trouble(walk)
    walk.picture("altered-key-file")
    walk.press(window.first.steps["key_file"])
    back = walk.dialog(KeyFileDialog)
    walk.write(back.secret_line, code)
    walk.write(back.initials, "ab")
    walk.picture("key-file-back")
    walk.press(back.go)
    walk.until(lambda: back.open_new.isVisible())
    walk.press(back.open_new)
    walk.until(lambda: window.keeping.lock.is_locked)  # it opened: people sign in
    walk.start_again(path.parent.parent / "preferences.toml")
    window = walk.window
    path.write_bytes(sound[:100] + bytes([sound[100] ^ 1]) + sound[101:])
    opens(walk, SECRET)  # the key file of the backup has the passphrase of that time
    assert "is damaged" in trouble(walk)
    assert "first page" in trouble(walk)
    walk.picture("damaged-first-page")
    assert list(window.first.steps) == ["restore", "salvage"]


def restores(walk: Walk, path: Path) -> None:
    """The newest backup is proposed; what the damaged store holds beyond it is listed; the new one opens."""
    window = walk.window
    walk.press(window.first.steps["restore"])
    dialog = walk.dialog(RestoreDialog)
    assert Path(dialog.source.text()).parent == path.parent / "backups"
    walk.press(dialog.go)
    assert "encrypted" in dialog.wrong.text()
    walk.write(dialog.secret_line, SECRET)
    walk.write(dialog.initials, "ab")
    walk.write(dialog.pin, NEW_PIN)
    walk.press(dialog.go)
    walk.until(lambda: "PIN of AB is wrong" in dialog.wrong.text())
    walk.until(dialog.go.isEnabled)
    walk.write(dialog.pin, PIN)
    walk.picture("restore")
    walk.press(dialog.go)
    walk.until(lambda: dialog.told.isVisible())
    told = dialog.told.toPlainText()
    assert "made and checked" in told
    assert f"{BED}: 2 logged" in told
    assert "Respiratory rate 31/min, AB" in told
    walk.picture("restored")
    walk.press(dialog.open_new)
    walk.until(lambda: window.keeping.lock.is_locked)
    page = window.keeping.lock.page
    walk.write(page.initials, "ab")
    walk.write(page.secret, PIN, enter=True)
    walk.until(lambda: not window.keeping.lock.is_locked and window.feed.is_ready)
    walk.rest()
    assert window.model.session.store_path.name == "ward-restored.luffmark"
    assert BED in walk.seen()
    walk.picture("restored-ward")


def checks(walk: Walk) -> None:
    walk.keys("Ctrl+Shift+V")
    walk.until(lambda: "The store is sound" in walk.window.strip.plain())
    walk.picture("checked")


def test_what_can_be_read_of_a_damaged_store_is_saved(walk: Walk, tmp_path: Path):
    path = tmp_path / "ward.luffmark"
    makes_a_store(walk, path)
    logs_a_patient(walk)
    walk.start_again(tmp_path / "preferences.toml")
    window = walk.window
    sound = path.read_bytes()
    page = len(sound) // PAGE_BYTES // 2 * PAGE_BYTES
    path.write_bytes(sound[:page] + bytes(PAGE_BYTES) + sound[page + PAGE_BYTES :])
    opens(walk, SECRET)
    walk.until(lambda: window.keeping.lock.is_locked or (window.first is not None and window.first.said.text()))
    walk.start_again(tmp_path / "preferences.toml")
    window = walk.window
    walk.keys("Ctrl+Shift+G")
    dialog = walk.dialog(SalvageDialog)
    walk.press(dialog.go)
    assert "encrypted" in dialog.wrong.text()
    walk.write(dialog.secret_line, SECRET)
    walk.write(dialog.initials, "ab")
    walk.press(dialog.go)
    walk.until(lambda: dialog.told.isVisible())
    if dialog.recovery_code:
        shown = walk.dialog(RecoveryCodeDialog)
        walk.press(shown.kept)
        walk.press(shown.go)
    assert "Saved:" in dialog.told.toPlainText()
    walk.picture("salvaged")
    walk.press(dialog.open_new)
    walk.until(lambda: window.model is not None and window.model.session.store_path.name == "ward-salvaged.luffmark")
    walk.until(lambda: window.keeping.lock.is_locked or window.feed.is_ready)
    assert PIN_COST.passes > 1
