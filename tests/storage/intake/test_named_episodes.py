"""Whose the rows of a table are: a bed's name is no key, and one whose support ended may not be the same patient."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import pytest

from core.record.entries import NewEntry
from core.record.instant import HOUR, MINUTE, iso
from storage.intake.batch import take_in
from storage.intake.findings import Intake
from storage.intake.log_csv import read_log_csv
from storage.intake.proposals import propose
from storage.intake.table import open_table
from storage.intake.table_reading import read_table
from storage.intake.table_rows import Answers
from storage.store import Store
from tests.storage.conftest import NOW

AT = NOW - 2 * HOUR


@pytest.fixture
def ward(tmp_path: Path) -> Store:
    """Bed 4 is key B4; Bed 5 is key B5 and has ended."""
    store = Store.create(tmp_path / "w.luffmark", now=NOW - 9 * HOUR)
    logged = []
    for key, label in (("B4", "Bed 4"), ("B5", "Bed 5")):
        logged += [
            NewEntry(key, "label", NOW - 8 * HOUR, words=label, raw=label),
            NewEntry(key, "mode", NOW - 8 * HOUR, words="BPAP-ST", raw="BPAP-ST"),
        ]
    end = NOW - 3 * HOUR
    logged.append(NewEntry("B5", "ended_at", end, float(end), raw=iso(end)))
    store.append(logged, by="AB", operation="test", now=NOW - 2 * HOUR)
    return store


def read(ward: Store, tmp_path: Path, *rows: str, named: dict[str, str] | None = None) -> Intake:
    """A table with a column of beds; each row is `bed,ph`, at one moment after another."""
    path = tmp_path / "gases.csv"
    lines = [f"{iso(AT + n * MINUTE)},{row}" for n, row in enumerate(rows)]
    path.write_text("\n".join(["Time,Bed,pH", *lines]) + "\n")
    mapping = propose(open_table(path)).mapping
    mapping = replace(mapping, written_by="person", decimal=".")
    assert mapping.episode_column == "Bed"
    return read_table(path, mapping, now=NOW, answers=Answers(named=named or {}), existing=ward)


def test_a_bed_s_name_is_asked_about_and_begins_no_second_record(ward: Store, tmp_path: Path) -> None:
    found = read(ward, tmp_path, " bed  4,7.19", "B4,7.21", "bed 4,7.23")
    assert [(r.line, r.message.key) for r in found.refusals] == [(2, "table.names_a_bed"), (4, "table.names_a_bed")]
    assert found.refusals[0].message.values["episodes"] == "B4"
    assert set(found.unknown_patients) == {"bed  4", "bed 4"}
    assert found.episodes == ("B4",)


def test_what_a_person_says_of_a_name_counts_for_this_file_alone(ward: Store, tmp_path: Path) -> None:
    found = read(ward, tmp_path, "Bed 4,7.19", named={"Bed 4": "B4"})
    assert not found.refusals
    assert found.episodes == ("B4",)
    assert found.new_episodes == ()
    assert found.source.facts["named.Bed 4"] == "B4"
    take_in(ward, found, by="AB", now=NOW)
    assert read(ward, tmp_path, "Bed 4,7.25").unknown_patients == ("Bed 4",)


def test_a_person_may_say_that_it_is_another_patient_and_is_told_of_the_name(ward: Store, tmp_path: Path) -> None:
    found = read(ward, tmp_path, "Bed 4,7.19", named={"Bed 4": "Bed 4"})
    assert found.new_episodes == ("Bed 4",)
    assert [(d.line, d.message.key, d.message.values["episodes"]) for d in found.doubts] == [
        (2, "row.key_is_label", "B4")
    ]


def test_a_name_that_nobody_bears_begins_an_episode_and_is_said_to(ward: Store, tmp_path: Path) -> None:
    found = read(ward, tmp_path, "Bed 9,7.19", "B4,7.30")
    assert found.episodes == ("Bed 9", "B4")
    assert found.new_episodes == ("Bed 9",)
    assert not found.doubts


def test_the_label_of_an_ended_episode_is_free_again(ward: Store, tmp_path: Path) -> None:
    assert read(ward, tmp_path, "Bed 5,7.30").new_episodes == ("Bed 5",)


def test_rows_after_the_end_of_support_are_in_doubt_once(ward: Store, tmp_path: Path) -> None:
    found = read(ward, tmp_path, "B5,7.30", "B5,7.31", "B4,7.32")
    assert [(d.line, d.message.key) for d in found.doubts] == [(2, "table.after_end")]
    assert found.doubts[0].message.values["ended_at"] == NOW - 3 * HOUR


@pytest.mark.parametrize("name", ["", "x" * 201])
def test_a_name_that_is_no_key_is_refused(ward: Store, tmp_path: Path, name: str) -> None:
    found = read(ward, tmp_path, f"{name},7.30")
    assert [r.message.key for r in found.refusals] == ["entry.no_episode"]
    assert found.unknown_patients == ()


def test_a_log_file_whose_key_is_a_bed_s_name_is_in_doubt(ward: Store, tmp_path: Path) -> None:
    path = tmp_path / "log.csv"
    path.write_text(f"episode,at,channel,value,unit,by,note\nBed 4,{iso(AT)},rr,30,/min,AB,\n")
    found = read_log_csv(path, now=NOW, existing=ward)
    assert found.new_episodes == ("Bed 4",)
    assert [(d.line, d.message.key) for d in found.doubts] == [(2, "row.key_is_label")]
