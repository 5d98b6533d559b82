"""Beginning an episode: target from risk, ceiling apart from resuscitation, checklist, first gas, what ran before."""

from PySide6.QtCore import Qt

from app.forms.begin_form import BeginForm
from app.forms.readiness import ABSOLUTE, ITEMS, KINDS, of_kind
from core.record.channels import CHANNELS, YES_NO
from core.record.instant import parse
from storage.store import Store
from tests.support.open_window import NOW, settled, until

Key = Qt.Key


def opened(qtbot, window):
    qtbot.keyClick(window, Key.Key_N, Qt.KeyboardModifier.ControlModifier)
    form = next(d for d in window.findChildren(BeginForm) if d.isVisible())
    settled(qtbot, window)
    return form


def begin(qtbot, window, form, label="Bed 11"):
    settled(qtbot, window)
    qtbot.keyClick(form, Key.Key_Return)
    until(qtbot, lambda: window.strip.whom.text() == label)
    return window.feed.answers[window.model.session.selection]


def type_into(qtbot, window, field, text):
    field.box.selectAll()
    qtbot.keyClicks(field.box.lineEdit(), text)
    settled(qtbot, window)


def test_the_target_is_suggested_from_risk_and_a_wrong_age_refused(qtbot, window):
    form = opened(qtbot, window)
    assert "Type a bed or a label" in form.plain()
    assert not form.go.isEnabled()
    assert form.cells["target_spo2_low"].note.text() == "94 % if left empty"
    form.indication.setCurrentIndex(form.indication.findData("copd"))
    assert form.cells["target_spo2_low"].note.text() == "88 % if left empty"
    assert "hypercapnic risk" in form.cells["indication"].note.text()
    qtbot.keyClicks(form.words["label"], "Bed 11")
    type_into(qtbot, window, form.numbers["age"], "abc")
    assert "Not recorded" in form.plain()
    assert "abc" in form.plain()
    assert not form.go.isEnabled()
    type_into(qtbot, window, form.numbers["age"], "70")
    answer = begin(qtbot, window, form)
    assert answer.record.latest("age") == 70
    assert answer.record.latest_text("indication") == "copd"
    assert answer.record.latest_text("ceiling_of_care") is None  # not asked, so not recorded


def test_the_target_told_is_the_one_that_the_program_will_use(qtbot, window):
    """A gas typed below shows the risk though no indication is chosen."""
    form = opened(qtbot, window)
    qtbot.keyClicks(form.words["label"], "Bed 11")
    form.gas.pressure_unit.buttons["kPa"].click()
    type_into(qtbot, window, form.gas.fields["ph"], "7.22")
    assert form.cells["target_spo2_low"].note.text() == "94 % if left empty"
    type_into(qtbot, window, form.gas.fields["paco2"], "10.6")
    form.gas.site.buttons["venous"].click()
    assert form.cells["target_spo2_low"].note.text() == "94 % if left empty"
    form.gas.site.buttons["arterial"].click()
    assert form.cells["target_spo2_low"].note.text() == "88 % if left empty"
    assert form.cells["target_spo2_high"].note.text() == "92 % if left empty"
    assert form.cells["indication"].note.text().startswith("hypercapnic risk, by the gas typed below")
    figures = begin(qtbot, window, form).figures
    assert (figures.now.spo2_target_low, figures.now.spo2_target_high) == (88, 92)


def test_ceiling_and_resuscitation_are_two_answers(qtbot, window):
    form = opened(qtbot, window)
    qtbot.keyClicks(form.words["label"], "Bed 11")
    qtbot.mouseClick(form.ceiling.buttons["no intubation"], Qt.MouseButton.LeftButton)
    qtbot.mouseClick(form.resuscitation.buttons["not for resuscitation"], Qt.MouseButton.LeftButton)
    settled(qtbot, window)
    assert "Ceiling of care: no intubation" in form.plain()
    record = begin(qtbot, window, form).record
    assert record.latest_text("ceiling_of_care") == "no intubation"
    assert record.latest_text("resuscitation") == "not for resuscitation"


def test_the_checklist_keeps_yes_no_and_not_known_and_asks_before_an_absolute_one(qtbot, window):
    form = opened(qtbot, window)
    qtbot.keyClicks(form.words["label"], "Bed 11")
    rows = form.readiness.rows
    for channel, answer in {"facial_injury": "yes", "airway_obstruction": "no", "chest_film": "not known"}.items():
        qtbot.mouseClick(rows[channel].buttons[answer], Qt.MouseButton.LeftButton)
    settled(qtbot, window)
    assert form.readiness.marks["facial_injury"].text() == "look"
    assert not form.readiness.marks["chest_film"].text()
    head = window.model.session.head
    qtbot.keyClick(form, Key.Key_Return)
    assert form.asking
    form.settle.clear()
    assert "Speaks against support absolutely: Facial deformity or burns" in form.plain()
    assert window.model.session.head == head
    record = begin(qtbot, window, form).record
    asked = ("facial_injury", "airway_obstruction", "chest_film", "monitoring")
    assert [record.latest_text(channel) for channel in asked] == ["yes", "no", "not known", None]


def test_an_answer_pressed_again_is_taken_back(qtbot, window):
    form = opened(qtbot, window)
    row = form.readiness.rows["confused"]
    qtbot.mouseClick(row.buttons["yes"], Qt.MouseButton.LeftButton)
    assert row.key == "yes"
    qtbot.mouseClick(row.buttons["yes"], Qt.MouseButton.LeftButton)
    assert row.key == ""
    form.reject()


def test_every_item_has_a_channel_of_yes_no_and_a_source():
    assert {i.kind for i in ITEMS} == set(KINDS)
    for item in ITEMS:
        assert CHANNELS[item.channel].choices == YES_NO
        assert item.source
        assert item.sure in ("confirmed", "secondary", "from memory", "common practice")
        assert item.good in ("yes", "no")
    assert all(i.good == "no" for i in of_kind(ABSOLUTE))


def test_a_baseline_gas_and_support_that_runs_already(qtbot, window):
    form = opened(qtbot, window)
    qtbot.keyClicks(form.words["label"], "Bed 11")
    form.gas.site.buttons["arterial"].click()
    type_into(qtbot, window, form.gas.fields["ph"], "7.12")
    type_into(qtbot, window, form.gas.fields["paco2"], "80")
    qtbot.keyClicks(form.gas_time, "04:50")
    form.running.state.buttons["running"].click()
    assert "Say which mode runs" in form.plain()
    qtbot.keyClicks(form.running.since, "04:30")
    form.running.mode.setCurrentIndex(form.running.mode.findData("BPAP-ST"))
    form.running.mode.activated.emit(1)
    assert "BPAP-ST needs IPAP, EPAP" in form.plain()
    for key, text in {"ipap": "14", "epap": "5", "fio2": "28"}.items():
        type_into(qtbot, window, form.running.fields[key], text)
    assert "04:50 Sample site: arterial, pH 7.12" in form.plain()
    assert form.readiness.measured["ph"].text() == "yes: 7.12"
    assert form.readiness.measured["gcs"].text() == "not known: no value typed"
    answer = begin(qtbot, window, form)
    assert answer.record.gases[0].at == parse("2026-03-28T04:50:00+00:00")
    assert answer.record.gases[0].ph == 7.12
    assert answer.figures.support.since == parse("2026-03-28T04:30:00+00:00")
    assert answer.record.latest("ipap") == 14
    assert answer.record.number("ipap").t[0] == NOW  # what it was before logging is not made up


def test_ipap_below_epap_cannot_be_begun_with(qtbot, window):
    form = opened(qtbot, window)
    qtbot.keyClicks(form.words["label"], "Bed 11")
    form.running.state.buttons["begins"].click()
    form.running.mode.setCurrentIndex(form.running.mode.findData("BPAP-S"))
    form.running.mode.activated.emit(1)
    for key, text in {"ipap": "5", "epap": "5"}.items():
        type_into(qtbot, window, form.running.fields[key], text)
    assert "IPAP must lie above EPAP" in form.plain()
    assert not form.go.isEnabled()
    form.reject()


def test_escape_begins_nothing(qtbot, window):
    form = opened(qtbot, window)
    head = window.model.session.head
    qtbot.keyClicks(form.words["label"], "Bed 11")
    settled(qtbot, window)
    qtbot.keyClick(form.words["label"], Key.Key_Escape)
    window.model.look_for_changes()
    settled(qtbot, window)
    assert window.model.session.head == head


def test_a_begun_episode_is_taken_back_whole_and_stays_in_the_ledger(qtbot, window):
    form = opened(qtbot, window)
    qtbot.keyClicks(form.words["label"], "Bed 11")
    form.indication.setCurrentIndex(form.indication.findData("copd"))
    key = begin(qtbot, window, form).figures.episode
    settled(qtbot, window)
    assert key in window.pages.ward.shown_keys()
    window.model._ticked()  # all are asked for again: one with nothing but its profile stands on the ward too
    settled(qtbot, window)
    assert key in window.feed.answers
    assert "Bed 11 has begun" in window.strip.plain()
    window.actions_by_key["undo"].trigger()
    until(qtbot, lambda: key not in window.pages.ward.shown_keys())
    settled(qtbot, window)
    assert "Undone" in window.strip.plain()
    assert window.model.session.selection in window.feed.answers
    assert window.strip.patient == window.model.session.selection
    with Store.open(window.model.session.store_path) as store:
        kept = store.entries(key)
        assert {e.action for e in kept} == {"assert", "withdraw"}
        assert not store.episode(key).standing
    window.actions_by_key["new_episode"].trigger()
    again = next(d for d in window.findChildren(BeginForm) if d.isVisible())
    qtbot.keyClicks(again.words["label"], "Bed 11")
    # in the same minute, so by the same key: what was taken back is no hindrance
    assert begin(qtbot, window, again).figures.episode == key


def test_no_source_repeats_how_sure_it_is() -> None:
    assert not [item.key for item in ITEMS if item.sure in item.source]
