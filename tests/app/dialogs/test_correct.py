"""What was logged is corrected, withdrawn and moved from the window, and that is undone."""

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QComboBox

from app.dialogs.correct import Act, CorrectDialog, Of
from app.operations import entry
from core.record.instant import parse
from storage.store import Store
from tests.support.open_window import NOW, dialog_of, settled, until


def open_correct(qtbot, window):
    window.select("bed-7")
    window.actions_by_key["correct"].trigger()
    return dialog_of(window, CorrectDialog)


def choose(dialog, channel, value):
    for n in range(dialog.list.topLevelItemCount()):
        item = dialog.list.topLevelItem(n)
        if item.text(1) == channel and item.text(2).startswith(value):
            dialog.list.setCurrentItem(item)
            return
    raise AssertionError(f"{channel} {value} is not in the list")


def ph_of(window, at=-1):
    return float(window.feed.answers["bed-7"].record.number("ph").v[at])


def test_a_value_is_corrected_with_a_reason_shown_so_and_undone(qtbot, window):
    dialog = open_correct(qtbot, window)
    choose(dialog, "pH", "7.24")
    dialog.value.setText("7.34")
    dialog.go.click()
    assert "reason" in dialog.wrong.text()
    dialog.reason.setText("read wrong")
    dialog.go.click()
    until(qtbot, lambda: ph_of(window) == 7.34)
    assert not dialog.isVisible()
    lane = next(x for x in window.pages.ward.lanes.spec.lanes if x.key == "bed-7")
    assert any("corrected" in i.sentence for i in lane.items)
    window.actions_by_key["undo"].trigger()
    until(qtbot, lambda: ph_of(window) == 7.24)


def test_the_right_time_is_on_the_night_of_the_entry_and_a_gas_is_held_against_itself(qtbot, window):
    dialog = open_correct(qtbot, window)
    choose(dialog, "PaCO2", "71")
    dialog.reason.setText("read wrong")
    dialog.time.setText("25:00")
    dialog.go.click()
    assert "25:00" in dialog.wrong.text()
    dialog.time.setText("03:06")
    dialog.value.setText("12 mmHg")  # hardly possible: a figure in kPa
    dialog.go.click()
    until(qtbot, lambda: "kPa" in dialog.wrong.text())
    assert "'Record it' again says yes" in dialog.wrong.text()
    dialog.value.setText("69 mmHg")
    assert dialog.wrong.text() == ""  # the yes was for what stood there
    dialog.go.click()
    until(qtbot, lambda: window.feed.answers["bed-7"].record.latest("paco2") == 69)
    corrected = [s.entry for s in window.feed.answers["bed-7"].record.standing if s.corrected]
    assert {e.at for e in corrected} == {NOW - 144 * 60_000_000}  # the time is that of the whole gas
    assert {"ph", "paco2", "pao2"} <= {e.channel for e in corrected}
    assert [e.channel for e in corrected if e.number == 69] == ["paco2"]


def test_a_value_is_withdrawn(qtbot, window):
    dialog = open_correct(qtbot, window)
    choose(dialog, "pH", "7.24")
    dialog.act.setCurrentIndex(dialog.act.findData(Act.WITHDRAW))
    assert not dialog.value.isEnabled()
    dialog.reason.setText("another patient's")
    dialog.go.click()
    until(qtbot, lambda: ph_of(window) == 7.27)


def test_the_dialog_names_its_patient_in_large_and_no_other_until_a_move(qtbot, window):
    dialog = open_correct(qtbot, window)
    assert dialog.whom.text() == "Bed 7"
    assert dialog.whom.isVisible()
    assert dialog.whom.property("role") == "title"
    shown = [w.currentText() for w in dialog.findChildren(QComboBox) if w.isVisible()]
    assert "Bed 3" not in shown
    assert not dialog.to.isVisible()
    dialog.act.setCurrentIndex(dialog.act.findData(Act.MOVE))
    assert dialog.to.isVisible()
    assert dialog.to.currentText() == ""
    dialog.reject()


def test_a_value_moves_to_the_right_patient_who_is_asked_for_before_the_reason(qtbot, window):
    dialog = open_correct(qtbot, window)
    seconds = [100.0]
    dialog.settle.clock = lambda: seconds[0]
    choose(dialog, "Respiratory rate", "27")
    assert not dialog.of.isVisible()
    dialog.act.setCurrentIndex(dialog.act.findData(Act.MOVE))
    assert dialog.to.currentIndex() == -1
    dialog.go.click()
    assert dialog.wrong.text() == "Choose the right patient."
    dialog.to.setCurrentIndex(dialog.to.findData("bed-3"))
    dialog.go.click()
    assert "reason" in dialog.wrong.text()
    dialog.reason.setText("wrong bed")
    dialog.go.click()
    until(qtbot, lambda: "is logged for this minute already" in dialog.wrong.text())  # bed 3 has a rate of its own
    seconds[0] += 1
    dialog.go.click()
    until(qtbot, lambda: len(window.feed.answers["bed-3"].record.number("rr")) == 2)


def test_a_gas_moves_whole_says_to_whom_and_one_undo_brings_it_back(qtbot, window):
    dialog = open_correct(qtbot, window)
    choose(dialog, "PaCO2", "71")
    assert dialog.of.isVisible()
    assert dialog.of.currentData() == Of.WHOLE
    assert "pH" in dialog.of.currentText()
    dialog.act.setCurrentIndex(dialog.act.findData(Act.MOVE))
    dialog.to.setCurrentIndex(dialog.to.findData("bed-3"))
    dialog.reason.setText("wrong bed")
    seconds = [100.0]
    dialog.settle.clock = lambda: seconds[0]
    gases = gas_count(window, "bed-7"), gas_count(window, "bed-3")
    dialog.go.click()
    settled(qtbot, window)
    if dialog.isVisible():  # what bed 3 makes of it is asked
        seconds[0] += 1
        dialog.go.click()
    until(qtbot, lambda: (gas_count(window, "bed-7"), gas_count(window, "bed-3")) == (gases[0] - 1, gases[1] + 1))
    told = window.strip.plain()
    assert told.startswith("Moved from Bed 7 to Bed 3: ")
    assert "pH 7.24" in told
    assert "PaCO2 71 mmHg" in told
    window.strip.settle.clock = lambda: seconds[0]
    window.actions_by_key["undo"].trigger()  # it went to a bed that is not in hand: asked first
    assert window.strip.plain().startswith("Undo for Bed 3: the move to this patient of ")
    assert "Bed 3 is not the patient in hand." in window.strip.plain()
    seconds[0] += 1
    window.actions_by_key["undo"].trigger()
    until(qtbot, lambda: (gas_count(window, "bed-7"), gas_count(window, "bed-3")) == gases)


def gas_count(window, key):
    return len(window.feed.answers[key].record.gases)


def test_a_gas_to_which_another_program_has_added_meanwhile_is_told_of_whole(qtbot, window):
    """The dialog does not know the new value, which goes with its gas all the same."""
    dialog = open_correct(qtbot, window)
    choose(dialog, "pH", "7.24")
    with Store.open(window.model.session.store_path) as store:
        entry.log_line(store, "ZZ", NOW, entry.LineRequest("bed-7", "03:05 gas_fio2 35%", "Europe/London", True))
    dialog.act.setCurrentIndex(dialog.act.findData(Act.WITHDRAW))
    dialog.reason.setText("another patient's")
    dialog.go.click()
    until(qtbot, lambda: not dialog.isVisible())
    assert window.strip.plain().startswith("Withdrawn for Bed 7: pH 7.24")
    assert "FiO2" in window.strip.plain()
    assert window.strip.can_undo


def test_nobody_leaves_while_it_is_being_recorded(qtbot, window):
    dialog = open_correct(qtbot, window)
    choose(dialog, "pH", "7.24")
    dialog.value.setText("7.34")
    dialog.reason.setText("read wrong")
    dialog.go.click()
    dialog.reject()
    assert dialog.isVisible()
    assert "being recorded" in dialog.wrong.text()
    until(qtbot, lambda: not dialog.isVisible())
    settled(qtbot, window)
    assert ph_of(window) == 7.34
    assert window.strip.plain().startswith("Corrected for Bed 7")


def test_one_value_of_a_gas_alone_is_asked_about(qtbot, window):
    dialog = open_correct(qtbot, window)
    choose(dialog, "pH", "7.24")
    dialog.act.setCurrentIndex(dialog.act.findData(Act.WITHDRAW))
    dialog.of.setCurrentIndex(dialog.of.findData(Of.ONE))
    dialog.reason.setText("clotted")
    dialog.go.click()
    until(qtbot, lambda: "Only this value?" in dialog.wrong.text())
    dialog.of.setCurrentIndex(dialog.of.findData(Of.WHOLE))
    assert dialog.wrong.text() == ""


def test_the_chosen_value_stays_in_sight_when_fields_take_its_room(qtbot, window):
    dialog = open_correct(qtbot, window)
    dialog.resize(dialog.width(), dialog.height() - 200)
    last = dialog.list.topLevelItem(dialog.list.topLevelItemCount() - 1)
    dialog.list.setCurrentItem(last)
    dialog.act.setCurrentIndex(dialog.act.findData(Act.MOVE))
    qtbot.wait(30)
    shown = dialog.list.visualItemRect(last)
    assert dialog.list.viewport().rect().contains(shown.center())


def test_a_wrong_value_is_refused_and_an_unusual_one_asked_about(qtbot, window):
    dialog = open_correct(qtbot, window)
    choose(dialog, "pH", "7.24")
    dialog.reason.setText("x")
    dialog.value.setText("9.9")
    dialog.go.click()
    until(qtbot, lambda: "9.9" in dialog.wrong.text())
    seconds = [100.0]
    dialog.settle.clock = lambda: seconds[0]
    head = window.model.session.head
    dialog.value.setText("7.91")
    dialog.go.click()
    until(qtbot, lambda: "again says yes" in dialog.wrong.text())
    assert dialog.wrong.text().startswith("pH 7.91 is outside the usual 7.00 to 7.60.")
    seconds[0] += 5
    dialog.value.setText("6.75")  # another value: the yes to come was not for it
    assert dialog.wrong.text() == ""
    dialog.go.click()
    until(qtbot, lambda: "pH 6.75" in dialog.wrong.text())
    dialog.go.click()  # the second half of a double press
    settled(qtbot, window)
    assert window.model.session.head == head
    seconds[0] += 0.8
    dialog.go.click()
    until(qtbot, lambda: ph_of(window) == 6.75)


def test_values_stand_as_typed_with_units_as_people_write_them_and_the_kept_value_beside(qtbot, window):
    window.select("bed-7")
    settled(qtbot, window)
    qtbot.keyClicks(window.strip.line, "temp 98.6 F gcs 15 dyspnoea 8")
    settled(qtbot, window)  # Enter counts once the preview is shown
    qtbot.keyClick(window.strip.line, Qt.Key.Key_Return)
    until(qtbot, lambda: window.feed.answers["bed-7"].record.latest("dyspnoea") == 8)
    dialog = open_correct(qtbot, window)
    rows = [dialog.list.topLevelItem(n) for n in range(dialog.list.topLevelItemCount())]
    shown = {(row.text(1), row.text(2)) for row in rows}
    assert ("Temperature", "98.6 \N{DEGREE SIGN}F (37.0 \N{DEGREE SIGN}C)") in shown
    assert {("GCS", "15"), ("Dyspnoea", "8 of 10")} <= shown
    assert not any(word in value for _, value in shown for word in ("degC", "degF", "points", "fraction"))
    choose(dialog, "Temperature", "98.6")
    assert dialog.value.text() == "98.6 \N{DEGREE SIGN}F"
    dialog.value.setText("37.4 \N{DEGREE SIGN}C")
    dialog.reason.setText("read wrong")
    dialog.go.click()
    until(qtbot, lambda: window.feed.answers["bed-7"].record.latest("temp") == 37.4)


def test_a_moment_is_shown_and_taken_by_the_walls_clock(qtbot, window):
    with Store.open(window.model.session.store_path) as store:
        entry.log_line(store, "AB", NOW, entry.LineRequest("bed-7", "support started 23:50", "Europe/London"))
    window.model.look_for_changes()
    until(qtbot, lambda: window.feed.answers["bed-7"].record.latest("started_at") is not None)
    dialog = open_correct(qtbot, window)
    choose(dialog, "Support started", "27-Mar-2026 23:50")
    assert dialog.value.text() == "23:50"
    dialog.reason.setText("misread")
    dialog.value.setText("half one")
    dialog.go.click()
    assert "14:20" in dialog.wrong.text()
    dialog.value.setText("yesterday 23:55")
    dialog.go.click()
    right = parse("2026-03-27T23:55:00+00:00")
    until(qtbot, lambda: window.feed.answers["bed-7"].record.latest("started_at") == right)
