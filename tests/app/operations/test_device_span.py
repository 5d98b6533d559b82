"""Device samples are left out or moved by an entry, and come back when that is taken back."""

import numpy as np
import pytest

from app.cli import main
from app.operations.correction import UndoRequest, undo
from app.operations.device_span import SpanRequest, counted, listed, record
from core.record.instant import HOUR, MINUTE, iso
from core.record.message import RecordError
from core.record.samples import DeviceSamples
from storage.store import Store
from tests.support.open_window import NOW, make_store

START = NOW - 5 * HOUR


@pytest.fixture
def path(tmp_path):
    made = make_store(tmp_path / "ward.luffmark")
    with Store.open(made) as store:
        t = START + np.arange(240, dtype=np.int64) * MINUTE
        blocks = [DeviceSamples("bed-7", key, "dev", t, np.arange(240.0), 0) for key in ("leak", "vte")]
        store.append([], by="dev", operation="take", now=NOW, samples=blocks)
    return made


@pytest.fixture
def store(path):
    with Store.open(path) as opened:
        yield opened


def span(channels=("leak",), first=60, last=89, minutes=0.0, reason="off the mask"):
    return SpanRequest("bed-7", channels, START + first * MINUTE, START + last * MINUTE, reason, minutes)


def leak(store):
    (block,) = [b for b in store.samples("bed-7") if b.channel == "leak"]
    return block


def test_a_span_does_not_count_and_comes_back(store):
    assert counted(store, "AB", NOW, span()).value == 30
    made = record(store, "AB", NOW, span()).value
    assert leak(store).t.size == 210
    assert not ((leak(store).t >= START + 60 * MINUTE) & (leak(store).t <= START + 89 * MINUTE)).any()
    assert {c.channel: c.count for c in listed(store, "AB", NOW, "bed-7").value.channels} == {"leak": 210, "vte": 240}
    (said,) = listed(store, "AB", NOW, "bed-7").value.spans
    assert (said.channels, said.reason, said.by, said.minutes) == (("leak",), "off the mask", "AB", 0.0)
    undo(store, "CD", NOW, UndoRequest("bed-7", said.ids))
    assert leak(store).v.tolist() == list(range(240))
    assert listed(store, "AB", NOW, "bed-7").value.spans == ()
    assert store.verify() == ()
    assert made.ids == said.ids


def test_a_clock_that_was_off_is_put_right_for_all_its_channels(store):
    request = span(("leak", "vte"), 0, 239, -60.0, "clock an hour fast")
    record(store, "AB", NOW, request)
    for block in store.samples("bed-7"):
        assert block.t[0] == START - HOUR
        assert block.v.tolist() == list(range(240))
    (said,) = listed(store, "AB", NOW, "bed-7").value.spans
    assert (said.channels, said.minutes) == (("leak", "vte"), -60.0)
    undo(store, "AB", NOW, UndoRequest("bed-7", said.ids))
    assert leak(store).t[0] == START


@pytest.mark.parametrize(("request_", "key"), [
    (span(reason=" "), "correction.no_reason"),
    (span(channels=()), "device.no_channel"),
    (span(first=90, last=60), "entry.span_backwards"),
    (span(first=500, last=600), "device.nothing_there"),
    (span(channels=("mv",)), "device.nothing_there"),
    (span(first=0, last=239, minutes=120.0), "device.into_the_future"),
    (span(minutes=99_999.0), "device.moved_too_far"),
    (span(channels=("ph",)), "device.nothing_there"),
])  # fmt: skip
def test_what_makes_no_sense_is_refused_and_nothing_is_kept(store, request_, key):
    head = store.head()
    with pytest.raises(RecordError, match=key):
        record(store, "AB", NOW, request_)
    assert store.head() == head


def test_the_command_line_does_the_same(path, capsys):
    ends = (iso(START + 60 * MINUTE), iso(START + 89 * MINUTE))
    where = ["--store", str(path), "--by", "AB", "correct", "bed-7"]
    assert main([*where, "--leave-out", "leak,vte", "--span", *ends, "--reason", "off the mask"]) == 0
    assert "60 samples of leak, vte" in capsys.readouterr().out
    assert main([*where, "--move-by", "leak:-30", "--span", iso(START), iso(NOW), "--reason", "clock"]) == 0
    capsys.readouterr()
    with Store.open(path) as store:
        assert leak(store).t[0] == START - 30 * MINUTE
        assert leak(store).t.size == 210
    assert main([*where, "--move-by", "leak", "--span", *ends, "--reason", "x"]) == 2
    assert main([*where, "--leave-out", "leak", "--reason", "x"]) == 2
    assert main([*where, "--leave-out", "leak", "--span", *ends, "--reason", " "]) == 1
