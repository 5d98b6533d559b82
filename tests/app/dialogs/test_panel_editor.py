"""Panels are made, named, filled, kept and reset from the window."""

import pytest
from PySide6.QtCore import Qt

from app.dialogs.panel_editor import PanelEditor
from tests.support.open_window import dialog_of, settled, until


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
