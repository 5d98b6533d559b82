"""Looking back, the map, shift figures, exports and closing, by keys and through a real store."""

import csv

import pytest
from pypdf import PdfReader
from PySide6.QtCore import Qt
from PySide6.QtGui import QKeySequence
from PySide6.QtWidgets import QApplication, QDialog

from app import demo
from app.chart.shapes import MapGas
from app.deeds.closing import ClosingDeeds
from app.dialogs.close_handover import CloseHandoverDialog
from app.dialogs.closed_handovers import ClosedHandoversDialog
from app.dialogs.export import ExportDialog, Wanted
from app.dialogs.print_preview import HandoverPreview
from app.operations import episode, figures, statistics
from app.operations.episode import BeginRequest
from app.picture.drawn import picture_of_page
from app.statistics.measures import CSV_HEADER, measures
from app.window.tables_of_pages import table_of_page
from core.figures.json_form import to_json
from core.record.instant import MINUTE, parse
from storage.store import Store
from tests.support.open_window import open_window, settled, until
from tests.support.sample_ward import sample_night

Key, Mod = Qt.Key, Qt.KeyboardModifier
THEN = parse("2026-03-28T02:40:00Z")


@pytest.fixture
def window(qtbot, tmp_path):
    with open_window(qtbot, sample_night(tmp_path)) as made:
        yield made


def press(qtbot, window, keys):
    action = next(a for a in window.actions_by_key.values() if QKeySequence(keys) in a.shortcuts())
    assert action.isEnabled()
    action.trigger()
    settled(qtbot, window)


def look_back(qtbot, window):
    window.known.typed.setText("02:40")
    qtbot.keyClick(window.known.typed, Key.Key_Return)
    until(qtbot, lambda: window.model.session.as_known_at == THEN)
    settled(qtbot, window)


def test_every_figure_is_as_the_store_knew_it_then(qtbot, window):
    look_back(qtbot, window)
    shown = {k: to_json(a.figures) for k, a in window.feed.answers.items()}
    with Store.open(window.model.session.store_path, read_only=True) as store:
        asked = figures.of_ward(store, "", THEN, figures.WardRequest(THEN, THEN)).value  # what the command line asks
    assert shown == {f.episode: to_json(f) for f in asked.figures}
    entries = [s.entry for a in window.feed.answers.values() for s in a.record.standing]
    assert all(e.recorded_at <= THEN for e in entries)
    assert "As known at 28-Mar-2026 02:40" in window.known.said.text()
    assert window.known.isVisible()
    assert "02:40" in window.top.moment.text()


def test_nothing_can_be_logged_into_the_past_and_why_is_said(qtbot, window):
    look_back(qtbot, window)
    strip = window.strip
    assert not strip.line.isEnabled()
    assert not any(b.isEnabled() for b in strip.buttons.values())
    assert "nothing can be logged" in strip.plain()
    for key in ("gas_sent", "mask", "checked", "told", "new_episode", "correct", "undo", "take_in", "close_handover"):
        assert not window.actions_by_key[key].isEnabled(), key
    strip.gas_sent()
    assert strip.line.text() == ""
    press(qtbot, window, "Alt+Home")
    assert window.model.session.is_live
    assert not window.known.isVisible()
    assert strip.line.isEnabled()
    assert window.actions_by_key["gas_sent"].isEnabled()


def test_steps_by_a_quarter_of_an_hour_and_by_recording(qtbot, window):
    look_back(qtbot, window)
    press(qtbot, window, "Alt+Left")
    assert window.model.session.as_known_at == THEN - 15 * MINUTE
    press(qtbot, window, "Alt+Right")
    assert window.model.session.as_known_at == THEN
    press(qtbot, window, "Alt+Shift+Right")
    after = window.model.session.as_known_at
    assert after > THEN
    press(qtbot, window, "Alt+Shift+Left")
    assert window.model.session.as_known_at < after
    window.doers.review.step(24 * 60)
    assert window.model.session.is_live


@pytest.mark.parametrize("name", ["episode", "map"])
def test_before_anything_was_recorded_of_an_episode_its_pages_are_empty(qtbot, window, name):
    key = window.model.session.selection
    window.show_page(name)
    settled(qtbot, window)
    page = getattr(window.pages, name)
    label = page.title.text()
    assert page.roll.isVisible()
    window.doers.review.look_at(parse("2026-03-26T02:00:00Z"))
    settled(qtbot, window)
    until(qtbot, lambda: page.title.text() == "Nothing of this episode was recorded by then")
    assert not page.roll.isVisible()
    assert page.on_screen is None
    assert picture_of_page(window.pages, window.theme, "") is None
    assert table_of_page(window) is None
    for key_of_action in ("go_start", "go_now", "next_anchor", "previous_anchor", "explain", "table"):
        window.actions_by_key[key_of_action].trigger()  # nothing to act on, and nothing fails
    window.show_page(name)
    press(qtbot, window, "Alt+Home")
    until(qtbot, lambda: page.title.text() == label)
    assert page.roll.isVisible()
    assert window.model.session.selection == key


def test_looking_back_to_before_a_bed_began_takes_no_other_in_hand(qtbot, window):
    began = {k: a.record.first_at for k, a in window.feed.answers.items()}
    key = max(began, key=began.get)
    window.open_episode(key)
    settled(qtbot, window)
    label = window.strip.whom.text()
    window.doers.review.look_at(began[key] - 30 * MINUTE)
    settled(qtbot, window)
    assert window.feed.answers, "others had begun by then"
    assert key not in window.feed.answers
    assert window.model.session.selection == key
    assert window.pages.episode.title.text() == "Nothing of this episode was recorded by then"
    press(qtbot, window, "Alt+Home")
    until(qtbot, lambda: window.pages.episode.title.text() == label)
    assert (window.model.session.selection, window.strip.patient) == (key, key)


def test_a_time_that_is_none_is_refused_in_words(qtbot, window):
    look_back(qtbot, window)
    window.known.typed.setText("7 pm")
    qtbot.keyClick(window.known.typed, Key.Key_Return)
    assert "no time of day" in window.known.note.text()
    assert window.model.session.as_known_at == THEN


def test_what_came_later_is_counted_and_listed(qtbot, window):
    look_back(qtbot, window)
    until(qtbot, lambda: "Came later: " in window.known.later.text() and window.known.later.isEnabled())
    press(qtbot, window, "Ctrl+Shift+L")
    dialog = QApplication.activeModalWidget()
    count = int(window.known.later.text().split()[-1])
    assert dialog.table.rowCount() == count > 0
    assert "recorded later" in dialog.text.toPlainText()
    dialog.reject()


def test_what_came_later_is_marked_in_lane_and_panels_and_no_line_is_called_now(qtbot, window):
    look_back(qtbot, window)
    until(qtbot, lambda: any("later" in lane.subtitle for lane in window.pages.ward.lanes.spec.lanes))
    marked = next(lane for lane in window.pages.ward.lanes.spec.lanes if "later" in lane.subtitle)
    assert "came later" in marked.sentence
    assert window.pages.ward.lanes.spec.now_word == "then"
    assert "State then, next due" in repr(window.pages.ward.lanes.spec)
    window.open_episode(marked.key)
    settled(qtbot, window)
    assert "Then, 28-Mar-2026 02:40" in window.pages.episode.readout.plain()
    spec = window.pages.episode.stack.spec
    ticks = [t for t in spec.events if "recorded later" in t.word]
    assert ticks
    assert all(t.doubtful and t.at <= THEN for t in ticks)
    assert spec.now_word == "then"
    press(qtbot, window, "Alt+Home")
    until(qtbot, lambda: "Now, 28-Mar-2026 05:30" in window.pages.episode.readout.plain())
    until(qtbot, lambda: not any("later" in lane.subtitle for lane in window.pages.ward.lanes.spec.lanes))
    until(qtbot, lambda: not any("later" in t.word for t in window.pages.episode.stack.spec.events))
    assert window.pages.ward.lanes.spec.now_word == "now"


def test_a_new_episode_of_another_hand_does_not_slip_into_the_past(qtbot, window):
    look_back(qtbot, window)
    before = set(window.feed.answers)
    with Store.open(window.model.session.store_path) as other:
        episode.begin(other, "ZZ", demo.demo_now(), BeginRequest("NEW-1", {"label": "Bed 99"}))
    window.model.look_for_changes()
    settled(qtbot, window)
    settled(qtbot, window)
    assert set(window.feed.answers) == before
    press(qtbot, window, "Alt+Home")
    assert "NEW-1" not in before


def test_the_handover_follows_the_moment(qtbot, window):
    press(qtbot, window, "Ctrl+4")
    until(qtbot, lambda: "05:30" in window.pages.handover.plain())
    look_back(qtbot, window)
    until(qtbot, lambda: "as known at 28-Mar-2026 02:40" in window.pages.handover.plain())


def test_the_map_tells_class_and_reasoning_by_keys(qtbot, window):
    press(qtbot, window, "Ctrl+6")
    page = window.pages.map
    assert page.map.hasFocus()
    last = page.map.chosen
    assert isinstance(last, MapGas)
    qtbot.keyClick(page.map, Key.Key_Left)
    assert page.map.chosen.number == last.number - 1
    assert "expected when acute" in page.told.text() or "acidosis" in page.told.text()
    assert "Bicarbonate" in page.told.text()
    table = page.as_table()
    assert len(table.rows) == page.table.rowCount() == len(page.map.spec.gases)
    assert str(last.number) in table.text
    assert page.map.spec.paco2_word == "PaCO2 (mmHg)"
    press(qtbot, window, "Ctrl+Shift+U")
    assert page.map.spec.paco2_word == "PaCO2 (kPa)"
    assert page.map.spec.gases[-1].paco2 < 20
    qtbot.keyClick(page, Key.Key_Escape)
    assert window.pages.name == "ward"


def test_shift_figures_are_those_of_the_operation_and_can_be_saved(qtbot, window, tmp_path):
    press(qtbot, window, "Ctrl+5")
    page = window.pages.statistics
    until(qtbot, lambda: page.found is not None)
    with Store.open(window.model.session.store_path, read_only=True) as store:
        shift = window.shift()
        request = statistics.StatisticsRequest(shift.start, shift.end)
        assert statistics.of_ward(store, "", demo.demo_now(), request).value == page.found
    found = measures(page.found, window.plain_reader)
    groups = {m.group for m in found}
    assert page.table.rowCount() == len(found) + len(groups)
    window.doers.review.ask_path = lambda *_: tmp_path / "figures.csv"
    press(qtbot, window, "Ctrl+Shift+F")
    with (tmp_path / "figures.csv").open(encoding="utf-8", newline="") as file:
        rows = list(csv.reader(file))
    assert tuple(rows[0]) == CSV_HEADER
    assert len(rows) == len(found) + 1
    before = page.start.text()
    page.spans.button("day").click()
    assert page.start.text() != before  # the span that is being counted stands there while it is
    until(qtbot, lambda: page.found.end - page.found.start == 24 * 60 * MINUTE)


def test_a_handover_is_closed_and_opened_again_as_it_was(qtbot, window, tmp_path):
    press(qtbot, window, "Ctrl+Shift+H")
    dialog = window.findChild(CloseHandoverDialog)
    dialog.submit()
    assert "Both names" in dialog.wrong.text()
    dialog.given.setText("AB")
    dialog.taken.setText("CD")
    dialog.submit()
    until(qtbot, lambda: "is closed" in window.strip.plain())
    press(qtbot, window, "Ctrl+Shift+O")
    until(qtbot, lambda: window.findChild(ClosedHandoversDialog) is not None)
    listed = window.findChild(ClosedHandoversDialog)
    facts = listed.chosen()
    assert facts.name.endswith("AB to CD")
    deeds: ClosingDeeds = window.doers.review
    deeds.fetch_closed(facts.id, tmp_path / "again.pdf")
    until(qtbot, lambda: (tmp_path / "again.pdf").exists())
    settled(qtbot, window)
    assert (tmp_path / "again.pdf").stat().st_size == facts.size
    assert "CD" in PdfReader(tmp_path / "again.pdf").pages[0].extract_text()
    listed.reject()


def test_values_are_exported_and_never_over_a_file(qtbot, window, tmp_path):
    press(qtbot, window, "Ctrl+Shift+E")
    dialog = window.findChild(ExportDialog)
    assert isinstance(dialog, QDialog)
    assert dialog.episodes.count() == len(window.feed.answers)
    dialog.reject()
    wanted = Wanted((window.model.session.selection,), ("ph",), True, False, True)
    window.doers.review.export(wanted, tmp_path / "v.csv")
    until(qtbot, lambda: "was written" in window.strip.plain())
    rows = (tmp_path / "v.csv").read_text("utf-8").splitlines()
    assert len(rows) > 1
    assert all(",ph," in row for row in rows[1:])
    assert (tmp_path / "v.dictionary.csv").exists()
    window.doers.review.export(wanted, tmp_path / "v.csv")
    until(qtbot, lambda: "exists already" in window.strip.plain())
    window.doers.review.export(Wanted((), (), False, True, False), tmp_path / "d.csv")
    until(qtbot, lambda: "what remains" in window.strip.plain())
    assert "De-identified is not anonymous" in (tmp_path / "d.about.txt").read_text("utf-8")


@pytest.mark.parametrize("page", ["ward", "episode", "map", "compare", "statistics"])
@pytest.mark.parametrize("suffix", [".png", ".svg", ".pdf"])
def test_each_page_is_drawn_as_a_picture(qtbot, window, tmp_path, page, suffix):
    window.show_page(page)
    settled(qtbot, window)
    path = tmp_path / f"{page}{suffix}"
    window.doers.review.write_picture(path)
    assert "was written" in window.strip.plain()
    data = path.read_bytes()
    assert len(data) > 2000
    if suffix == ".svg":
        assert b"<image" not in data
    if suffix == ".pdf":
        (only,) = PdfReader(path).pages
        assert not only.images


def test_a_picture_that_cannot_be_written_says_why(qtbot, window, tmp_path):
    window.doers.review.write_picture(tmp_path / "nowhere" / "x.pdf")
    assert "was written" not in window.strip.plain()
    assert "nowhere" in window.strip.plain()


def test_the_shift_pattern_is_the_wards_own(qtbot, window):
    deeds = window.doers.review
    deeds.set_shift_times("7:00, 14:30 21:15")
    assert window.preferences.shift_starts == ("07:00", "14:30", "21:15")
    assert (window.shift().end - window.shift().start) / MINUTE == 9 * 60 + 45
    deeds.set_shift_times("seven")
    assert "no shift pattern" in window.strip.plain()
    assert window.preferences.shift_starts == ("07:00", "14:30", "21:15")


def test_the_sheet_is_previewed_as_it_will_be_printed(qtbot, window):
    press(qtbot, window, "Ctrl+Alt+P")
    until(qtbot, lambda: window.findChild(HandoverPreview) is not None)
    preview = window.findChild(HandoverPreview)
    until(qtbot, lambda: preview.pages > 0)
    assert preview.pages >= 1 + len(window.feed.answers)
    preview.reject()
