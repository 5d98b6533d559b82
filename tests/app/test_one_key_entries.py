"""Entries in seconds: at most four keys beside the digits, one key for what is said most often."""

import pytest
from PySide6.QtCore import Qt

from tests.support.open_window import settled, until

Key = Qt.Key


class Hand:
    """Presses keys and counts them, digits apart."""

    def __init__(self, qtbot):
        self._qtbot, self.digits, self.others = qtbot, 0, 0

    def press(self, widget, key):
        self._qtbot.keyClick(widget, key)
        self.others += 1

    def type(self, widget, text):
        for letter in text:
            self._qtbot.keyClicks(widget, letter)
            self.digits += letter.isdigit()
            self.others += not letter.isdigit()


@pytest.mark.parametrize(
    ("keys", "digits", "channel", "value"),
    [("22/6", 3, "ipap", 22.0), ("22/6 35", 5, "fio2", 0.35), ("16 6", 3, "epap", 6.0)],
)
def test_a_settings_change_takes_at_most_four_keys_beside_its_digits(qtbot, window, keys, digits, channel, value):
    window.select("bed-7")
    settled(qtbot, window)
    hand, line = Hand(qtbot), window.strip.line
    hand.press(window.pages.ward.lanes, Key.Key_Slash)
    hand.type(line, keys)
    settled(qtbot, window)  # Enter counts once the preview is shown
    hand.press(line, Key.Key_Return)
    until(qtbot, lambda: window.feed.answers["bed-7"].record.number(channel).v[-1] == value)
    assert hand.digits == digits
    assert hand.others <= 4


def told(window):
    return window.feed.answers["bed-7"].record.text("told")


def test_told_asks_whom_and_keeps_the_answer(qtbot, window):
    head = window.model.session.head
    qtbot.keyClick(window.pages.ward.lanes, Key.Key_F9)
    settled(qtbot, window)
    assert window.strip.line.hasFocus()
    assert "Told whom?" in window.strip.plain()
    qtbot.keyClick(window.strip.line, Key.Key_Return)
    settled(qtbot, window)
    assert window.model.session.head == head  # a bare "told" would say nothing to the next shift
    qtbot.keyClicks(window.strip.line, "registrar: comes now")
    settled(qtbot, window)
    assert "Told: registrar: comes now" in window.strip.plain()
    qtbot.keyClick(window.strip.line, Key.Key_Return)
    until(qtbot, lambda: len(told(window)) == 1)
    assert told(window).v[-1] == "registrar: comes now"


def test_told_names_the_responsible_clinician(qtbot, window):
    window.strip.focus()
    qtbot.keyClicks(window.strip.line, "contact Dr Okafor")
    settled(qtbot, window)
    qtbot.keyClick(window.strip.line, Key.Key_Return)
    until(qtbot, lambda: window.feed.answers["bed-7"].record.latest_text("contact") == "Dr Okafor")
    qtbot.keyClick(window.pages.ward.lanes, Key.Key_F9)
    settled(qtbot, window)
    assert window.strip.line.text() == "told Dr Okafor: "
    qtbot.keyClicks(window.strip.line, "in 10 minutes")
    settled(qtbot, window)
    qtbot.keyClick(window.strip.line, Key.Key_Return)
    until(qtbot, lambda: len(told(window)) == 1)
    assert told(window).v[-1] == "Dr Okafor: in 10 minutes"
