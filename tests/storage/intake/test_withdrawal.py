"""A whole file withdrawn: entries by their inverse, samples masked, what lay under them back. It may come again."""

from __future__ import annotations

from itertools import count, permutations
from pathlib import Path

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from core.record.entries import Action, NewEntry
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

NUMBERS = count()
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
    assert numbers(store, "paco2") == numbers(store, "ph") == [], "the correction went with its own file"
    assert (made.kept, made.emptied) == (0, ("E1",))
    again = read_hl7(tmp_path / "a.hl7", now=NOW, said=KNOWN, existing=store)
    take_in(store, again, by="AB", now=NOW)
    assert len(numbers(store, "paco2")) == 1
    assert numbers(store, "ph") == [7.31]
    repeated = read_hl7(tmp_path / "a.hl7", now=NOW, said=KNOWN, existing=store)
    assert repeated.entries == ()
    assert store.verify() == ()


@pytest.mark.parametrize("order", list(permutations(range(3))))
def test_in_whatever_order_results_are_withdrawn_nothing_of_them_comes_back(
    tmp_path: Path, store: Store, order: tuple[int, ...]
) -> None:
    values = ("7.31", "7.25", "7.28")
    ids = [take_hl7(store, tmp_path / "a.hl7", message(gas()))]
    for hour, value in enumerate(values[1:], 1):
        text = message([obx("ph", value, status="C")], sent=f"20260328{hour:02d}30+0000")
        ids.append(take_hl7(store, tmp_path / "b.hl7", text))
    left = list(range(3))
    for i in order:
        withdraw_source(store, ids[i], by="CD", now=NOW)
        left.remove(i)
        assert numbers(store, "ph") == [float(values[k]) for k in left[-1:]]
        with pytest.raises(RecordError):
            withdraw_source(store, ids[i], by="CD", now=NOW)
    assert store.episode("E1").is_empty
    assert store.verify() == ()


def test_what_a_person_corrected_stays_and_what_a_file_deleted_comes_back(tmp_path: Path, store: Store) -> None:
    first = take_hl7(store, tmp_path / "a.hl7", message(gas()))
    deleted = take_hl7(store, tmp_path / "b.hl7", message([obx("ph", "", status="D")], sent="202603280130+0000"))
    assert numbers(store, "ph") == []
    withdraw_source(store, deleted, by="CD", now=NOW)
    assert numbers(store, "ph") == [7.31]
    old = next(s.entry for s in standing(store.entries("E1")) if s.entry.channel == "ph")
    typed = NewEntry(
        "E1", "ph", old.at, 7.3, raw="7.30", by="CD", action=Action.CORRECT, replaces=old.id, reason="typo"
    )
    store.append([typed], by="CD", operation="correct", now=NOW)
    made = withdraw_source(store, first, by="CD", now=NOW)
    assert (numbers(store, "ph"), made.kept, made.emptied) == ([7.3], 1, ())


@settings(max_examples=25, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(spans=st.lists(st.tuples(st.integers(0, 200), st.integers(1, 150)), min_size=1, max_size=4), data=st.data())
def test_in_whatever_order_trends_are_withdrawn_the_others_stand_as_if_alone(
    tmp_path: Path, spans: list[tuple[int, int]], data: st.DataObject
) -> None:
    folder = tmp_path / str(next(NUMBERS))
    folder.mkdir()
    with Store.create(folder / "a.luff", now=NOW) as store:
        ids = []
        for i, (first, length) in enumerate(spans):
            intake = read(trend(folder / "a.csv", first, first + length, leak=20 + i), store)
            take_in(store, intake, by="AB", now=NOW)
            ids.append(intake.source.id)
        left = list(range(len(spans)))
        for i in data.draw(st.permutations(range(len(spans)))):
            withdraw_source(store, ids[i], by="CD", now=NOW)
            left.remove(i)
            model = {START + m * MINUTE: 20.0 + k for k in left for m in range(spans[k][0], sum(spans[k]))}
            found = store.samples("E1", channel="leak")
            assert {int(t): float(v) for b in found for t, v in zip(b.t, b.v, strict=True)} == model
        assert store.episode("E1").is_empty


def test_samples_that_were_moved_since_go_with_their_file(tmp_path: Path, store: Store) -> None:
    intake = read(trend(tmp_path / "a.csv", 0, 60))
    take_in(store, intake, by="AB", now=NOW)
    moved = NewEntry("E1", "leak", START, float(600 * MINUTE), by="AB", action=Action.SHIFT, reason="clock")
    store.append([moved], by="AB", operation="samples moved", now=NOW)
    withdraw_source(store, intake.source.id, by="CD", now=NOW)
    assert store.samples("E1") == ()


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


def test_who_relied_on_a_withdrawn_file_is_named(tmp_path: Path, store: Store) -> None:
    first = read(trend(tmp_path / "a.csv", 0, 60), store)
    take_in(store, first, by="AB", now=NOW)
    grown = read(trend(tmp_path / "grown.csv", 0, 90), store)
    assert (grown.sample_count, grown.repeated_in_store) == (90, 180)
    take_in(store, grown, by="AB", now=NOW)
    made = withdraw_source(store, first.source.id, by="CD", now=NOW)
    assert made.relied_on == ("grown.csv",)
    assert store.samples("E1", channel="leak")[0].t.size == 30, "what was there already was not taken twice"
    again = read(trend(tmp_path / "grown.csv", 0, 90), store)
    take_in(store, again, by="AB", now=NOW)
    assert store.samples("E1", channel="leak")[0].t.size == 90
    assert withdraw_source(store, again.source.id, by="CD", now=NOW).relied_on == ()
