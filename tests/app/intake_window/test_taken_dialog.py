"""Files taken in: listed, and withdrawn by two presses."""

import pytest

from app.intake_window.taken_dialog import TakenDialog
from tests.support.open_window import make_store, open_window, until

LOG = "episode,at,channel,value,unit,by,note\nbed-7,2026-03-28T02:00:00+00:00,rr,24,/min,AB,\n"


@pytest.fixture
def window(qtbot, tmp_path):
    with open_window(qtbot, make_store(tmp_path / "ward.luffmark")) as made:
        yield made


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
    assert "1 entries" in dialog.said.text()
    assert window.model.session.head == head, "the first press only says what would go"
    dialog.go.click()
    until(qtbot, lambda: window.model.session.head > head)
    until(qtbot, lambda: dialog.table.item(0, 5).text() == "withdrawn")
    dialog.table.selectRow(0)
    assert not dialog.go.isEnabled()
    dialog.close()
