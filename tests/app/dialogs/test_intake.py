"""Taking a file in from the window: clean, with a bad row, twice, not there."""

from app.dialogs.intake import IntakeDialog
from app.look.theme import LIGHT
from tests.support.open_window import settled, until

HEAD = "episode,at,channel,value,unit,by,note\n"


GOOD = "bed-9,2026-03-28T01:00:00+00:00,label,Bed 9,,AB,\nbed-9,2026-03-28T02:00:00+00:00,rr,24,/min,AB,\n"


BAD = "bed-9,2026-03-28T02:00:00+00:00,ipap,99,cmH2O,AB,\n"


DOUBT = "bed-9,2026-03-28T02:30:00+00:00,spo2,60,%,AB,\n"


def write(folder, text):
    path = folder / "night.csv"
    path.write_text(HEAD + text, "utf-8")
    return path


def test_a_clean_file_is_shown_and_then_taken(qtbot, window, tmp_path):
    head = window.model.session.head
    dialog = window.doers.file.take_in(write(tmp_path, GOOD + DOUBT))
    until(qtbot, lambda: dialog.intake is not None)
    assert "3 entries" in dialog.summary.text()
    assert "1 row is in doubt" in dialog.summary.text()
    assert window.model.session.head == head
    assert dialog.go.isEnabled()
    dialog.go.click()
    until(qtbot, lambda: "bed-9" in window.pages.ward.shown_keys())
    assert not dialog.isVisible()


def test_a_file_with_a_bad_row_is_refused_unless_it_is_left_out(qtbot, window, tmp_path):
    dialog = window.doers.file.take_in(write(tmp_path, GOOD + BAD))
    until(qtbot, lambda: dialog.intake is not None)
    assert not dialog.go.isEnabled()
    row = [dialog.table.item(0, c).text() for c in range(4)]
    assert row[0] == "4"
    assert "refused" in row[1]
    assert row[2].startswith("99")
    assert "IPAP" in row[3]
    dialog.leave_out.click()
    assert dialog.go.isEnabled()
    dialog.go.click()
    until(qtbot, lambda: "bed-9" in window.pages.ward.shown_keys())


def test_leaving_takes_nothing(qtbot, window, tmp_path):
    head = window.model.session.head
    dialog = window.doers.file.take_in(write(tmp_path, GOOD))
    dialog.reject()
    settled(qtbot, window)
    window.model.look_for_changes()
    settled(qtbot, window)
    assert window.model.session.head == head


def test_a_file_that_is_not_there_says_so(qtbot, window, tmp_path):
    dialog = IntakeDialog(window.model, tmp_path / "none.csv", window.reader, LIGHT, window)
    dialog.open()
    until(qtbot, lambda: bool(dialog.wrong.text()))
    assert "none.csv" in dialog.wrong.text()
    assert not dialog.go.isEnabled()
    dialog.reject()


def test_a_file_twice_is_nothing_new(qtbot, window, tmp_path):
    path = write(tmp_path, GOOD)
    first = window.doers.file.take_in(path)
    until(qtbot, lambda: first.intake is not None)
    first.go.click()
    until(qtbot, lambda: "bed-9" in window.pages.ward.shown_keys())
    second = window.doers.file.take_in(path)
    until(qtbot, lambda: second.intake is not None)
    assert "in the store already" in second.summary.text()
    assert not second.go.isEnabled()
    second.reject()
