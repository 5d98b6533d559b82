"""A line that could not be written is not lost: it comes back for its patient, and is shown anew before it counts."""

import errno

import pytest
from PySide6.QtCore import Qt

from app.operations import entry
from tests.support.open_window import settled, until

Key = Qt.Key


@pytest.fixture
def full_disk(monkeypatch):
    def fails(*_args):
        raise OSError(errno.ENOSPC, "No space left on device", "ward.luffmark")

    monkeypatch.setattr(entry, "append", fails)
    return monkeypatch


def send(qtbot, window, text):
    window.strip.focus()
    qtbot.keyClicks(window.strip.line, text)
    settled(qtbot, window)
    qtbot.keyClick(window.strip.line, Key.Key_Return)


def test_it_stands_on_the_line_again_and_enter_shows_it_before_it_counts(qtbot, window, full_disk):
    window.select("bed-7")
    head = window.model.session.head
    send(qtbot, window, "22/6 35")
    until(qtbot, lambda: window.strip.state == "refused")
    assert window.strip.line.text() == "22/6 35"
    said = window.strip.plain()
    assert "Not recorded for Bed 7: 22/6 35." in said
    assert "full" in said
    full_disk.undo()
    qtbot.keyClick(window.strip.line, Key.Key_Return)
    settled(qtbot, window)
    assert window.strip.state == "ready"
    assert window.model.session.head == head
    qtbot.keyClick(window.strip.line, Key.Key_Return)
    until(qtbot, lambda: "Recorded for Bed 7" in window.strip.plain())
    assert window.strip.line.text() == ""


def test_it_waits_for_its_own_patient_and_leaves_a_newer_line_alone(qtbot, window, full_disk):
    window.select("bed-7")
    send(qtbot, window, "22/6 35")
    window.select("bed-3")
    qtbot.keyClicks(window.strip.line, "rr 2")
    until(qtbot, lambda: window.strip.state != "awaited" and not window.model.runner.is_busy)
    assert window.strip.line.text() == "rr 2"
    qtbot.keyClick(window.strip.line, Key.Key_Escape)
    window.select("bed-7")
    assert window.strip.line.text() == "22/6 35"


def test_an_undo_that_fails_can_be_tried_again(qtbot, window, monkeypatch):
    from app.operations import correction

    window.select("bed-7")
    send(qtbot, window, "22/6 35")
    until(qtbot, lambda: window.strip.can_undo)

    def fails(*_args):
        raise OSError(errno.ENOSPC, "No space left on device", "ward.luffmark")

    monkeypatch.setattr(correction, "append", fails)
    window.strip.undo()
    until(qtbot, lambda: "Not undone" in window.strip.plain())
    assert window.strip.can_undo
    monkeypatch.undo()
    window.strip.undo()
    until(qtbot, lambda: "Undone" in window.strip.plain())
    assert not window.strip.can_undo
