"""The window in real use: keys and mouse drive it, a real store answers, nothing is left behind."""

from PySide6.QtCore import QPoint, Qt
from PySide6.QtWidgets import QAbstractButton, QAbstractScrollArea, QApplication, QLabel, QWidget

from app.chart.shapes import LaneKind
from app.look.theme import DARK, LIGHT
from tests.support.open_window import NOW, make_store, open_window, settled, type_line, until

Key, Mod = Qt.Key, Qt.KeyboardModifier


def lane(window, key="bed-7"):
    return next(x for x in window.pages.ward.lanes.spec.lanes if x.key == key)


def settings_in(window):
    return [i.sentence for i in lane(window).items if i.kind is LaneKind.SETTING]


def test_the_worst_is_seen_first_and_chosen(window):
    ward = window.pages.ward
    assert "Bed 7" in ward.first.text()
    assert ward.shown_keys()[0] == "bed-7"
    assert window.model.session.selection == "bed-7"
    assert window.strip.whom.text() == "Bed 7"
    assert ward.lanes.hasFocus()
    assert lane(window).state_word == "severe, pH 7.24"


def test_a_change_is_logged_by_keys_seen_everywhere_and_undone(qtbot, window):
    lanes = window.pages.ward.lanes
    qtbot.keyClick(lanes, Key.Key_Slash)
    assert window.strip.line.hasFocus()
    before, support_before = settings_in(window), lane(window).support
    type_line(qtbot, window, "22/6 35")
    said = window.strip.plain()
    assert "Bed 7" in said
    assert "IPAP 22 cmH2O" in said
    assert "pressure support 13 to 16 cmH2O" in said
    qtbot.keyClick(window.strip.line, Key.Key_Return)
    until(qtbot, lambda: len(settings_in(window)) > len(before))
    assert "IPAP 18 to 22 cmH2O" in settings_in(window)[-1]
    assert lane(window).support != support_before
    told = window.strip.plain()
    assert "Recorded for Bed 7, now (05:30): IPAP 22 cmH2O, EPAP 6 cmH2O, FiO2 35 %." in told
    assert "Ctrl+Z undoes it." in told

    qtbot.keyClick(window.strip.line, Key.Key_Escape)
    qtbot.keyClick(lanes, Key.Key_Return)
    until(qtbot, lambda: window.pages.name == "episode")
    assert window.pages.episode.stack.spec.ribbon.steps[-1].ipap == 22

    seconds = [100.0]
    window.strip.settle.clock = lambda: seconds[0]
    qtbot.keyClick(window, Key.Key_Z, Mod.ControlModifier)  # its words stand there no more: said before it is done
    assert window.strip.plain().startswith("Undo for Bed 7: now (05:30): IPAP 22 cmH2O, EPAP 6 cmH2O, FiO2 35 %?")
    qtbot.keyClick(window, Key.Key_Z, Mod.ControlModifier)  # the second half of a double press
    settled(qtbot, window)
    assert len(settings_in(window)) > len(before)
    seconds[0] += 1
    qtbot.keyClick(window, Key.Key_Z, Mod.ControlModifier)
    until(qtbot, lambda: window.pages.episode.stack.spec.ribbon.steps[-1].ipap == 18)
    assert settings_in(window) == before
    assert "Undone" in window.strip.plain()


def test_a_gas_sent_by_one_key_changes_the_due_item(qtbot, window):
    due_before = lane(window).due_word
    assert "overdue" in due_before
    qtbot.keyClick(window.pages.ward.lanes, Key.Key_F6)
    settled(qtbot, window)
    qtbot.keyClick(window.strip.line, Key.Key_Return)
    until(qtbot, lambda: lane(window).due_word != due_before)
    assert "overdue" not in lane(window).due_word or "gas" not in lane(window).due_word.casefold()


def test_four_keys_beside_the_digits_log_a_change(qtbot, window):
    qtbot.keyClick(window.pages.ward.lanes, Key.Key_Slash)
    qtbot.keyClicks(window.strip.line, "20/6")
    settled(qtbot, window)
    qtbot.keyClick(window.strip.line, Key.Key_Return)
    until(qtbot, lambda: "IPAP 18 to 20" in settings_in(window)[-1])


def test_escape_leaves_all_untouched(qtbot, window):
    head = window.model.session.head
    qtbot.keyClick(window.pages.ward.lanes, Key.Key_L, Mod.ControlModifier)
    type_line(qtbot, window, "22/6 35")
    qtbot.keyClick(window.strip.line, Key.Key_Escape)
    settled(qtbot, window)
    assert window.strip.line.text() == ""
    assert window.pages.ward.lanes.hasFocus()
    window.model.look_for_changes()
    settled(qtbot, window)
    assert window.model.session.head == head


def test_one_key_each_for_gas_sent_and_the_mask(qtbot, window):
    qtbot.keyClick(window, Key.Key_F6)
    settled(qtbot, window)
    assert "Gas sent" in window.strip.plain()
    qtbot.keyClick(window.strip.line, Key.Key_Return)
    until(qtbot, lambda: len(window.feed.answers["bed-7"].record.text("gas_sent")) == 1)
    qtbot.keyClick(window, Key.Key_F7)
    settled(qtbot, window)
    assert window.strip.line.text() == "mask off"
    qtbot.keyClick(window.strip.line, Key.Key_Return)
    until(qtbot, lambda: window.strip.buttons["mask"].accessibleName() == "Mask on")
    qtbot.keyClick(window, Key.Key_F7)
    settled(qtbot, window)
    assert window.strip.line.text() == "mask on"
    qtbot.keyClick(window, Key.Key_F8)
    settled(qtbot, window)
    assert window.strip.line.text() == "checked no change"
    qtbot.keyClick(window, Key.Key_F9)
    settled(qtbot, window)
    assert window.strip.line.text() == "told "


def test_the_keyboard_alone_goes_through_the_ward_and_the_episodes(qtbot, window):
    lanes = window.pages.ward.lanes
    qtbot.keyClick(lanes, Key.Key_Down)
    assert window.model.session.selection == "bed-3"
    assert "Bed 3" in window.pages.ward.status.whole()
    qtbot.keyClick(lanes, Key.Key_Right)
    assert "pH" in window.pages.ward.status.whole()
    qtbot.keyClick(lanes, Key.Key_Return)
    until(qtbot, lambda: window.pages.name == "episode")
    assert window.pages.episode.title.text() == "Bed 3"
    assert window.pages.episode.stack.hasFocus()
    qtbot.keyClick(window, Key.Key_Up, Mod.ControlModifier)
    until(qtbot, lambda: window.pages.episode.title.text() == "Bed 7")
    qtbot.keyClick(window, Key.Key_Left, Mod.ControlModifier | Mod.ShiftModifier)
    assert window.pages.episode.stack.instant is not None
    assert "IPAP 18" in window.pages.episode.readout.plain()
    qtbot.keyClick(window.pages.episode.stack, Key.Key_Escape)
    assert window.pages.episode.stack.instant is None
    qtbot.keyClick(window.pages.episode.stack, Key.Key_Escape)
    assert window.pages.name == "ward"
    assert lanes.hasFocus()


def test_the_mouse_chooses_and_opens(qtbot, window):
    lanes = window.pages.ward.lanes
    second = QPoint(60, round(lanes._geometry.head + lanes._geometry.top(1) + 20))
    qtbot.mouseClick(lanes.viewport(), Qt.MouseButton.LeftButton, pos=second)
    assert window.model.session.selection == "bed-3"
    qtbot.mouseDClick(lanes.viewport(), Qt.MouseButton.LeftButton, pos=second)
    until(qtbot, lambda: window.pages.name == "episode")


def test_sorting_filtering_and_searching(qtbot, window):
    ward = window.pages.ward
    qtbot.keyClick(window, Key.Key_2, Mod.AltModifier)
    assert ward.shown_keys() == ("bed-3", "bed-7")
    qtbot.keyClick(window, Key.Key_1, Mod.AltModifier)
    assert ward.shown_keys()[0] == "bed-7"
    qtbot.keyClick(window, Key.Key_5, Mod.AltModifier)
    assert ward.shown_keys() == ("bed-7",)
    qtbot.keyClick(window, Key.Key_4, Mod.AltModifier)
    qtbot.keyClick(window, Key.Key_F, Mod.ControlModifier)
    assert ward.search.hasFocus()
    qtbot.keyClicks(ward.search, "bay a")
    assert ward.shown_keys() == ("bed-3",)
    ward.search.clear()


def test_the_episode_shows_state_flags_due_and_levers(qtbot, window):
    window.open_episode("bed-7")
    side = window.pages.episode.side
    until(qtbot, lambda: bool(side.facts()))
    text = " ".join(f.accessibleName() for f in side.facts())
    assert "severe" in text
    assert "pH 7.24" in text
    assert any(f.explanation is not None for f in side.facts())


def test_one_key_explains_what_has_the_focus(qtbot, window):
    from app.explain.dialog import ExplainDialog

    window.open_episode("bed-7")
    fact = next(f for f in window.pages.episode.side.facts() if f.explanation is not None)
    fact.setFocus()
    qtbot.keyClick(fact, Key.Key_F2)
    dialog = next(d for d in window.findChildren(ExplainDialog))
    assert fact.explanation.title in dialog.text.toPlainText()
    dialog.copy.click()
    assert QApplication.clipboard().text() == fact.explanation.as_text()
    dialog.close()


def test_dark_light_and_text_size(qtbot, window):
    qtbot.keyClick(window, Key.Key_K, Mod.ControlModifier | Mod.ShiftModifier)
    assert window.theme.colours is DARK.colours
    assert window.actions_by_key["dark"].isChecked()
    for _ in range(9):
        window.actions_by_key["text_larger"].trigger()
    assert window.theme.text_scale == 2.0
    assert window.pages.ward.lanes.theme.text_scale == 2.0
    qtbot.keyClick(window, Key.Key_K, Mod.ControlModifier | Mod.ShiftModifier)
    assert window.theme.colours is LIGHT.colours


def test_kilopascals_everywhere(qtbot, window):
    window.actions_by_key["pressure_unit"].trigger()
    assert "kPa" in lane(window).sentence
    window.open_episode("bed-7")
    until(qtbot, lambda: "kPa" in window.pages.episode.readout.plain())
    assert "mmHg" not in window.pages.episode.readout.plain()


def test_another_writer_s_entry_comes_in_by_itself(qtbot, window):
    from app.operations import entry
    from storage.store import Store

    with Store.open(window.model.session.store_path) as other:
        entry.log_line(other, "CD", NOW, entry.LineRequest("bed-3", "note from elsewhere", "UTC"))
    window.model.look_for_changes()
    until(qtbot, lambda: len(window.feed.answers["bed-3"].record.text("note")) == 1)


def test_the_handover_on_screen_and_as_a_pdf(qtbot, window, tmp_path):
    qtbot.keyClick(window, Key.Key_4, Mod.ControlModifier)
    until(qtbot, lambda: "Bed 7" in window.pages.handover.plain())
    text = window.pages.handover.plain()
    assert "See first: Bed 7" in text
    assert "never replaces clinical judgement" in text
    path = tmp_path / "handover.pdf"
    window.doers.ward.save_handover(path)
    until(qtbot, path.exists)
    assert path.read_bytes().startswith(b"%PDF")
    qtbot.keyClick(window.pages.handover, Key.Key_Escape)
    assert window.pages.name == "ward"


def test_comparing(qtbot, window):
    qtbot.keyClick(window, Key.Key_3, Mod.ControlModifier)
    view = window.pages.compare
    assert set(view.chosen()) == {"bed-7", "bed-3"}
    assert len(view.chart.comparison.names) == 2
    view.list.item(0).setCheckState(Qt.CheckState.Unchecked)
    assert len(view.chart.comparison.names) == 1
    assert "pH" in view.chart.accessibleDescription()


def test_the_pretended_clock_and_the_person_are_always_stated(window):
    assert window.top.moment.text() == "Pretended: 28-Mar-2026 05:30"
    assert window.top.person.text() == "AB"
    window.doers.file.become("XY")
    assert window.top.person.text() == "XY"
    assert window.model.session.person == "XY"


def test_every_control_has_a_name_for_screen_readers(qtbot, window):
    for page in ("ward", "episode", "compare", "handover"):
        window.show_page(page)
        settled(qtbot, window)
    controls = [
        w for w in window.findChildren(QWidget) if w.focusPolicy() != Qt.FocusPolicy.NoFocus and w.isEnabled()
    ]
    assert len(controls) > 20
    nameless = [w for w in controls if not _spoken(w)]
    assert [(type(w).__name__, w.parent()) for w in nameless] == []


def _spoken(widget):
    """What a screen reader says: the accessible name, else the text of a button; Qt's own inner parts speak
    through the widget they belong to."""
    owner = widget.parent()
    viewport = isinstance(owner, QAbstractScrollArea) and owner.viewport() is widget
    inner = (
        widget.objectName().startswith("qt_") or isinstance(widget, QLabel) or (viewport and owner.accessibleName())
    )
    return inner or widget.accessibleName() or (isinstance(widget, QAbstractButton) and widget.text())


def test_closing_leaves_nothing_behind(qtbot, tmp_path):
    from PySide6.QtCore import QThread

    with open_window(qtbot, make_store(tmp_path / "ward.luffmark")) as window:
        window.open_episode("bed-7")
        model = window.model
        worker = model.runner.findChildren(QThread)[0]
    assert worker.isFinished()
    assert window.model is None


def test_a_second_store_takes_the_place_of_the_first(qtbot, window, tmp_path):
    path = tmp_path / "empty.luffmark"
    window.doers.file.open_path(path, create=True)
    until(qtbot, lambda: window.feed.is_ready and not window.model.runner.is_busy)
    assert window.pages.ward.shown_keys() == ()
    assert "nothing is judged" in window.pages.ward.first.text()
    assert "Nobody stands out" not in window.pages.ward.first.text()
    assert not window.actions_by_key["gas_sent"].isEnabled()
    assert window.preferences.recent_stores[0] == str(path)


def test_a_flag_is_seen_and_settled_with_a_reason(qtbot, window):
    from app.dialogs.settle_flag import SettleDialog

    window.select("bed-7")
    flag = strongest(window)
    qtbot.keyClick(window, Key.Key_F3)
    until(qtbot, lambda: state_of_flag(window, flag.flag_id) == ("seen", "AB"))
    qtbot.keyClick(window, Key.Key_F4)
    dialog = next(d for d in window.findChildren(SettleDialog) if d.isVisible())
    assert dialog.windowTitle() == "Settle flag, Bed 7"
    dialog.go.click()
    assert dialog.wrong.text()
    window.model.select("bed-3")  # as when another window takes an episode back: the word stays with its patient
    qtbot.keyClicks(dialog.reason, "intensivist told, ceiling agreed")
    dialog.go.click()
    until(qtbot, lambda: state_of_flag(window, flag.flag_id)[0] == "settled")
    assert "recorded for Bed 7" in window.strip.plain()
    assert strongest(window).flag_id != flag.flag_id
    assert window.strip.can_undo


def strongest(window):
    from app.ward.lane_words import strongest_flag

    return strongest_flag(window.feed.answers["bed-7"].figures)


def state_of_flag(window, flag_id):
    flags = window.feed.answers["bed-7"].figures.flags
    return next((f.state, f.seen_by) for f in flags if f.flag_id == flag_id)
