"""What watches a random walk sees each kind of fault: planted here one by one."""

from pathlib import Path

import pytest
from PySide6.QtWidgets import QApplication, QDialog
from pytestqt.qtbot import QtBot

from app.operations import correction, due, entry
from app.operations.recording import Recorded
from storage.store import Store
from tests.support.open_window import NOW, make_store, open_window, settled
from tests.support.tampered import tamper
from tests.support.walk_watch import Watch


class Watched:
    """A window at rest and its watch."""

    def __init__(self, qtbot, window) -> None:  # type: ignore[no-untyped-def]
        self.window, self.said = window, []
        self.watch = Watch(self.said.append, lambda _path: None)
        self.watch.window = window
        window.select("bed-7")
        settled(qtbot, window)

    @property
    def wrong(self) -> str:
        self.watch.look()
        return "\n".join(self.watch.wrong)


@pytest.fixture
def watched(qtbot: QtBot, tmp_path: Path):  # type: ignore[no-untyped-def]
    with open_window(qtbot, make_store(tmp_path / "ward.luffmark")) as window:
        yield Watched(qtbot, window)


def test_a_window_at_rest_has_no_fault(watched: Watched) -> None:
    assert watched.wrong == ""
    assert watched.said == []


def test_another_patient_in_hand_than_the_strip_names(watched: Watched) -> None:
    watched.window.strip.whom.setText("Bed 3")
    assert "bed-7 is in hand, the strip names Bed 3" in watched.wrong


def test_another_patient_on_the_page_than_in_hand(qtbot: QtBot, watched: Watched) -> None:
    watched.window.open_episode("bed-7")
    settled(qtbot, watched.window)
    other = watched.window.model.session
    watched.window.model.blockSignals(True)
    watched.window.model.select("bed-3")
    watched.window.model.blockSignals(False)
    assert other.selection == "bed-7"
    assert "bed-3 is in hand, the episode shows bed-7" in watched.wrong
    assert "the strip is for bed-7" in watched.wrong


def test_a_modal_dialog_without_a_parent(watched: Watched) -> None:
    dialog = QDialog()
    dialog.open()
    assert "is modal and has no parent" in watched.wrong
    dialog.reject()


def test_a_dialog_of_a_store_that_is_gone(watched: Watched) -> None:
    watched.window.actions_by_key["gas_form"].trigger()
    form = watched.window.doers.log.form
    form.model, model = type(form.model)(form.model.session, form.model.runner), form.model
    assert "is of a store that is gone" in watched.wrong
    form.model.close()
    form.model = model
    form.reject()


def test_a_ward_that_lags_behind_its_store(watched: Watched) -> None:
    assert watched.watch.behind() == ""
    path = watched.window.model.session.store_path
    with Store.open(path) as store:
        entry.log_line(store, "ZZ", NOW, entry.LineRequest("bed-3", "rr 22", "UTC"))
    assert watched.watch.behind().startswith("what is shown of bed-3 is not what stands in the store")


def test_what_was_acknowledged_and_is_not_in_the_store(watched: Watched) -> None:
    path = watched.window.model.session.store_path
    watched.watch._acknowledged.append((path, Recorded("bed-7", ("no-such-entry",), ())))
    assert "acknowledged and not in the store" in watched.wrong


def test_a_line_for_another_than_shown_and_one_that_was_not_shown(watched: Watched) -> None:
    model = watched.window.model
    watched.watch._asked(model, entry.log_line, entry.LineRequest("bed-3", "rr 20", "UTC"))
    watched.watch._asked(model, entry.log_line, entry.LineRequest("bed-7", "rr 20", "UTC"))
    told = watched.wrong
    assert "log_line for bed-3 while 'Bed 7' is shown" in told
    assert "'rr 20' for bed-7 is recorded, shown was None" in told


def test_a_word_in_a_dialog_for_another_than_it_was_opened_for(watched: Watched) -> None:
    watched.window.actions_by_key["close_due"].trigger()
    watched.watch.note_dialogs()
    assert isinstance(QApplication.activeModalWidget(), QDialog)
    watched.watch._asked(watched.window.model, due.close, due.DueRequest("bed-3", "gas"))
    assert "close for bed-3 in CloseDueDialog opened for bed-7" in watched.wrong
    watched.window.doers.due.asking.reject()


def test_an_undo_of_what_nobody_was_told_of(watched: Watched) -> None:
    watched.watch._asked(watched.window.model, correction.undo, correction.UndoRequest("bed-3", ("x",)))
    assert "undo of bed-3 while" in watched.wrong


def test_a_store_that_is_not_sound(watched: Watched, tmp_path: Path) -> None:
    path = make_store(tmp_path / "other.luffmark")
    watched.watch.look_whole(path)
    assert watched.watch.wrong == []
    tamper(path, "UPDATE entry SET raw = '99' WHERE seq = 5")
    watched.watch.look_whole(path)
    assert "other.luffmark is not sound" in watched.wrong
