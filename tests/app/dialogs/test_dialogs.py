"""Dialogs in real use: a file with bad rows, a correction and its undo, a new episode, panels, lists, tables."""

import pytest
from PySide6.QtCore import Qt
from PySide6.QtWidgets import QApplication, QComboBox

from app.dialogs.action_finder import ActionFinder
from app.dialogs.correct import Act, CorrectDialog
from app.dialogs.intake import IntakeDialog
from app.dialogs.panel_editor import PanelEditor
from app.dialogs.sign_in import SignInDialog
from app.dialogs.table import TableDialog
from app.look.theme import LIGHT
from tests.support.open_window import NOW, make_store, open_window, settled, until

HEAD = "episode,at,channel,value,unit,by,note\n"
GOOD = "bed-9,2026-03-28T01:00:00+00:00,label,Bed 9,,AB,\nbed-9,2026-03-28T02:00:00+00:00,rr,24,/min,AB,\n"
BAD = "bed-9,2026-03-28T02:00:00+00:00,ipap,99,cmH2O,AB,\n"
DOUBT = "bed-9,2026-03-28T02:30:00+00:00,spo2,60,%,AB,\n"


@pytest.fixture
def window(qtbot, tmp_path):
    with open_window(qtbot, make_store(tmp_path / "ward.luffmark")) as made:
        yield made


def write(folder, text):
    path = folder / "night.csv"
    path.write_text(HEAD + text, "utf-8")
    return path


def dialog_of(window, kind):
    return next(d for d in window.findChildren(kind) if d.isVisible())


# taking in a file


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


# correcting


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
    assert [(e.channel, e.at) for e in corrected] == [("paco2", NOW - 144 * 60_000_000)]


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


def test_a_value_moves_to_the_right_patient(qtbot, window):
    dialog = open_correct(qtbot, window)
    choose(dialog, "Respiratory rate", "27")
    dialog.act.setCurrentIndex(dialog.act.findData(Act.MOVE))
    dialog.reason.setText("wrong bed")
    assert dialog.to.currentIndex() == -1
    dialog.go.click()
    assert dialog.wrong.text() == "Choose the right patient."
    dialog.to.setCurrentIndex(dialog.to.findData("bed-3"))
    dialog.go.click()
    until(qtbot, lambda: len(window.feed.answers["bed-3"].record.number("rr")) == 2)


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


# panels


def test_panels_are_made_kept_and_reset(qtbot, window):
    window.open_episode("bed-7")
    stack = window.pages.episode.stack
    window.actions_by_key["panels"].trigger()
    editor = dialog_of(window, PanelEditor)
    editor.add()
    editor.name.setText("Circulation")
    editor.name.editingFinished.emit()
    tick(editor, "hr", True)
    assert "units" not in editor.wrong.text()
    editor.up()
    editor.keep()
    until(qtbot, lambda: "Circulation" in [p.title for p in stack.spec.panels])
    assert [p.title for p in stack.spec.panels][2] == "Circulation"
    window.actions_by_key["panels"].trigger()
    editor = dialog_of(window, PanelEditor)
    editor.reset()
    editor.keep()
    until(qtbot, lambda: "Circulation" not in [p.title for p in stack.spec.panels])


def tick(editor, channel, on):
    for n in range(editor.channels.count()):
        item = editor.channels.item(n)
        if item.data(Qt.ItemDataRole.UserRole) == channel:
            item.setCheckState(Qt.CheckState.Checked if on else Qt.CheckState.Unchecked)
            return
    raise AssertionError(channel)


def test_a_third_unit_is_refused_and_undo_goes_back(qtbot, window):
    window.open_episode("bed-7")
    window.actions_by_key["panels"].trigger()
    editor = dialog_of(window, PanelEditor)
    before = editor.panels
    tick(editor, "spo2", True)
    assert editor.wrong.text()
    assert editor.panels == before
    editor.duplicate()
    editor.remove()
    editor.undo()
    editor.undo()
    assert editor.panels == before
    editor.reject()


def open_panels(window, key="bed-7"):
    window.open_episode(key)
    window.actions_by_key["panels"].trigger()
    return dialog_of(window, PanelEditor)


def test_panels_kept_for_one_indication_leave_the_others_alone(qtbot, window):
    editor = open_panels(window)
    assert [editor.sets.kept_for.itemData(n) for n in range(2)] == ["usual", "copd"]
    editor.name.setText("Gas of COPD")
    editor.name.editingFinished.emit()
    editor.sets.kept_for.setCurrentIndex(1)
    editor.keep()
    until(qtbot, lambda: window.episode_feed.panels().panels[0].title == "Gas of COPD")
    window.strip.focus()
    qtbot.keyClicks(window.strip.line, "indication neuromuscular")
    settled(qtbot, window)
    qtbot.keyClick(window.strip.line, Qt.Key.Key_Return)
    until(qtbot, lambda: window.episode_feed.indication() == "neuromuscular")
    assert window.episode_feed.panels().panels[0].title == "Blood gas"


def test_a_set_is_saved_by_name_taken_undone_and_forgotten(qtbot, window):
    editor = open_panels(window)
    shipped_panels = editor.panels
    editor.duplicate()
    editor.save_set("Night round")
    four = editor.panels
    editor.reject()
    settled(qtbot, window)
    until(qtbot, lambda: "Night round" in window.episode_feed.sets)
    again = open_panels(window, "bed-3")  # a set serves every episode
    again.sets.named.setCurrentIndex(again.sets.named.findData("Night round"))
    again.sets.named.activated.emit(1)
    assert again.panels == four
    again.undo()
    assert again.panels == shipped_panels
    again.sets.named.setCurrentIndex(1)
    again.sets.named.activated.emit(1)
    again.sets.forget.click()
    until(qtbot, lambda: not window.episode_feed.sets)
    again.reject()


def test_height_axis_bands_and_order_are_changed_and_drawn(qtbot, window):
    editor = open_panels(window)
    editor.axes[0].low.setText("7.0")
    editor.axes[0].high.setText("7,6")
    editor.axes[0].high.editingFinished.emit()
    editor.bands.click()
    editor.height_slider.setValue(19)
    editor.height_slider.setFocus()
    qtbot.keyClick(editor.height_slider, Qt.Key.Key_Right)
    editor.down()
    editor.keep()
    until(qtbot, lambda: window.episode_feed.panels().panels[1].key == "gas")
    panel = window.episode_feed.panels().panels[1]
    assert (panel.low, panel.high, panel.bands, panel.height) == (7.0, 7.6, False, 2.0)
    until(qtbot, lambda: window.pages.episode.stack.spec.panels[1].scales[0].low == 7.0)
    assert window.pages.episode.stack.spec.panels[1].scales[0].high == 7.6


def test_both_axes_are_fixed_in_the_reader_s_unit(qtbot, window):
    window.prefer(gas_unit="kPa")
    settled(qtbot, window)
    editor = open_panels(window)
    assert "kPa" in editor.axes[1].label.text()
    editor.axes[1].low.setText("4")
    editor.axes[1].high.setText("12")
    editor.axes[1].high.editingFinished.emit()
    assert editor.panels.panels[0].second_high == pytest.approx(90.0, abs=0.05)  # mmHg
    editor.keep()
    until(qtbot, lambda: window.pages.episode.stack.spec.panels[0].scales[1].high == pytest.approx(12))
    assert window.pages.episode.stack.spec.panels[0].scales[1].low == pytest.approx(4)


@pytest.mark.parametrize("typed", ["seven", "7..2", "nan", "inf"])
def test_an_end_that_cannot_be_read_is_said_kept_in_its_field_and_never_drawn(qtbot, window, typed):
    editor = open_panels(window)
    before = editor.panels
    editor.axes[0].low.setText(typed)
    editor.axes[0].low.editingFinished.emit()
    assert typed in editor.wrong.text()
    assert editor.axes[0].low.text() == typed
    editor.keep()
    assert editor.isVisible()
    assert editor.panels == before
    editor.reject()


def test_undo_comes_back_to_panels_that_were_kept(qtbot, window):
    editor = open_panels(window)
    first = editor.panels
    editor.duplicate()
    editor.keep()
    until(qtbot, lambda: len(window.episode_feed.panels().panels) == 4)
    again = open_panels(window)
    qtbot.waitUntil(again.isActiveWindow)
    qtbot.keyClick(again.list, Qt.Key.Key_Z, Qt.KeyboardModifier.ControlModifier)
    assert again.panels == first
    again.keep()
    until(qtbot, lambda: window.episode_feed.panels() == first)


def test_reset_for_one_indication_brings_back_the_shipped_panels_not_those_of_its_kind(qtbot, window):
    editor = open_panels(window)
    shipped_panels = editor.panels
    editor.name.setText("Gas of all")
    editor.name.editingFinished.emit()
    editor.keep()
    until(qtbot, lambda: window.episode_feed.panels().panels[0].title == "Gas of all")
    again = open_panels(window)
    again.sets.kept_for.setCurrentIndex(1)
    again.reset()
    again.keep()
    until(qtbot, lambda: window.episode_feed.panels() == shipped_panels)


# lists, tables, person


def test_the_list_of_actions_finds_and_does(qtbot, window):
    finder = ActionFinder(window.actions_by_key, LIGHT, window)
    qtbot.addWidget(finder)
    finder.show()
    qtbot.keyClicks(finder.search, "compare")
    qtbot.keyClick(finder.search, Qt.Key.Key_Return)
    assert finder.chosen is window.actions_by_key["show_compare"]


@pytest.mark.parametrize("page", ["ward", "episode", "compare"])
def test_every_chart_is_a_table_that_can_be_copied(qtbot, window, page):
    window.select("bed-7")
    window.show_page(page)
    settled(qtbot, window)
    window.actions_by_key["table"].trigger()
    dialog = dialog_of(window, TableDialog)
    assert dialog.table.rowCount() > 0
    dialog.copy.click()
    lines = QApplication.clipboard().text().splitlines()
    assert len(lines) == dialog.table.rowCount() + 1
    assert all(line.count("\t") == lines[0].count("\t") for line in lines)
    dialog.copy_words.click()
    assert "Bed 7" in QApplication.clipboard().text()
    dialog.close()


def test_signing_in_takes_initials(qtbot):
    dialog = SignInDialog("AB", LIGHT)
    qtbot.addWidget(dialog)
    dialog.initials.clear()
    dialog.go.click()
    assert dialog.result() == 0
    assert dialog.wrong.text()
    qtbot.keyClicks(dialog.initials, "xy")
    dialog.go.click()
    assert dialog.person == "XY"
    assert dialog.result() == 1


def test_help_and_about_open_and_close(qtbot, window):
    from app.window.about import AboutDialog
    from app.window.help_dialog import HelpDialog

    qtbot.keyClick(window, Qt.Key.Key_F1)
    dialog = dialog_of(window, HelpDialog)
    assert "16/6 35" in dialog.text.toPlainText()
    dialog.close()
    window.actions_by_key["about"].trigger()
    dialog_of(window, AboutDialog).close()
