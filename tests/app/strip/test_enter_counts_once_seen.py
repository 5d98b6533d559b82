"""Enter records only what stands in the preview; a press too early, repeated or doubled records nothing unseen."""

from math import nan

import pytest
from PySide6.QtCore import QEvent, Qt
from PySide6.QtGui import QKeyEvent
from PySide6.QtWidgets import QApplication

from app.operations import entry
from app.operations.outcome import Outcome
from core.record.log_line import read_line
from core.record.settings import Settings
from tests.support.open_window import make_store, open_window, settled, until

Key = Qt.Key
NOTHING = Settings(None, nan, nan, nan, nan, nan, nan, nan, None)


@pytest.fixture
def window(qtbot, tmp_path):
    with open_window(qtbot, make_store(tmp_path / "ward.luffmark")) as made:
        made.select("bed-7")
        settled(qtbot, made)
        made.strip.focus()
        yield made


def seconds_of(window):
    seconds = [100.0]
    window.strip.settle.clock = lambda: seconds[0]
    return seconds


def test_enter_before_the_preview_shows_it_and_waits_for_another(qtbot, window):
    seconds, head = seconds_of(window), window.model.session.head
    line = window.strip.line
    line.setText("20/6")
    line.textEdited.emit("20/6")  # in one go, so that no preview can come in between
    qtbot.keyClick(line, Key.Key_Return)
    settled(qtbot, window)
    assert "IPAP 20 cmH2O" in window.strip.plain()
    assert line.text() == "20/6"
    qtbot.keyClick(line, Key.Key_Return)  # at once: still the early press's double
    settled(qtbot, window)
    assert window.model.session.head == head
    seconds[0] += 0.8
    qtbot.keyClick(line, Key.Key_Return)
    until(qtbot, lambda: window.model.session.head > head)


def test_an_answer_after_escape_brings_no_preview_back(qtbot, window):
    line = window.strip.line
    line.setText("20/6")
    line.textEdited.emit("20/6")
    qtbot.keyClick(line, Key.Key_Escape)
    until(qtbot, lambda: not window.model.runner.is_busy)
    assert window.strip.state == "idle"
    read = read_line("20/6", now=window.model.session.now(), zone="UTC", in_force=NOTHING)
    window.strip._previewed(Outcome(entry.Preview("bed-7", "Bed 7", read, ()), 0))
    assert window.strip.state == "idle"
    assert "IPAP" not in window.strip.plain()
    head = window.model.session.head
    qtbot.keyClick(line, Key.Key_Return)
    settled(qtbot, window)
    assert window.model.session.head == head


def test_a_key_held_down_is_no_yes(qtbot, window):
    seconds, head = seconds_of(window), window.model.session.head
    qtbot.keyClicks(window.strip.line, "spo2 62")
    settled(qtbot, window)
    qtbot.keyClick(window.strip.line, Key.Key_Return)
    assert window.strip.state == "asking"
    seconds[0] += 5
    held = QKeyEvent(QEvent.Type.KeyPress, Key.Key_Return, Qt.KeyboardModifier.NoModifier, "\r", True)
    QApplication.sendEvent(window.strip.line, held)
    settled(qtbot, window)
    assert window.strip.state == "asking"
    assert window.model.session.head == head


def test_a_pressure_without_a_unit_takes_the_wards(qtbot, window):
    window.strip.set_patient(window.strip._record, "Bed 7", "Europe/London", "kPa")
    qtbot.keyClicks(window.strip.line, "ph 7.30 paco2 8.1")
    settled(qtbot, window)
    assert "PaCO2 8.1 kPa (61 mmHg)" in window.strip.plain()


def typed_in_one_go(strip, text):
    strip.line.setText(text)
    strip.line.textEdited.emit(text)


def test_what_was_recorded_never_stands_over_a_line_that_is_not(qtbot, window):
    strip = window.strip
    qtbot.keyClicks(strip.line, "rr 28")
    settled(qtbot, window)
    qtbot.keyClick(strip.line, Key.Key_Return)
    until(qtbot, lambda: "Recorded for Bed 7" in strip.plain())
    typed_in_one_go(strip, "spo2 91")
    assert "Recorded" not in strip.plain()
    assert strip.plain().startswith("Reading")
    qtbot.keyClick(strip.line, Key.Key_Return)
    assert strip.plain().startswith("Not recorded yet.")
    settled(qtbot, window)
    assert "SpO2 91" in strip.plain()
    assert "Enter records." in strip.plain()
    assert strip.line.text() == "spo2 91"


def test_an_entry_that_comes_home_while_the_next_is_typed_leaves_the_preview_of_the_next(qtbot, window):
    strip = window.strip
    qtbot.keyClicks(strip.line, "rr 28")
    settled(qtbot, window)
    qtbot.keyClick(strip.line, Key.Key_Return)
    typed_in_one_go(strip, "spo2 91")  # before the first is told as recorded
    settled(qtbot, window)
    until(qtbot, lambda: "The entry before is recorded." in strip.plain())
    assert strip.plain().startswith("Bed 7")
    assert "SpO2 91" in strip.plain()
    assert strip.can_undo


def test_a_preview_of_another_text_does_not_stay_up_while_the_store_is_busy(qtbot, window, monkeypatch):
    strip = window.strip
    qtbot.keyClicks(strip.line, "spo2 91")
    settled(qtbot, window)
    assert "SpO2 91" in strip.plain()
    monkeypatch.setattr(strip._model, "ask", lambda *_args, **_more: 0)  # the answer does not come
    typed_in_one_go(strip, "rr 44")
    until(qtbot, lambda: strip.plain().startswith("Reading"))
    assert "SpO2" not in strip.plain()
