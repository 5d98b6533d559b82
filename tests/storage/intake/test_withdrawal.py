"""A whole file withdrawn: entries by their inverse, samples masked, what lay under them back. It may come again."""

from __future__ import annotations

from pathlib import Path

import pytest

from core.record.instant import MINUTE, iso
from core.record.knowledge import standing
from core.record.message import RecordError
from storage.intake.batch import take_in
from storage.intake.hl7v2 import read_hl7
from storage.intake.said import Said
from storage.intake.withdrawal import withdraw_source
from storage.store import Store
from tests.storage.conftest import NOW
from tests.storage.intake.test_device_tables import START, read, trend
from tests.support.hl7_messages import gas, message, obx

KNOWN = Said(episodes={"WARD-7|0042": "E1"})


def take_hl7(store: Store, path: Path, text: str) -> str:
    path.write_text(text)
    intake = read_hl7(path, now=NOW, said=KNOWN, existing=store)
    take_in(store, intake, by="AB", now=NOW)
    return intake.source.id


def numbers(store: Store, channel: str) -> list[float | None]:
    return [s.entry.number for s in standing(store.entries("E1")) if s.entry.channel == channel]


def test_samples_go_and_what_lay_under_them_comes_back(tmp_path: Path, store: Store) -> None:
    take_in(store, read(trend(tmp_path / "a.csv", 0, 60)), by="AB", now=NOW)
    wrong = read(trend(tmp_path / "b.csv", 30, 90, leak=77), store)
    take_in(store, wrong, by="AB", now=NOW)
    take_in(store, read(trend(tmp_path / "c.csv", 80, 120, leak=44), store), by="AB", now=NOW)
    made = withdraw_source(store, wrong.source.id, by="CD", now=NOW)
    assert (made.sample_spans, made.kept) == (3, 0)
    leak = store.episode("E1").number("leak")
    assert 77.0 not in leak.v.tolist()
    assert leak.v.tolist() == [20.0] * 60 + [44.0] * 40, "the gap from 60 to 80 min is a gap again"
    assert store.verify() == ()
    with pytest.raises(RecordError) as refused:
        withdraw_source(store, wrong.source.id, by="CD", now=NOW)
    assert refused.value.message.key == "intake.withdrawn_already"


def test_the_same_file_may_come_again_after_its_withdrawal(tmp_path: Path, store: Store) -> None:
    path = trend(tmp_path / "a.csv", 0, 60)
    for _ in range(2):
        intake = read(path, store)
        assert intake.sample_count == 180
        assert {d.entry.channel for d in intake.entries} == {"ipap", "leak_definition"}
        take_in(store, intake, by="AB", now=NOW)
        assert store.episode("E1").number("leak").v.size == 60
        withdraw_source(store, intake.source.id, by="CD", now=NOW)
        assert store.samples("E1") == ()
    assert store.verify() == ()


def test_results_go_and_their_corrections_give_back_the_value_before(tmp_path: Path, store: Store) -> None:
    first = take_hl7(store, tmp_path / "a.hl7", message(gas()))
    second = take_hl7(store, tmp_path / "b.hl7", message([obx("ph", "7.25", status="C")], sent="202603280100+0000"))
    withdraw_source(store, second, by="CD", now=NOW)
    assert numbers(store, "ph") == [7.31]
    made = withdraw_source(store, first, by="CD", now=NOW)
    assert numbers(store, "paco2") == []
    assert made.kept == 1, "pH was corrected since, and its correction withdrawn with its own file"
    again = read_hl7(tmp_path / "a.hl7", now=NOW, said=KNOWN, existing=store)
    take_in(store, again, by="AB", now=NOW)
    assert len(numbers(store, "paco2")) == 1
    repeated = read_hl7(tmp_path / "a.hl7", now=NOW, said=KNOWN, existing=store)
    assert repeated.entries == ()
    assert store.verify() == ()


def test_sources_are_listed_with_what_they_brought(tmp_path: Path, store: Store) -> None:
    take_in(store, read(trend(tmp_path / "a.csv", 0, 60)), by="AB", now=NOW)
    take_hl7(store, tmp_path / "b.hl7", message(gas()))
    table, results = store.sources()
    assert (table.kind, table.name, table.by, table.entries, table.samples) == (
        "table",
        "a.csv",
        "AB",
        2,
        180,
    )
    assert (results.kind, results.entries, results.samples) == ("hl7v2", 5, 0)
    assert iso(START + MINUTE)
    with pytest.raises(RecordError) as refused:
        withdraw_source(store, "nobody", by="CD", now=NOW)
    assert refused.value.message.key == "intake.unknown_source"
