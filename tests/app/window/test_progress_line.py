"""Long work shows itself after a while, can be stopped, and never moves what is being read."""

from PySide6.QtWidgets import QWidget

from app.session.runner import Progress
from app.window import progress_line
from app.window.progress_line import ProgressLine


def shown(qtbot, monkeypatch):
    monkeypatch.setattr(progress_line, "AFTER_MS", 10)
    parent = QWidget()
    parent.resize(800, 600)
    qtbot.addWidget(parent)
    over = QWidget(parent)
    over.setGeometry(0, 50, 800, 400)
    line = ProgressLine(parent)
    line.stand_over(over)
    parent.show()
    return parent, over, line


def test_short_work_shows_nothing(qtbot, monkeypatch):
    parent, _, line = shown(qtbot, monkeypatch)
    line.busy_changed(True)
    line.busy_changed(False)
    qtbot.wait(30)
    assert parent.isVisible()
    assert not line.isVisible()


def test_long_work_is_shown_stopped_and_gone(qtbot, monkeypatch):
    parent, over, line = shown(qtbot, monkeypatch)
    line.busy_changed(True)
    qtbot.waitUntil(line.isVisible)
    assert not line.stop.isEnabled()
    line.show_progress(Progress(7, "ward figures", 3, 10))
    assert (line.bar.value(), line.bar.maximum()) == (3, 10)
    assert "ward's figures" in line.word.text()
    assert line.word.width() >= line.word.sizeHint().width(), "its words are whole though they came later"
    with qtbot.waitSignal(line.cancelled) as asked:
        line.stop.click()
    assert asked.args == [7]
    assert over.geometry().contains(line.geometry())
    over.resize(500, 300)
    line.place()
    assert over.geometry().contains(line.geometry())
    line.busy_changed(False)
    assert not line.isVisible()
    assert parent.isVisible()
