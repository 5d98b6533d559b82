"""A store is made with a passphrase, or without one on purpose; its recovery code is shown once."""

import pytest
from pypdf import PdfReader
from PySide6.QtCore import Qt
from PySide6.QtGui import QGuiApplication
from PySide6.QtPrintSupport import QPrinter
from PySide6.QtWidgets import QLineEdit

from app.keeping.preferences import Preferences
from app.window.main import MainWindow
from storage.store import Store
from storage.store_file import is_encrypted
from tests.support.open_window import NOW, settled, until

SECRET = "seven quiet boats at night"


@pytest.fixture
def window(qtbot):
    made = MainWindow(Preferences(cautions_seen=True, person="AB"))
    qtbot.addWidget(made)
    made.show()
    yield made
    made.close()


def ready(window):
    return window.feed is not None and window.feed.is_ready


def test_a_passphrase_is_asked_for_twice_and_must_be_long(qtbot, window, tmp_path):
    dialog = window.doers.file.make_store(tmp_path / "ward.luffmark")
    assert not dialog.without.isChecked()
    dialog.go.click()
    assert "8 or more" in dialog.wrong.text()
    dialog._new.setText(SECRET)
    dialog.go.click()
    assert "not the same" in dialog.wrong.text()
    assert dialog._new.echoMode() is QLineEdit.EchoMode.Password
    dialog.show_typed.setChecked(True)
    assert dialog._new.echoMode() is QLineEdit.EchoMode.Normal
    assert not (tmp_path / "ward.luffmark").exists()
    dialog.reject()
    assert not (tmp_path / "ward.luffmark").exists()
    assert window.first is not None


def test_the_recovery_code_is_shown_once_and_must_be_kept(qtbot, window, tmp_path):
    path = tmp_path / "ward.luffmark"
    dialog = window.doers.file.make_store(path)
    for line in (dialog._new, dialog._again):
        qtbot.keyClicks(line, SECRET)
    dialog.go.click()
    until(qtbot, lambda: ready(window) and window.doers.codes.dialog is not None)
    assert is_encrypted(path)
    assert "not encrypted" not in window.windowTitle()
    shown = window.doers.codes.dialog
    code = shown.code.text()
    assert len(code.replace("-", "")) == 32
    assert not shown.go.isEnabled()
    qtbot.keyClick(shown, Qt.Key.Key_Escape)
    assert shown.isVisible()
    assert "cannot be shown again" in shown.wrong.text()
    shown.copy.click()
    assert QGuiApplication.clipboard().text() == code
    printer = QPrinter()
    printer.setOutputFormat(QPrinter.OutputFormat.PdfFormat)
    printer.setOutputFileName(str(tmp_path / "code.pdf"))
    shown.page().print_(printer)
    assert code in PdfReader(tmp_path / "code.pdf").pages[0].extract_text().replace("\n", "")
    shown.kept.setChecked(True)
    shown.go.click()
    settled(qtbot, window)
    assert window.doers.codes.dialog is None
    window.close_model()
    Store.open(path, passphrase=code).close()
    with Store.open(path, passphrase=SECRET) as again:
        assert again.recovery_code is None


def test_going_without_is_a_choice_of_its_own_and_stays_visible(qtbot, window, tmp_path):
    path = tmp_path / "ward.luffmark"
    dialog = window.doers.file.make_store(path)
    dialog.without.setChecked(True)
    assert "not be encrypted" in dialog.wrong.text()
    dialog.go.click()
    until(qtbot, lambda: ready(window))
    assert not is_encrypted(path)
    assert "(not encrypted)" in window.windowTitle()
    window.doers.store.do_change_passphrase()
    assert "no passphrase to change" in window.strip.plain()


def test_the_passphrase_is_changed_from_the_window(qtbot, window, tmp_path):
    path = tmp_path / "ward.luffmark"
    Store.create(path, passphrase=SECRET, now=NOW).close()
    window.doers.file.open_path(path, passphrase=SECRET)
    until(qtbot, lambda: ready(window))
    window.actions_by_key["change_passphrase"].trigger()
    dialog = window.doers.store._changing
    dialog._old.setText("something else")
    for line in (dialog._new, dialog._again):
        line.setText("nine other boats")
    dialog.new_code.setChecked(True)
    dialog.go.click()
    until(qtbot, lambda: "passphrase is wrong" in dialog.wrong.text())
    dialog._old.setText(SECRET)
    dialog.go.click()
    until(qtbot, lambda: window.doers.codes.dialog is not None)
    code = window.doers.codes.dialog.code.text()
    window.doers.codes.dialog.kept.setChecked(True)
    window.doers.codes.dialog.accept()
    window.close_model()
    for secret in ("nine other boats", code):
        Store.open(path, passphrase=secret).close()
    with Store.open(path, passphrase=code) as store:
        assert not store.opens_with(SECRET)
        assert store.verify() == ()
