"""The first page shows the cautions before anything can be opened, and leads on."""

from PySide6.QtWidgets import QLabel

from app.keeping.preferences import Preferences, load
from app.look.theme import LIGHT
from app.telling.cautions import cautions
from app.window.first_page import FirstPage
from app.window.main import MainWindow


def test_nothing_opens_before_the_cautions_are_read(qtbot):
    page = FirstPage(LIGHT, ("/a/ward.luffmark",), False)
    qtbot.addWidget(page)
    shown = [label.text() for label in page.findChildren(QLabel)]
    assert all(c in shown for c in cautions())
    assert not page.sample.isEnabled()
    assert not page.recent[0].isEnabled()
    with qtbot.waitSignal(page.cautions_read):
        page.read.click()
    assert page.sample.isEnabled()
    with qtbot.waitSignal(page.recent_wanted) as asked:
        page.recent[0].click()
    assert asked.args == ["/a/ward.luffmark"]


def test_that_they_were_read_is_kept(qtbot, tmp_path):
    path = tmp_path / "preferences.toml"
    window = MainWindow(Preferences(), path)
    qtbot.addWidget(window)
    window.show()
    window.first.read.click()
    assert load(path).cautions_seen
    assert not window.actions_by_key["take_in"].isEnabled()
    assert window.actions_by_key["sample_shift"].isEnabled()
    window.close()
    assert len(load(path).window) == 4


def test_the_sample_shift_opens_from_it_and_its_store_goes_with_it(qtbot):
    window = MainWindow(Preferences(cautions_seen=True))
    qtbot.addWidget(window)
    window.show()
    window.first.sample.click()
    folder = window.model.session.store_path.parent
    qtbot.waitUntil(lambda: window.feed.is_ready and not window.model.runner.is_busy, timeout=60_000)
    assert len(window.pages.ward.shown_keys()) >= 9
    assert window.model.session.is_demo
    assert "Pretended" in window.top.moment.text()
    assert window.windowTitle() == "Sample shift: invented, nothing is kept - Luffmark"
    window.close()
    assert not folder.exists()
