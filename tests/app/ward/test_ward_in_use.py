"""The ward as it changes through a night: equal beds, moves, the clock, what another process writes."""

from PySide6.QtCore import Qt

from app.chart.shapes import LaneKind
from app.dialogs.correct import CorrectDialog
from app.operations import entry, episode
from app.session import clock
from app.session.clock import Clock
from core.record.instant import MINUTE
from storage.store import Store
from tests.support.open_window import NOW, make_store, open_window, settled, until


def lane(window, key):
    return next(x for x in window.pages.ward.lanes.spec.lanes if x.key == key)


def type_line(qtbot, window, text):
    window.strip.focus()
    qtbot.keyClicks(window.strip.line, text)
    settled(qtbot, window)
    qtbot.keyClick(window.strip.line, Qt.Key.Key_Return)


def test_two_patients_of_one_bed_are_told_apart_wherever_a_line_is_logged(qtbot, window):
    with Store.open(window.model.session.store_path) as other:
        facts = {"label": "Bed 7", "indication": "pneumonia"}
        episode.begin(other, "CD", NOW - 60 * MINUTE, episode.BeginRequest("bed-7-second", facts))
        entry.log_line(other, "CD", NOW, entry.LineRequest("bed-7-second", "50m ago cpap 8 fio2 40", "UTC"))
    window.model.look_for_changes()
    until(qtbot, lambda: "bed-7-second" in window.pages.ward.shown_keys())
    assert lane(window, "bed-7").title == lane(window, "bed-7-second").title == "Bed 7"
    assert "from 00:00" in lane(window, "bed-7").subtitle
    assert "bed-7-second" in lane(window, "bed-7-second").subtitle  # since when it runs is not recorded
    assert "See first: Bed 7 (" in window.pages.ward.first.text()
    window.select("bed-7")
    assert window.strip.whom.text() == "Bed 7 (from 00:00)"
    window.select("bed-7-second")
    assert window.strip.whom.text() == "Bed 7 (bed-7-second)"
    window.show_page("episode")
    assert window.pages.episode.title.text() == "Bed 7 (bed-7-second)"
    assert "Bed 7 (bed-7-second)" in window.pages.episode.stack.spec.name
    window.show_page("map")
    assert "Bed 7 (bed-7-second)" in window.pages.map.title.text()
    window.show_page("ward")
    type_line(qtbot, window, "rr 30")
    until(qtbot, lambda: "Recorded for Bed 7 (bed-7-second)" in window.strip.plain())
    window.actions_by_key["correct"].trigger()
    dialog = next(d for d in window.findChildren(CorrectDialog) if d.isVisible())
    assert dialog.whom.text() == "Bed 7 (bed-7-second)"
    assert dialog.to.findText("Bed 7 (from 00:00)") >= 0
    dialog.reject()
    window.select("bed-3")
    assert window.strip.whom.text() == "Bed 3"


def test_a_bed_move_shows_and_a_corrected_label_is_none(qtbot, window):
    window.select("bed-7")
    type_line(qtbot, window, "04:45 label Bed 12")
    until(qtbot, lambda: lane(window, "bed-7").title == "Bed 12")
    ticks = [i for i in lane(window, "bed-7").items if i.kind is LaneKind.SETTING and "moved" in i.sentence]
    assert [i.sentence for i in ticks] == ["04:45 moved from Bed 7 to Bed 12"]
    assert ticks[0].word == ""  # said under the title: the settings' words are left in sight
    assert window.strip.whom.text() == "Bed 12"
    assert lane(window, "bed-7").subtitle == "COPD, from Bed 7 04:45"
    for typed in ("bed 12", "Bed 7"):  # where the patient is, and where the patient was
        window.pages.ward.search.setText(typed)
        assert window.pages.ward.shown_keys() == ("bed-7",)
    window.pages.ward.search.clear()
    window.strip.undo()
    until(qtbot, lambda: lane(window, "bed-7").title == "Bed 7")
    assert not [i for i in lane(window, "bed-7").items if "moved" in i.sentence]


def test_the_now_line_moves_with_the_clock(qtbot, tmp_path, monkeypatch):
    began = clock.real_now()
    with open_window(qtbot, make_store(tmp_path / "ward.luffmark"), clock=Clock(NOW, began)) as window:
        first = window.pages.ward.lanes.spec.now
        monkeypatch.setattr(clock, "real_now", lambda: began + 10 * MINUTE)
        window.model._ticked()  # what its timer does every 15 s
        until(qtbot, lambda: window.pages.ward.lanes.spec.now == NOW + 10 * MINUTE)
        assert window.pages.ward.lanes.spec.now > first


def test_closed_episodes_stay_dimmed_and_filters_leave_them_out(qtbot, window):
    window.select("bed-3")
    type_line(qtbot, window, "stopped end_reason weaned")
    until(qtbot, lambda: lane(window, "bed-3").closed)
    assert "weaned" in lane(window, "bed-3").due_word
    window.actions_by_key["filter_not_responding"].trigger()
    assert "bed-3" not in window.pages.ward.shown_keys()


def test_what_a_search_hides_is_not_taken_for_what_it_shows(qtbot, window):
    ward = window.pages.ward
    window.select("bed-7")
    qtbot.keyClick(ward.lanes, Qt.Key.Key_F, Qt.KeyboardModifier.ControlModifier)
    qtbot.keyClicks(ward.search, "bed 3")
    assert ward.shown_keys() == ("bed-3",)
    assert ward.lanes.selected_lane is None  # the patient in hand is another one
    assert window.strip.whom.text() == "Bed 7"
    assert "Bed 7 is in hand and not shown" in ward.status.text()
    qtbot.keyClick(ward.search, Qt.Key.Key_Return)
    settled(qtbot, window)
    assert window.model.session.selection == "bed-3"
    assert window.strip.whom.text() == "Bed 3"
    assert ward.lanes.hasFocus()
    assert ward.shift.text() == "1 of 2 shown"
    window.actions_by_key["filter_all"].trigger()
    assert ward.search.text() == ""
    assert ward.shift.text() == "Night shift 19:30 to 07:30"
    assert ward.lanes.selected_key == "bed-3"
    ward.search.setFocus()
    qtbot.keyClicks(ward.search, "bed 7")
    qtbot.keyClick(ward.search, Qt.Key.Key_Escape)
    assert len(ward.shown_keys()) == 2
    assert ward.lanes.hasFocus()


def test_what_a_filter_hides_leaves_no_lane_chosen_and_arrows_take_one(qtbot, window):
    ward = window.pages.ward
    window.select("bed-3")
    window.actions_by_key["filter_not_responding"].trigger()
    assert "bed-3" not in ward.shown_keys()
    assert ward.lanes.selected_lane is None
    qtbot.keyClick(ward.lanes, Qt.Key.Key_Down)
    assert window.model.session.selection == ward.shown_keys()[0]
    assert window.strip.patient == ward.shown_keys()[0]


def test_a_thing_chosen_on_a_lane_stays_chosen_when_figures_come(qtbot, window):
    lanes = window.pages.ward.lanes
    qtbot.keyClick(lanes, Qt.Key.Key_End)
    chosen = lanes.selected_item
    assert chosen is not None
    window.model._ticked()
    settled(qtbot, window)
    assert lanes.selected_item is not None


def test_a_thing_on_a_lane_is_told_on_the_whole_line(qtbot, window):
    ward = window.pages.ward
    window.resize(1280, 800)
    settled(qtbot, window)
    assert ward._legend.signs.isVisible()
    narrow = ward.status.width()
    qtbot.keyClick(ward.lanes, Qt.Key.Key_End)
    qtbot.waitUntil(lambda: ward.status.width() > narrow)
    assert ward.lanes.selected_item.sentence in ward.status.text()
    qtbot.keyClick(ward.lanes, Qt.Key.Key_Escape)
    qtbot.waitUntil(lambda: ward._legend.signs.isVisible())
