"""Device samples are left out, moved and taken back from the window."""

import numpy as np
import pytest

from app.dialogs.device_span import MOVE, DeviceSpanDialog
from core.record.instant import HOUR, MINUTE
from core.record.samples import DeviceSamples
from storage.store import Store
from tests.support.open_window import NOW, make_store, open_window, settled, until


@pytest.fixture
def path(tmp_path):
    made = make_store(tmp_path / "ward.luffmark")
    with Store.open(made) as store:
        t = NOW - 3 * HOUR + np.arange(180, dtype=np.int64) * MINUTE
        blocks = [DeviceSamples("bed-7", key, "dev", t, np.full(180, 20.0), 0) for key in ("leak", "vte")]
        store.append([], by="dev", operation="take", now=NOW, samples=blocks)
    return made


def opened(qtbot, window):
    window.select("bed-7")
    window.actions_by_key["device_span"].trigger()
    dialog = next(d for d in window.findChildren(DeviceSpanDialog) if d.isVisible())
    settled(qtbot, window)
    return dialog


def tick(dialog, *names):
    from PySide6.QtCore import Qt

    for n in range(dialog.channels.count()):
        item = dialog.channels.item(n)
        if item.text().startswith(names):
            item.setCheckState(Qt.CheckState.Checked)


def counts(window):
    record = window.feed.answers["bed-7"].record
    return {key: int(record.number(key).t.size) for key in ("leak", "vte")}


def test_a_span_is_left_out_and_taken_back(qtbot, path):
    with open_window(qtbot, path) as window:
        dialog = opened(qtbot, window)
        assert "180 samples" in dialog.channels.item(0).text()
        dialog.go.click()
        assert "Tick a channel" in dialog.wrong.text()
        tick(dialog, "Leak")
        qtbot.keyClicks(dialog.start, "03:00")
        qtbot.keyClicks(dialog.end, "03:29")
        until(qtbot, lambda: dialog.meant.text() == "30 samples are meant.")
        dialog.go.click()
        until(qtbot, lambda: "needs its reason" in dialog.wrong.text())
        qtbot.keyClicks(dialog.reason, "mask on the pillow")
        dialog.go.click()
        dialog.reject()
        assert "being recorded" in dialog.wrong.text()  # and it stays: nobody would know what came of it
        until(qtbot, lambda: dialog.spans.count() == 1)
        assert "mask on the pillow" in dialog.spans.item(0).text()
        until(qtbot, lambda: counts(window) == {"leak": 150, "vte": 180})
        dialog.spans.setCurrentRow(0)
        dialog.back.click()
        until(qtbot, lambda: dialog.spans.count() == 0)
        until(qtbot, lambda: counts(window) == {"leak": 180, "vte": 180})
        dialog.reject()


def test_a_wrong_clock_is_put_right_and_ctrl_z_takes_it_back(qtbot, path):
    with open_window(qtbot, path) as window:
        dialog = opened(qtbot, window)
        dialog.every.click()
        assert set(dialog.chosen()) == {"leak", "vte"}
        dialog.act.choose(MOVE)
        dialog.act.chosen.emit(MOVE)
        assert dialog.minutes.isVisible()
        qtbot.keyClicks(dialog.start, "02:30")
        qtbot.keyClicks(dialog.end, "05:30")
        qtbot.keyClicks(dialog.minutes, "soon")
        dialog.go.click()
        assert "cannot be off by soon" in dialog.wrong.text()
        dialog.minutes.clear()
        qtbot.keyClicks(dialog.minutes, "-60")
        qtbot.keyClicks(dialog.reason, "summer time")
        dialog.go.click()
        until(qtbot, lambda: dialog.spans.count() == 1)
        dialog.reject()
        first = NOW - 4 * HOUR
        until(qtbot, lambda: int(window.feed.answers["bed-7"].record.number("leak").t[0]) == first)
        undo = window.actions_by_key["undo"]
        undo.trigger()
        assert "that device samples belong to another time (Leak, Tidal volume, expired)?" in window.strip.plain()
        until(qtbot, lambda: window.strip.settle.is_over)
        undo.trigger()
        until(qtbot, lambda: int(window.feed.answers["bed-7"].record.number("leak").t[0]) == first + HOUR)


def test_a_patient_without_a_device_says_so(qtbot, tmp_path):
    with open_window(qtbot, make_store(tmp_path / "ward.luffmark")) as window:
        dialog = opened(qtbot, window)
        assert "No device has written" in dialog.wrong.text()
        assert not dialog.go.isEnabled()
        dialog.reject()
