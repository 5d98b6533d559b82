"""A form that was being filled in when a program ended is offered again, every field; nothing of it is recorded."""

import json
import sys

import pytest

from app.dialogs.correct import Act, CorrectDialog
from app.forms.begin_form import BeginForm
from app.forms.end_form import EndForm
from app.forms.gas_form import GasForm
from app.forms.settings_form import SettingsForm
from app.forms.typed import fields_of
from app.forms.vitals_form import VitalsForm
from storage.store import Store
from tests.support.crashing import crash_while
from tests.support.open_window import make_store, open_window, settled, until

TYPED = """
def typed():
    log = window.doers.log
    if not window.feed.is_ready or window.model.runner.is_busy:
        return
    if log.form is None:
        window.select("bed-3")
        log.do_gas_form()
        log.form.gas.site.choose("arterial")
        log.form.gas.pressure_unit.choose("kPa")
        log.form.gas._units_chosen()
        log.form.time.setText("05:10")
        log.form.gas.fields["ph"].set_text("7.3")
        log.form.gas.fields["paco2"].set_text("8.2")
        log.form.edited()
    elif window.keeping.drafts.forms._kept:
        os._exit(9)  # as a crash ends it: nothing is closed
"""


def drafts(path):
    with Store.open(path, read_only=True) as store:
        return [json.loads(t) for t in store.drafts().values()]


@pytest.mark.skipif(sys.platform == "win32", reason="ends a program as POSIX does")
def test_a_form_that_was_being_filled_in_outlives_a_crash(qtbot, tmp_path):
    path = make_store(tmp_path / "ward.luffmark")
    crash_while(TYPED, path)
    assert [d["form"] for d in drafts(path)] == ["GasForm"]
    with Store.open(path) as store:
        head = store.head()
    with open_window(qtbot, path) as window:
        notices = window.keeping.notices
        until(qtbot, lambda: "Blood gas, Bed 3" in notices.plain())
        assert "Nothing of it is recorded" in notices.plain()
        notices.ways["form_again"].click()
        form = window.doers.log.form
        assert isinstance(form, GasForm)
        assert form.isVisible()
        assert form.patient.record.key == "bed-3"
        assert form.time.text() == "05:10"
        assert form.gas.site.key == "arterial"
        assert form.gas.pressure_unit.key == "kPa"
        assert form.gas.fields["paco2"].accessibleName().endswith("kPa")
        assert [form.gas.fields[k].text for k in ("ph", "paco2", "pao2")] == ["7.3", "8.2", ""]
        settled(qtbot, window)
        assert "7.3" in form.plain()
        assert not notices.isVisible()
        assert window.model.session.head == head
        assert len(drafts(path)) == 1  # this window's own now
        form.reject()
        settled(qtbot, window)
        assert drafts(path) == []


CORRECTED = """
def typed():
    log = window.doers.log
    if not window.feed.is_ready or window.model.runner.is_busy:
        return
    if log.form is None:
        window.select("bed-3")
        log.do_correct()
        dialog = log.form
        dialog.list.setCurrentItem(dialog.list.topLevelItem(2))
        dialog.act.setCurrentIndex(1)
        dialog.reason.setText("read off the wrong mon")
    elif window.keeping.drafts.forms._kept:
        os._exit(9)
"""


@pytest.mark.skipif(sys.platform == "win32", reason="ends a program as POSIX does")
def test_a_reason_half_typed_into_a_correction_outlives_a_crash(qtbot, tmp_path):
    """It comes back for the very value that it was typed for."""
    path = make_store(tmp_path / "ward.luffmark")
    crash_while(CORRECTED, path)
    (kept,) = drafts(path)
    assert kept["form"] == "CorrectDialog"
    with Store.open(path) as store:
        head = store.head()
    with open_window(qtbot, path) as window:
        notices = window.keeping.notices
        until(qtbot, lambda: "Correct or withdraw, Bed 3" in notices.plain())
        notices.ways["form_again"].click()
        dialog = window.doers.log.form
        assert isinstance(dialog, CorrectDialog)
        assert dialog.reason.text() == "read off the wrong mon"
        assert dialog.act.currentData() == Act.WITHDRAW
        assert dialog._entry().id == kept["typed"]["entry"]
        assert dialog.list.indexOfTopLevelItem(dialog.list.currentItem()) == 2
        settled(qtbot, window)
        assert window.model.session.head == head
        dialog.reject()
        settled(qtbot, window)
        assert drafts(path) == []


def test_a_value_that_is_only_looked_at_is_no_draft(qtbot, tmp_path):
    path = make_store(tmp_path / "ward.luffmark")
    with open_window(qtbot, path) as window:
        window.select("bed-7")
        window.doers.log.do_correct()
        dialog = window.doers.log.form
        for row in range(3):
            dialog.list.setCurrentItem(dialog.list.topLevelItem(row))
            assert dialog.typed() == {}
        dialog.put({"reason": "misread", "entry": "gone since"})
        assert dialog.reason.text() == "misread"
        assert "stands no more" in dialog.wrong.text()
        dialog.reject()
        window.doers.log.do_device_span()
        span = window.doers.log.form
        span.put({"start": "03:10", "reason": "on nobody"})
        assert span.typed() == {"start": "03:10", "reason": "on nobody"}
        settled(qtbot, window)
        span.reject()
        settled(qtbot, window)


def opened(window, kind):
    window.doers.log.openers()[kind.__name__]()
    return window.doers.log.form


FILLED = {
    VitalsForm: {"fields.rr": "31", "rows.acvpu": "confusion"},
    GasForm: {"gas.site": "venous", "gas.acid_unit": "H+", "gas.fields.ph": "55", "time": "05:00"},
    SettingsForm: {"fields.ipap": "20", "interface": "total face mask"},
    EndForm: {"reason": "weaned", "remark": "to ward 4"},
    BeginForm: {"words.label": "Bed 9", "indication": "copd", "running.state": "running", "running.mode": "BPAP-ST",
                "running.fields.ipap": "16", "gas.fields.ph": "7.2", "sex": "female", "ceiling": "full"},
}  # fmt: skip


@pytest.mark.parametrize("kind", FILLED, ids=lambda kind: kind.__name__)
def test_every_kind_of_form_gives_back_just_what_was_typed(qtbot, tmp_path, kind):
    with open_window(qtbot, make_store(tmp_path / "ward.luffmark")) as window:
        window.select("bed-7")
        form = opened(window, kind)
        assert form.typed() == {}
        wanted = {k: v for k, v in FILLED[kind].items() if k != "interface" or _has(form, v)}
        assert wanted.keys() <= fields_of(form).keys()
        form.put(wanted)
        assert form.typed() == wanted
        said = form.request()
        assert said is not None
        settled(qtbot, window)
        form.reject()
        again = opened(window, kind)
        again.put(wanted)
        assert again.typed() == wanted
        assert again.request() == said
        settled(qtbot, window)
        again.reject()


def _has(form, text):
    return form.interface.findData(text) >= 0


def test_fields_of_a_later_version_are_passed_over(qtbot, tmp_path):
    with open_window(qtbot, make_store(tmp_path / "ward.luffmark")) as window:
        form = opened(window, VitalsForm)
        form.put({"fields.rr": "31", "fields.unheard": "9", "rows.acvpu": "unheard", "time.more": "1"})
        assert form.typed() == {"fields.rr": "31"}
        settled(qtbot, window)
        form.reject()


def test_a_recorded_form_leaves_no_draft_and_one_open_at_the_end_is_kept(qtbot, tmp_path):
    path = make_store(tmp_path / "ward.luffmark")
    with open_window(qtbot, path) as window:
        form = opened(window, VitalsForm)
        form.put({"fields.rr": "24"})
        window.keeping.drafts.keep()
        settled(qtbot, window)
        assert len(drafts(path)) == 1
        until(qtbot, lambda: form.preview is not None)
        head = window.model.session.head
        form.go.click()
        until(qtbot, lambda: window.model.session.head > head)
        settled(qtbot, window)
        assert drafts(path) == []
        form = opened(window, VitalsForm)
        form.put({"fields.hr": "99"})
    assert [d["typed"] for d in drafts(path)] == [{"fields.hr": "99"}]


def test_what_another_window_fills_in_stays_its_own(qtbot, tmp_path):
    path = make_store(tmp_path / "ward.luffmark")
    with open_window(qtbot, path) as first:
        form = opened(first, VitalsForm)
        form.put({"fields.rr": "24"})
        first.keeping.drafts.keep()
        settled(qtbot, first)
        with open_window(qtbot, path) as second:
            settled(qtbot, second)
            assert second.keeping.notices.plain() == ""
        assert len(drafts(path)) == 1
        form.reject()
        settled(qtbot, first)
