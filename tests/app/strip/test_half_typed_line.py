"""A line that is left half typed waits for its own patient, and is recorded for nobody unseen."""

from PySide6.QtCore import Qt

from tests.support.open_window import settled, type_line

Key, Mod = Qt.Key, Qt.KeyboardModifier


def test_a_half_typed_line_never_goes_to_another_patient(qtbot, window):
    window.strip.focus()
    type_line(qtbot, window, "22/6")
    window.select("bed-3")
    assert window.strip.whom.text() == "Bed 3"
    assert window.strip.line.text() == ""
    assert window.strip.state == "idle"


def test_a_half_typed_line_waits_for_its_own_patient(qtbot, window):
    window.strip.focus()
    type_line(qtbot, window, "22/6 3")
    window.select("bed-3")
    type_line(qtbot, window, "rr 2")
    window.select("bed-7")
    assert window.strip.line.text() == "22/6 3"
    assert window.strip.plain().startswith("This line was left here and is not recorded.")
    head = window.model.session.head
    window.strip.focus()
    qtbot.keyClick(window.strip.line, Key.Key_End)
    qtbot.keyClicks(window.strip.line, "5")
    settled(qtbot, window)
    assert "FiO2 35 %" in window.strip.plain()
    assert window.model.session.head == head
    qtbot.keyClick(window.strip.line, Key.Key_Escape)
    window.select("bed-3")
    assert window.strip.line.text() == "rr 2"
    window.select("bed-7")
    assert window.strip.line.text() == ""


def test_a_half_typed_line_waits_while_the_strip_is_closed(qtbot, window):
    window.strip.focus()
    type_line(qtbot, window, "22/6 3")
    window.strip.set_closed("Looking back")
    assert window.strip.line.text() == ""
    window.select("bed-3")
    window.strip.set_closed("")
    assert window.strip.line.text() == ""
    window.select("bed-7")
    assert window.strip.line.text() == "22/6 3"
    assert window.strip.state == "idle"


def test_a_line_that_comes_back_is_shown_before_it_is_recorded(qtbot, window):
    window.strip.focus()
    type_line(qtbot, window, "rr 24")
    window.select("bed-3")
    window.select("bed-7")
    head = window.model.session.head
    qtbot.keyClick(window.strip.line, Key.Key_Return)
    settled(qtbot, window)
    assert window.model.session.head == head
    assert "Respiratory rate 24/min" in window.strip.plain()
