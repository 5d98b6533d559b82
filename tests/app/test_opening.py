"""Opening stores: one that cannot be opened leads back in words; an encrypted one asks; nobody logs namelessly."""

import pytest
from PySide6.QtCore import Qt

from app.dialogs.passphrase import OpenStoreDialog
from app.keeping.preferences import Preferences
from app.window.main import MainWindow
from storage.keys import envelope_path
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


def asked(qtbot, window, said=""):
    """The dialog that asks for the passphrase, once it stands there and says what it should."""

    def found():
        return [d for d in window.findChildren(OpenStoreDialog) if d.isVisible() and said in d.wrong.text()]

    until(qtbot, lambda: bool(found()))
    return found()[-1]


def test_an_encrypted_store_asks_until_the_passphrase_is_right(qtbot, window, tmp_path):
    path = tmp_path / "secret.luffmark"
    Store.create(path, passphrase=SECRET, now=NOW, by="AB").close()
    window.doers.file.open_path(path)
    first = asked(qtbot, window)
    assert first.wrong.text() == ""
    qtbot.keyClicks(first._typed, "wrong wrong wrong")
    first.go.click()
    second = asked(qtbot, window, "passphrase is wrong")
    qtbot.keyClicks(second._typed, SECRET)
    qtbot.keyClick(second._typed, Qt.Key.Key_Return)
    until(qtbot, lambda: window.feed is not None and window.feed.is_ready)


def test_at_three_in_the_morning_the_recovery_code_opens_it(qtbot, window, tmp_path):
    path = tmp_path / "secret.luffmark"
    with Store.create(path, passphrase=SECRET, now=NOW, by="AB") as made:
        code = made.recovery_code
    window.doers.file.open_path(path)
    dialog = asked(qtbot, window)
    qtbot.keyClicks(dialog._typed, code.lower().replace("-", " "))
    dialog.go.click()
    until(qtbot, lambda: window.feed is not None and window.feed.is_ready)


def test_an_altered_key_file_and_a_damaged_page_are_told_from_a_wrong_passphrase(qtbot, window, tmp_path):
    path = tmp_path / "secret.luffmark"
    Store.create(path, passphrase=SECRET, now=NOW, by="AB").close()
    envelope, sound = envelope_path(path), path.read_bytes()
    kept = envelope.read_text()
    envelope.write_text(kept.replace('"passes": 3', '"passes": 4', 1))
    window.doers.file.open_path(path)
    until(qtbot, lambda: window.first is not None and "key file" in window.first.said.text())
    envelope.write_text(kept)
    path.write_bytes(sound[:5000] + bytes([sound[5000] ^ 1]) + sound[5001:])
    window.doers.file.open_path(path, passphrase=SECRET)
    until(qtbot, lambda: window.first is not None and "damaged" in window.first.said.text())
    assert "newest backup" in window.first.said.text()


def test_leaving_the_passphrase_leads_back(qtbot, window, tmp_path):
    path = tmp_path / "secret.luffmark"
    Store.create(path, passphrase=SECRET, now=NOW, by="AB").close()
    window.doers.file.open_path(path)
    asked(qtbot, window).reject()
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
