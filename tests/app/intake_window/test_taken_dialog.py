"""Files taken in: listed, and withdrawn by two presses."""

from app.intake_window.taken_dialog import TakenDialog
from tests.support.open_window import settled, until

LOG = "episode,at,channel,value,unit,by,note\nbed-7,2026-03-28T02:00:00+00:00,rr,24,/min,AB,\n"


def test_a_file_is_listed_and_withdrawn_by_two_presses(qtbot, window, tmp_path):
    path = tmp_path / "night.csv"
    path.write_text(LOG)
    taking = window.doers.file.take_in(path)
    until(qtbot, lambda: taking.intake is not None)
    head = window.model.session.head
    taking.go.click()
    until(qtbot, lambda: window.model.session.head > head)
    window.actions_by_key["taken"].trigger()
    dialog = next(d for d in window.findChildren(TakenDialog) if d.isVisible())
    until(qtbot, lambda: dialog.table.rowCount() == 1)
    assert dialog.table.item(0, 2).text() == "night.csv"
    assert not dialog.go.isEnabled()
    dialog.table.selectRow(0)
    head = window.model.session.head
    dialog.go.click()
    assert "1 entry and " in dialog.said.text()
    assert window.model.session.head == head, "the first press only says what would go"
    dialog.go.click()
    until(qtbot, lambda: window.model.session.head > head)
    until(qtbot, lambda: dialog.table.item(0, 5).text() == "withdrawn")
    assert "corrected since" not in dialog.said.text()
    dialog.table.selectRow(0)
    assert not dialog.go.isEnabled()
    dialog.close()


def test_an_episode_that_a_withdrawal_empties_leaves_the_ward_and_may_begin_again(qtbot, window, tmp_path):
    path = tmp_path / "wrong.csv"
    rows = "".join(f"bed-9,2026-03-28T02:{m:02d}:00+00:00,vte,4{m:02d},mL,device,\n" for m in range(30))
    path.write_text(LOG.split("\n", maxsplit=1)[0] + "\n" + rows)
    taking = window.doers.file.take_in(path)
    until(qtbot, lambda: taking.intake is not None)
    taking.go.click()
    until(qtbot, lambda: "bed-9" in window.pages.ward.shown_keys())  # samples of a machine alone stand on the ward
    window.select("bed-9")
    settled(qtbot, window)
    window.actions_by_key["taken"].trigger()
    dialog = next(d for d in window.findChildren(TakenDialog) if d.isVisible())
    until(qtbot, lambda: dialog.table.rowCount() == 1)
    dialog.table.selectRow(0)
    dialog.go.click()
    dialog.go.click()
    until(qtbot, lambda: "device samples withdrawn" in dialog.said.text())
    assert "Nothing stands any more of bed-9" in dialog.said.text()
    dialog.close()
    settled(qtbot, window)
    until(qtbot, lambda: "bed-9" not in window.pages.ward.shown_keys())
    assert window.model.session.selection != "bed-9", "no line is logged for what is not there"
