"""A log file against what the store holds: rows it has, values it corrected, labels in use, recording times, ids."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

from core.record.entries import Action
from core.record.instant import parse
from storage.intake.batch import take_in
from storage.intake.log_csv import read_log_csv
from storage.intake.withdrawal import withdraw_source
from storage.store import Store
from tests.storage.conftest import NOW
from tests.support.log_rows import AT, FULL, Reader, refused


def test_rows_that_the_store_has_are_counted_and_skipped(read: Reader, store: Store) -> None:
    rows = [f"E1,{AT},rr,20,/min,AB,", f"E1,{AT},leak,24,L/min,device,"]
    take_in(store, read(*rows), by="AB", now=NOW)
    again = read(*rows, existing=store)
    assert (again.repeated_in_store, again.entries, again.chunks) == (2, (), ())
    assert take_in(store, again, by="AB", now=NOW) is None
    more = read(*rows, f"E1,{AT},hr,80,/min,AB,", existing=store)
    assert (more.repeated_in_store, len(more.entries)) == (2, 1)


def test_a_value_corrected_in_the_store_does_not_come_back(read: Reader, store: Store) -> None:
    row = f"E1,{AT},rr,20,/min,AB,"
    receipt = take_in(store, read(row), by="AB", now=NOW)
    assert receipt is not None
    (entry,) = store.entries("E1")
    from dataclasses import fields

    from core.record.entries import NewEntry

    given = {f.name: getattr(entry, f.name) for f in fields(NewEntry)}
    fixed = NewEntry(**{**given, "number": 26.0, "action": Action.CORRECT, "replaces": entry.id})
    store.append([fixed], by="AB", operation="correct", now=NOW)
    assert read(row, existing=store).repeated_in_store == 1


def test_an_open_episode_of_the_same_label_is_said(read: Reader, store: Store) -> None:
    def shared(*rows: str, existing: Store | None = None) -> list[tuple[int, str | float | None]]:
        told = read(*rows, existing=existing).doubts
        return [(d.line, d.message.values["episode"]) for d in told if d.message.key == "row.label_shared"]

    one, other = f"E1,{AT},label,Bed 3,,AB,", f"E2,{AT},label, bed  3,,AB,"
    assert shared(one, other, f"E3,{AT},label,Bed 4,,AB,") == [(3, "E1")]
    assert shared(one, f"E1,{AT},stopped,,,AB,", other) == []  # the first has left the bed
    take_in(store, read(one), by="AB", now=NOW)
    assert shared(other, existing=store) == [(2, "E1")]
    assert shared(f"E1,{AT},label,Bed 3,,CD,", existing=store) == []
    take_in(store, read(f"E1,{AT},stopped,,,AB,"), by="AB", now=NOW)
    assert shared(other, existing=store) == []


def test_another_value_than_the_store_has_for_the_moment_is_taken_and_marked(read: Reader, store: Store) -> None:
    first = read(f"E1,{AT},ph,7.30,,AB,", f"E1,{AT},rr,20,/min,AB,", f"E1,{AT},mode,CPAP,,AB,")
    store.append([d.entry for d in first.entries], by="AB", operation="log", now=NOW)
    again = read(
        f"E1,{AT},ph,7.24,,CD,", f"E1,{AT},rr,20,/min,CD,", f"E1,{AT},mode,BPAP-S,,CD,", f"E1,{AT},hr,90,,CD,",
        f"E2,{AT},ph,7.24,,CD,", existing=store,
    )  # fmt: skip
    assert [(d.line, d.message.key) for d in again.doubts] == [(2, "doubt.second_value"), (4, "doubt.second_value")]
    assert again.doubts[0].message.values["first"] == 7.30
    marked = {d.entry.channel for d in again.entries if d.entry.doubt}
    assert marked == {"ph", "mode"}
    assert {d.entry.doubt for d in again.entries if d.entry.episode == "E2"} == {""}
    assert not again.refusals


def test_recording_times_stand_in_an_empty_imported_store(read: Reader, make_store: Callable[..., Store]) -> None:
    store = make_store(imported=True)
    intake = read(
        f"E1,{AT},rr,20,/min,AB,,2026-03-28T01:10:00+00:00,a,,,,",
        f"E1,{AT},rr,26,/min,AB,,2026-03-28T01:40:00+00:00,b,a,correct,misread,Europe/Oslo",
        header=FULL,
    )
    assert refused(intake) == []
    take_in(store, intake, by="AB", now=NOW)
    assert store.episode("E1").number("rr").v.tolist() == [26]
    before = store.head_known_at(parse("2026-03-28T01:39:00+00:00"))
    assert store.episode("E1", before).number("rr").v.tolist() == [20]
    assert [e.zone for e in store.entries("E1")] == ["UTC", "Europe/Oslo"]
    assert store.verify() == ()


def test_recording_times_are_only_claims_in_another_store(read: Reader, store: Store) -> None:
    take_in(store, read(f"E1,{AT},rr,20,/min,AB,,2026-03-28T01:10:00+00:00,,,,,", header=FULL), by="AB", now=NOW)
    assert [e.recorded_at for e in store.entries("E1")] == [NOW]
    with store._opened.database.read() as c:
        from sqlalchemy import text

        assert c.execute(text("select source_recorded_at from entry")).scalar() == parse("2026-03-28T01:10:00+00:00")


def test_an_id_that_is_no_uuid_is_found_again_by_a_later_file(read: Reader, store: Store) -> None:
    take_in(store, read(f"E1,{AT},rr,20,/min,AB,,,r1,,,,", header=FULL), by="AB", now=NOW)
    again = read(f"E1,{AT},rr,20,/min,AB,,,r1,,,,", header=FULL, existing=store)
    assert again.repeated_in_store == 1
    fixed = read(f"E1,{AT},rr,22,/min,AB,,,r2,r1,correct,,", header=FULL, existing=store)
    take_in(store, fixed, by="AB", now=NOW)
    assert store.episode("E1").number("rr").v.tolist() == [22]


def test_a_file_with_ids_may_come_again_after_its_withdrawal_and_only_then(tmp_path: Path, store: Store) -> None:
    first, second = (f"8cccf3e7-077c-4bf5-951d-8315573c14d{n}" for n in (5, 6))
    path = tmp_path / "a.csv"
    path.write_text(
        "episode,at,channel,value,unit,by,note,id,replaces,action\n"
        f"E1,2026-03-27T22:00:00+00:00,rr,24,/min,AB,,{first},,assert\n"
        f"E1,2026-03-27T22:00:00+00:00,rr,26,/min,AB,,{second},{first},correct\n"
    )
    for _ in range(3):
        intake = read_log_csv(path, now=NOW, existing=store)
        assert (intake.refusals, len(intake.entries), intake.repeated_in_store) == ((), 2, 0)
        take_in(store, intake, by="AB", now=NOW)
        assert store.episode("E1").number("rr").v.tolist() == [26.0]
        again = read_log_csv(path, now=NOW, existing=store)
        assert (again.entries, again.repeated_in_store) == ((), 2)
        made = withdraw_source(store, intake.source.id, by="CD", now=NOW)
        assert (made.entries, made.emptied) == (1, ("E1",)), "its own correction brings nothing back"
    assert store.verify() == ()
