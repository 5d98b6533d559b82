"""What is typed on the line: asked about, refused, completed, taken back."""

from PySide6.QtCore import Qt

from tests.support.open_window import settled, type_line, until

Key, Mod = Qt.Key, Qt.KeyboardModifier


def test_an_unusual_value_asks_and_only_a_second_enter_says_yes(qtbot, window):
    head = window.model.session.head
    seconds = [100.0]
    window.strip.settle.clock = lambda: seconds[0]
    window.strip.focus()
    type_line(qtbot, window, "spo2 62")
    assert "62 %" in window.strip.plain()
    qtbot.keyClick(window.strip.line, Key.Key_Return)
    assert window.strip.state == "asking"
    assert window.model.session.head == head
    seconds[0] += 0.69  # the second half of a double press
    qtbot.keyClick(window.strip.line, Key.Key_Return)
    assert window.strip.state == "asking"
    seconds[0] += 0.02
    qtbot.keyClick(window.strip.line, Key.Key_Return)
    until(qtbot, lambda: window.feed.answers["bed-7"].record.number("spo2").v[-1] == 62)
    assert not window.feed.answers["bed-7"].record.number("spo2").doubt[-1]


def test_a_line_that_cannot_be_read_is_refused_in_words(qtbot, window):
    head = window.model.session.head
    window.strip.focus()
    type_line(qtbot, window, "ipap 99")
    assert "Not recorded" in window.strip.plain()
    qtbot.keyClick(window.strip.line, Key.Key_Return)
    settled(qtbot, window)
    assert window.model.session.head == head


def test_tab_completes(qtbot, window):
    window.strip.focus()
    type_line(qtbot, window, "ipa")
    assert "ipap" in window.strip.plain()
    qtbot.keyClick(window.strip.line, Key.Key_Tab)
    assert window.strip.line.text() == "ipap "
    assert window.strip.line.hasFocus()
    settled(qtbot, window)


def test_an_undo_that_is_said_is_left_by_escape_and_by_another_patient(qtbot, window):
    window.strip.focus()
    type_line(qtbot, window, "22/6")
    qtbot.keyClick(window.strip.line, Key.Key_Return)
    until(qtbot, lambda: window.strip.can_undo)
    window.select("bed-3")
    window.actions_by_key["undo"].trigger()
    assert "Bed 7 is not the patient in hand." in window.strip.plain()
    qtbot.keyClick(window.strip.line, Key.Key_Escape)
    assert window.strip.state == "idle"
    window.actions_by_key["undo"].trigger()
    window.select("bed-7")
    assert window.strip.state == "idle"
    settled(qtbot, window)
    assert window.strip.can_undo


def test_the_key_to_the_line_is_no_part_of_it_and_a_word_after_a_question_is_one_of_its_own(qtbot, window):
    window.strip.focus()
    type_line(qtbot, window, "/rr28")
    assert window.strip.line.text() == "rr28"
    assert "Respiratory rate 28/min" in window.strip.plain()
    window.strip.focus()  # all is chosen: the key replaces nothing
    qtbot.keyClick(window.strip.line, Key.Key_Slash)
    assert window.strip.line.text() == "rr28"
    window.strip.leave()
    window.strip.focus()
    type_line(qtbot, window, "rr 55 mask off")
    qtbot.keyClick(window.strip.line, Key.Key_Return)
    assert window.strip.state == "asking"
    qtbot.keyClicks(window.strip.line, "hr 90")
    settled(qtbot, window)
    assert window.strip.line.text() == "rr 55 mask off hr 90"
    assert "Heart rate 90/min" in window.strip.plain()
