"""Forms in real use: by keys and mouse, over a real store; what they record is what the strip would record."""

from math import nan

import pytest
from PySide6.QtCore import Qt
from PySide6.QtWidgets import QAbstractButton, QLabel, QWidget

from app.forms.end_form import EndForm
from app.forms.entry_form import spoken as typed_by_hand
from app.forms.gas_form import GasForm
from app.forms.settings_form import SettingsForm
from app.forms.vitals_form import VitalsForm
from app.session.failure import Failure
from core.record.log_line import read_line
from core.record.message import Message
from core.record.settings import Settings
from tests.support.open_window import make_store, open_window, settled, until

Key, Mod = Qt.Key, Qt.KeyboardModifier


@pytest.fixture
def window(qtbot, tmp_path):
    with open_window(qtbot, make_store(tmp_path / "ward.luffmark")) as made:
        window_ready(qtbot, made)
        yield made


def window_ready(qtbot, window):
    window.select("bed-7")
    settled(qtbot, window)


def opened(qtbot, window, key, kind, modifier=Mod.NoModifier):
    qtbot.keyClick(window, key, modifier)
    form = next(d for d in window.findChildren(kind) if d.isVisible())
    settled(qtbot, window)
    return form


def record(window):
    return window.feed.answers["bed-7"].record


def type_into(qtbot, window, field, text):
    field.box.selectAll()
    qtbot.keyClicks(field.box.lineEdit(), text)
    settled(qtbot, window)


def test_a_change_of_settings_by_keys_is_shown_recorded_and_undone(qtbot, window):
    form = opened(qtbot, window, Key.Key_F10, SettingsForm)
    assert form.title.text() == "Bed 7"
    assert {k: f.text for k, f in form.fields.items()} == {
        "ipap": "18", "epap": "5", "cpap": "", "fio2": "28", "o2_flow": "", "rate_set": "", "ti": "",
    }  # fmt: skip
    assert form.focusWidget() is form.fields["ipap"].box
    assert not form.go.isEnabled()
    head = window.model.session.head
    qtbot.keyClick(form.fields["ipap"].box, Key.Key_Up)
    qtbot.keyClick(form.fields["ipap"].box, Key.Key_Up)
    settled(qtbot, window)
    assert form.support.text() == "13 \N{RIGHTWARDS ARROW} 15 cmH2O"
    assert form.acts.text() == "can act on CO2"
    assert form.cells["ipap"].note.text() == "was 18"
    assert "IPAP 20 cmH2O" in form.plain()
    assert "pressure support 13 to 15 cmH2O" in form.plain()
    assert "Bed 7, now (05:30)" in form.plain()
    assert window.model.session.head == head
    qtbot.keyClick(form, Key.Key_Return)
    until(qtbot, lambda: record(window).number("ipap").v[-1] == 20)
    assert [len(record(window).number(k)) for k in ("epap", "fio2")] == [2, 1]  # what did not change is not logged
    assert "Recorded for Bed 7" in window.strip.plain()
    window.activateWindow()  # off screen no window manager does it
    until(qtbot, window.pages.ward.lanes.hasFocus)
    qtbot.keyClick(window.pages.ward.lanes, Key.Key_Z, Mod.ControlModifier)
    until(qtbot, lambda: record(window).number("ipap").v[-1] == 18)


@pytest.mark.parametrize(
    ("key", "kind", "modifier"),
    [(Key.Key_F10, SettingsForm, Mod.NoModifier), (Key.Key_W, EndForm, Mod.ControlModifier)],
)
def test_a_form_that_could_be_taken_for_a_control_says_that_it_only_records(qtbot, window, key, kind, modifier):
    form = opened(qtbot, window, key, kind, modifier)
    said = [x.text() for x in form.findChildren(QLabel) if x.isVisible()]
    assert any(text.startswith("Records only: the ventilator is not changed.") for text in said)
    qtbot.keyClick(form, Key.Key_Escape)


@pytest.mark.parametrize(
    "line",
    ["stopped end_reason weaned", "gas_fio2 40 ph 7.3 site arterial", "o2_flow 4", "rate_set 16", "mask_off"],
)
def test_the_line_that_a_form_shows_may_be_typed_as_it_stands(line):
    """Names of channels stand there as people type them, and mean the same."""
    now, force = 10**15, Settings("BPAP-ST", 18.0, 5.0, nan, 0.3, nan, 14.0, 1.0, "oronasal")
    shown = typed_by_hand(line)
    assert "_" not in shown
    told = [read_line(text, now=now, zone="UTC", in_force=force).readings for text in (line, shown)]
    assert [(r.channel.key, r.value) for r in told[0]] == [(r.channel.key, r.value) for r in told[1]]


def test_buttons_do_what_arrow_keys_do_and_the_wheel_does_nothing(qtbot, window):
    form = opened(qtbot, window, Key.Key_F10, SettingsForm)
    field = form.fields["fio2"]
    qtbot.mouseClick(field.more, Qt.MouseButton.LeftButton)
    qtbot.mouseClick(field.more, Qt.MouseButton.LeftButton)
    qtbot.mouseClick(field.less, Qt.MouseButton.LeftButton)
    settled(qtbot, window)
    assert field.text == "29"
    assert "FiO2 28 % to 29 %" in form.plain()
    assert min(field.more.width(), field.more.height(), field.box.height()) >= 44
    form.reject()


def test_raising_epap_alone_says_that_it_lowers_support(qtbot, window):
    form = opened(qtbot, window, Key.Key_F10, SettingsForm)
    type_into(qtbot, window, form.fields["epap"], "8")
    assert "lowers pressure support: EPAP 5 to 8, pressure support 13 to 10" in form.plain()
    assert form.acts.text() == "can act on CO2 and oxygen"
    form.reject()


def test_ipap_not_above_epap_is_refused_in_words(qtbot, window):
    form = opened(qtbot, window, Key.Key_F10, SettingsForm)
    type_into(qtbot, window, form.fields["epap"], "18")
    assert "Not recorded" in form.plain()
    assert "IPAP above EPAP" in form.plain()
    assert not form.go.isEnabled()
    head = window.model.session.head
    qtbot.keyClick(form, Key.Key_Return)
    settled(qtbot, window)
    assert window.model.session.head == head
    form.reject()


def test_escape_leaves_all_untouched(qtbot, window):
    head = window.model.session.head
    form = opened(qtbot, window, Key.Key_F10, SettingsForm)
    type_into(qtbot, window, form.fields["ipap"], "24")
    qtbot.keyClick(form.fields["ipap"].box, Key.Key_Escape)
    settled(qtbot, window)
    assert not [d for d in window.findChildren(SettingsForm) if d.isVisible()]
    window.model.look_for_changes()
    settled(qtbot, window)
    assert window.model.session.head == head


def test_another_moment_shows_the_settings_of_then_and_keeps_what_was_typed(qtbot, window):
    form = opened(qtbot, window, Key.Key_F10, SettingsForm)
    type_into(qtbot, window, form.fields["epap"], "6")
    qtbot.keyClicks(form.time, "01:30")
    settled(qtbot, window)
    assert form.fields["ipap"].text == "14"
    assert form.fields["epap"].text == "6"
    assert "Bed 7, 01:30" in form.plain()
    assert "14" not in form.items()
    form.reject()


def test_another_mode_shows_its_own_pressures_and_asks_for_them(qtbot, window):
    form = opened(qtbot, window, Key.Key_F10, SettingsForm)
    form.mode.setCurrentIndex(form.mode.findData("CPAP"))
    form.mode.activated.emit(form.mode.currentIndex())
    settled(qtbot, window)
    assert not form.cells["ipap"].isVisible()
    assert form.cells["cpap"].isVisible()
    assert "CPAP needs CPAP" in form.plain()
    type_into(qtbot, window, form.fields["cpap"], "10")
    assert "CPAP 10 cmH2O" in form.plain()
    qtbot.keyClick(form, Key.Key_Return)
    until(qtbot, lambda: window.feed.answers["bed-7"].figures.support.mode == "CPAP")


def test_an_unusual_value_asks_and_only_a_second_enter_says_yes(qtbot, window):
    head = window.model.session.head
    form = opened(qtbot, window, Key.Key_F12, VitalsForm)
    type_into(qtbot, window, form.fields["spo2"], "62")
    assert "62 %" in form.plain()
    qtbot.keyClick(form, Key.Key_Return)
    assert form.asking
    seconds = [100.0]
    form.settle.clock = lambda: seconds[0]
    form.settle.start()
    head = window.model.session.head
    qtbot.keyClick(form, Key.Key_Return)  # the second half of a double press
    settled(qtbot, window)
    assert form.isVisible()
    assert window.model.session.head == head
    seconds[0] += 0.8
    assert window.model.session.head == head
    qtbot.keyClick(form, Key.Key_Return)
    until(qtbot, lambda: record(window).number("spo2").v[-1] == 62)


def test_enter_before_the_preview_shows_it_and_waits_for_another(qtbot, window):
    form = opened(qtbot, window, Key.Key_F10, SettingsForm)
    seconds, head = [100.0], window.model.session.head
    form.settle.clock = lambda: seconds[0]
    form.fields["epap"].box.lineEdit().setText("8")
    form.edited()
    form.submit()  # before the answer can have come
    until(qtbot, lambda: form.preview is not None)
    form.submit()
    settled(qtbot, window)
    assert form.isVisible()
    assert window.model.session.head == head
    seconds[0] += 0.8
    form.submit()
    until(qtbot, lambda: window.model.session.head > head)


def test_what_was_said_of_other_fields_does_not_stay_up_while_the_store_is_busy(qtbot, window, monkeypatch):
    form = opened(qtbot, window, Key.Key_F10, SettingsForm)
    type_into(qtbot, window, form.fields["ipap"], "22")
    assert "22" in form.plain()
    monkeypatch.setattr(form.model, "ask", lambda *_args, **_more: 0)  # the answer does not come
    form.fields["ipap"].box.selectAll()
    qtbot.keyClicks(form.fields["ipap"].box.lineEdit(), "24")
    until(qtbot, lambda: form.plain().startswith("Reading the fields"))
    form.submit()
    assert form.plain().startswith("Not recorded yet.")


def test_the_longest_moment_that_people_type_has_room(qtbot, window):
    form = opened(qtbot, window, Key.Key_F12, VitalsForm)
    room = form.time.contentsRect().width() - form.time.textMargins().left() - form.time.textMargins().right()
    assert form.time.fontMetrics().horizontalAdvance("yesterday 23:00") + 28 <= room  # 28: the frame's padding
    form.reject()


def test_vital_signs_start_empty_with_the_last_beside_them(qtbot, window):
    form = opened(qtbot, window, Key.Key_F12, VitalsForm)
    assert all(not f.text for f in form.fields.values())
    assert form.cells["rr"].note.text() == "27/min, 30 min ago"
    assert not form.go.isEnabled()
    qtbot.keyClick(form.fields["rr"].box, Key.Key_Up)
    assert form.fields["rr"].text == "27"  # the first step starts at the last value, and says so
    type_into(qtbot, window, form.fields["rr"], "31")
    qtbot.mouseClick(form.rows["acvpu"].buttons["confusion"], Qt.MouseButton.LeftButton)
    settled(qtbot, window)
    assert "ACVPU: new confusion" in form.plain()
    qtbot.keyClick(form, Key.Key_Return)
    until(qtbot, lambda: record(window).number("rr").v[-1] == 31)
    assert record(window).latest_text("acvpu") == "confusion"


@pytest.mark.parametrize(
    ("typed", "unit", "agrees", "told"),
    [
        ({"ph": "7.30", "paco2": "60", "hco3": "29.2"}, "mmHg", True, "Agrees"),
        ({"ph": "7,30", "paco2": "8.0", "hco3": "29"}, "kPa", True, "Agrees"),
        ({"ph": "7.30", "paco2": "8.4", "hco3": "30"}, "mmHg", False, "may be kPa"),
        ({"ph": "7.30", "paco2": "60", "hco3": "21"}, "mmHg", False, "do not belong together"),
    ],
)
def test_a_gas_is_checked_while_it_is_typed(qtbot, window, typed, unit, agrees, told):
    form = opened(qtbot, window, Key.Key_F11, GasForm)
    form.gas.site.buttons["arterial"].click()
    if unit != form.gas.pressure_unit.key:
        form.gas.pressure_unit.buttons[unit].click()
    for key, text in typed.items():
        type_into(qtbot, window, form.gas.fields[key], text)
    assert told in form.check_plain()
    assert ("do not agree" in form.plain()) is not agrees
    form.reject()


def test_a_gas_in_h_plus_and_kilopascal_is_recorded_as_typed(qtbot, window):
    form = opened(qtbot, window, Key.Key_F11, GasForm)
    form.gas.acid_unit.buttons["H+"].click()
    form.gas.pressure_unit.buttons["kPa"].click()
    assert form.gas.fields["paco2"].box.accessibleName() == "PaCO2, kPa"
    assert form.gas.fields["ph"].box.accessibleName() == "H+, nmol/L"
    for key, text in {"ph": "56", "paco2": "9.1", "pao2": "7.9", "gas_fio2": "28"}.items():
        type_into(qtbot, window, form.gas.fields[key], text)
    assert "Say where the sample is from" in form.plain()
    assert not form.go.isEnabled()
    form.gas.site.buttons["capillary"].click()
    settled(qtbot, window)
    assert "9.1 kPa (68 mmHg)" in form.plain()
    qtbot.keyClick(form, Key.Key_Return)
    until(qtbot, lambda: len(record(window).gases) == 4)
    gas = record(window).gases[-1]
    assert gas.ph == pytest.approx(7.2518, abs=1e-4)  # 9 - log10(56), computed by hand
    assert gas.paco2 == pytest.approx(68.3, abs=0.05)
    assert gas.site == "capillary"
    assert gas.gas_fio2 == 0.28


def test_support_ends_with_its_reason(qtbot, window):
    form = opened(qtbot, window, Key.Key_W, EndForm, Mod.ControlModifier)
    assert not form.go.isEnabled()
    qtbot.keyClick(form.reason.buttons["weaned"], Key.Key_Right)
    qtbot.keyClick(form.reason.buttons["escalated"], Key.Key_Space)
    qtbot.keyClicks(form.remark, "to intensive care, agreed with the consultant")
    settled(qtbot, window)
    assert "escalated" in form.plain()
    qtbot.keyClick(form, Key.Key_Return)
    until(qtbot, lambda: window.feed.answers["bed-7"].figures.support.ended_at is not None)
    assert window.feed.answers["bed-7"].figures.support.end_reason == "escalated"
    assert record(window).latest_text("note") == "to intensive care, agreed with the consultant"


@pytest.mark.parametrize(
    ("key", "kind", "modifier"),
    [
        (Key.Key_F10, SettingsForm, Mod.NoModifier),
        (Key.Key_F11, GasForm, Mod.NoModifier),
        (Key.Key_F12, VitalsForm, Mod.NoModifier),
        (Key.Key_W, EndForm, Mod.ControlModifier),
    ],
)
def test_every_control_has_a_name_and_tab_reaches_record(qtbot, window, key, kind, modifier):
    form = opened(qtbot, window, key, kind, modifier)
    controls = [w for w in form.findChildren(QWidget) if w.focusPolicy() != Qt.FocusPolicy.NoFocus and w.isVisible()]
    assert [type(w).__name__ for w in controls if not spoken(w)] == []
    seen = [form.focusWidget()]
    while seen[0] is not form.focusWidget() or len(seen) == 1:
        qtbot.keyClick(form.focusWidget(), Key.Key_Tab)
        seen.append(form.focusWidget())
        assert len(seen) < 60
    assert [w for w in seen if w is form.time or w is form.leave] == [form.time, form.leave]
    inside = [w for w in seen if form.cards.isAncestorOf(w)]
    assert len(set(inside)) > 1
    form.reject()


def spoken(widget):
    """What a screen reader says; Qt's own inner parts speak through the widget they belong to."""
    text = widget.text() if isinstance(widget, QAbstractButton) else ""
    return widget.accessibleName() or text or widget.objectName().startswith("qt_")


def test_nobody_signed_in_records_nothing(qtbot, window):
    window.model.set_person("")
    head = window.model.session.head
    form = opened(qtbot, window, Key.Key_F12, VitalsForm)
    type_into(qtbot, window, form.fields["rr"], "25")
    qtbot.keyClick(form, Key.Key_Return)
    settled(qtbot, window)
    assert "Nobody is signed in" in form.plain()
    assert window.model.session.head == head
    form.reject()


def test_escape_after_enter_does_not_leave_before_the_answer(qtbot, window):
    """What is recorded is told of and can be undone, however quickly the form was left."""
    form = opened(qtbot, window, Key.Key_F10, SettingsForm)
    qtbot.keyClick(form.fields["ipap"].box, Key.Key_Up)
    settled(qtbot, window)
    qtbot.keyClick(form, Key.Key_Return)
    qtbot.keyClick(form, Key.Key_Escape)
    assert form.isVisible()
    assert "being recorded" in form.plain()
    until(qtbot, lambda: record(window).number("ipap").v[-1] == 19)
    assert "Recorded for Bed 7" in window.strip.plain()
    assert window.strip.can_undo
    assert not window.findChildren(SettingsForm)


def test_a_form_that_was_refused_can_be_left(qtbot, window):
    form = opened(qtbot, window, Key.Key_F10, SettingsForm)
    qtbot.keyClick(form.fields["ipap"].box, Key.Key_Up)
    settled(qtbot, window)
    qtbot.keyClick(form, Key.Key_Return)
    form.refused(Failure(Message("store.read_only")))
    qtbot.keyClick(form, Key.Key_Escape)
    assert not form.isVisible()
    settled(qtbot, window)
