"""Facts that change while support runs: each is a timed entry, and figures of then keep to what stood."""

import pytest
from PySide6.QtCore import Qt

from app.forms.facts_form import FactsForm
from app.operations import figures
from core.record.channels import CHANNELS, Group
from core.record.instant import HOUR
from storage.store import Store
from tests.support.open_window import NOW, settled, until

Key, Mod = Qt.Key, Qt.KeyboardModifier


@pytest.fixture
def window(on_bed_7):
    return on_bed_7


def opened(qtbot, window):
    qtbot.keyClick(window.pages.ward.lanes, Key.Key_F11, Mod.ShiftModifier)
    form = next(d for d in window.findChildren(FactsForm) if d.isVisible())
    settled(qtbot, window)
    return form


def record_it(qtbot, window, form):
    settled(qtbot, window)
    qtbot.keyClick(form, Key.Key_Return)
    until(qtbot, lambda: "Recorded for" in window.strip.plain())
    settled(qtbot, window)
    return window.feed.answers["bed-7"].record


def test_what_stands_is_shown_and_nothing_is_recorded_unless_it_differs(qtbot, window):
    form = opened(qtbot, window)
    assert form.fields["label"].text == "Bed 7"
    assert form.fields["ceiling_of_care"].text == "full"
    assert "8 h ago" in form.cells["label"].note.text()
    assert form.cells["usual_paco2"].note.text() == "not recorded"
    assert not form.go.isEnabled()
    assert "Nothing to record yet" in form.plain()


def test_a_bed_move_and_a_new_ceiling_are_entries_of_the_moment_typed(qtbot, window):
    form = opened(qtbot, window)
    qtbot.keyClicks(form.time, "04:45")
    form.fields["label"].widget.selectAll()
    qtbot.keyClicks(form.fields["label"].widget, "Bed 12")
    qtbot.mouseClick(form.fields["ceiling_of_care"].widget.buttons["no intubation"], Qt.MouseButton.LeftButton)
    settled(qtbot, window)
    assert form.cells["label"].note.text() == "was Bed 7"
    assert "Bed 7, 04:45: Label: Bed 12, Ceiling of care: no intubation." in form.plain()
    record = record_it(qtbot, window, form)
    assert record.text("label").v == ("Bed 7", "Bed 12")
    assert record.text("ceiling_of_care").v == ("full", "no intubation")
    assert int(record.text("label").t[-1]) == NOW - 45 * 60_000_000
    lanes = {x.key: x for x in window.pages.ward.lanes.spec.lanes}
    assert lanes["bed-7"].title == "Bed 12"
    with Store.open(window.model.session.store_path) as store:
        before = figures.of_episode(store, "AB", NOW, figures.EpisodeRequest("bed-7", NOW - HOUR)).value.figures
    assert before.label == "Bed 7"
    window.actions_by_key["undo"].trigger()
    until(qtbot, lambda: window.feed.answers["bed-7"].record.latest_text("label") == "Bed 7")
    assert window.feed.answers["bed-7"].record.latest_text("ceiling_of_care") == "full"


def test_an_earlier_moment_shows_what_stood_then_and_keeps_what_is_typed(qtbot, window):
    form = opened(qtbot, window)
    qtbot.keyClicks(form.fields["contact"].widget, "Registrar 4411")
    qtbot.keyClicks(form.time, "20:00")  # before the episode was begun
    settled(qtbot, window)
    assert form.fields["label"].text == ""
    assert form.fields["contact"].text == "Registrar 4411"


def test_the_usual_paco2_is_in_the_wards_unit_and_asks_beyond_its_limits(qtbot, window):
    window.prefer(gas_unit="kPa")
    form = opened(qtbot, window)
    box = form.fields["usual_paco2"].widget.box
    assert "kPa" in form.fields["usual_paco2"].widget.accessibleName()
    qtbot.keyClicks(box.lineEdit(), "7.2")
    record = record_it(qtbot, window, form)
    assert record.latest("usual_paco2") == pytest.approx(54.0, abs=0.05)
    assert record.standing[-1].entry.raw_unit == "kPa"


def test_a_wrong_value_and_a_wrong_time_are_said_and_nothing_is_written(qtbot, window):
    head = window.model.session.head
    form = opened(qtbot, window)
    qtbot.keyClicks(form.fields["weight"].widget.box.lineEdit(), "900")
    settled(qtbot, window)
    assert "not possible" in form.plain()
    form.fields["weight"].put("80")
    qtbot.keyClicks(form.time, "25:90")
    settled(qtbot, window)
    assert "25:90" in form.plain()
    assert not form.go.isEnabled()
    qtbot.keyClick(form, Key.Key_Escape)
    settled(qtbot, window)
    assert window.model.session.head == head


def test_every_field_is_a_fact_with_a_name_for_screen_readers(qtbot, window):
    form = opened(qtbot, window)
    assert all(CHANNELS[key].group in (Group.PROFILE, Group.SETTING) for key in form.fields)
    assert all(f.widget.accessibleName() for f in form.fields.values())
    wanted = {"label", "ceiling_of_care", "resuscitation", "target_spo2_low", "target_spo2_high", "usual_paco2",
              "contact", "location"}  # fmt: skip
    assert wanted <= form.fields.keys()
