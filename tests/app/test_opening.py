"""Opening stores: one that cannot be opened leads back in words; an encrypted one asks; nobody logs namelessly."""

import pytest
from PySide6.QtCore import Qt
from PySide6.QtWidgets import QInputDialog

from app.preferences import Preferences
from app.window import MainWindow
from storage.store import Store
from tests.support.open_window import NOW, make_store, open_window, settled, until

SECRET = "a long passphrase of five words"


@pytest.fixture
def window(qtbot):
    made = MainWindow(Preferences(cautions_seen=True))
    qtbot.addWidget(made)
    made.show()
    yield made
    made.close()


def test_a_file_that_is_no_store_leads_back_to_the_first_page(qtbot, window, tmp_path):
    path = tmp_path / "letter.luffmark"
    path.write_text("dear ward" * 500)
    window.doers.file.open_path(path)
    until(qtbot, lambda: window.first is not None and bool(window.first.said.text()))
    assert "letter.luffmark" in window.first.said.text()
    assert window.model is None
    assert window.first.sample.isEnabled()


def test_a_store_that_is_gone_says_so(qtbot, window, tmp_path):
    window.doers.file.open_path(tmp_path / "gone.luffmark")
    until(qtbot, lambda: window.first is not None and "gone.luffmark" in window.first.said.text())


def test_an_encrypted_store_asks_until_the_passphrase_is_right(qtbot, window, tmp_path, monkeypatch):
    path = tmp_path / "secret.luffmark"
    Store.create(path, passphrase=SECRET, now=NOW, by="AB").close()
    answers = iter([("wrong wrong wrong wrong", True), (SECRET, True)])
    monkeypatch.setattr(QInputDialog, "getText", lambda *_, **__: next(answers))
    window.doers.file.open_path(path)
    until(qtbot, lambda: window.feed is not None and window.feed.is_ready)
    assert next(answers, None) is None


def test_leaving_the_passphrase_leads_back(qtbot, window, tmp_path, monkeypatch):
    path = tmp_path / "secret.luffmark"
    Store.create(path, passphrase=SECRET, now=NOW, by="AB").close()
    monkeypatch.setattr(QInputDialog, "getText", lambda *_, **__: ("", False))
    window.doers.file.open_path(path)
    until(qtbot, lambda: window.first is not None and window.model is None)


def test_nobody_logs_namelessly(qtbot, tmp_path):
    with open_window(qtbot, make_store(tmp_path / "ward.luffmark")) as window:
        window.model.set_person("")
        head = window.model.session.head
        window.strip.set_text("rr 24")
        settled(qtbot, window)
        qtbot.keyClick(window.strip.line, Qt.Key.Key_Return)
        settled(qtbot, window)
        assert "Nobody is signed in" in window.strip.plain()
        assert window.strip.line.text() == "rr 24"
        window.doers.file.become("CD")
        qtbot.keyClick(window.strip.line, Qt.Key.Key_Return)
        until(qtbot, lambda: window.model.session.head > head)
        until(qtbot, lambda: "CD" in {s.entry.by for s in window.feed.answers["bed-7"].record.standing})
