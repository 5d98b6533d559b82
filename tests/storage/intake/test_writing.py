"""How a table is written, said by a person: any delimiter, kept with the mapping, the same for window and command."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import pytest

from app.operations import intake as operations
from app.operations import mapping as mappings
from app.operations.intake import ReadRequest
from app.operations.mapping import LookRequest
from core.record.message import RecordError
from storage.intake.mapping import Mapping, from_text, keep_mapping, kept_mappings, to_text
from storage.intake.proposals import propose
from storage.intake.recognising import recognise
from storage.intake.table import open_table
from storage.intake.writing import Writing, delimiter_said
from storage.store import Store
from tests.storage.conftest import NOW
from tests.support.spreadsheets import ods_rows, sheet_xml, write_ods, write_xlsx

ROWS = (("Time", "pH", "Remark"), ("2026-03-28T00:10", "7.31", "sp\u00e4t"), ("2026-03-28T01:10", "7.33", "calm"))


def table(path: Path, mark: str = ",", encoding: str = "utf-8", before: str = "") -> Path:
    path.write_bytes((before + "".join(mark.join(row) + "\n" for row in ROWS)).encode(encoding))
    return path


def answered(path: Path, said: Writing, name: str = "analyser") -> Mapping:
    made = propose(open_table(path, said), "UTC").mapping
    return replace(made, name=name, written=said, decimal=".", written_by="person")


def read(store: Store, path: Path, **said: object) -> list[tuple[str, str]]:
    intake = operations.read(store, "AB", NOW, ReadRequest(path, episode="E1", **said)).value  # type: ignore[arg-type]
    assert not intake.refusals
    return [(d.entry.channel, d.entry.raw or d.entry.words or "") for d in intake.entries]


@pytest.mark.parametrize("mark", list("^~:!#%&*+=/\\_ \u00a6\u00a7"))
def test_any_character_may_stand_between_columns(tmp_path: Path, store: Store, mark: str) -> None:
    path = tmp_path / "a.csv"
    path.write_text("".join(mark.join(f'"{c}"' if mark in c else c for c in row) + "\n" for row in ROWS))
    said = Writing(delimiter=mark)
    assert open_table(path, said).header == ROWS[0]
    keep_mapping(store, answered(path, said))
    assert [v for c, v in read(store, path) if c == "ph"] == ["7.31", "7.33"], "it is recognised by what was said"


@pytest.mark.parametrize(("text", "mark"), [("tab", "\t"), ("Semicolon", ";"), ("^", "^"), ("\t", "\t"), (" ", " "),
                                            ("", ""), ("space", " ")])  # fmt: skip
def test_a_delimiter_is_typed_or_named(text: str, mark: str) -> None:
    assert delimiter_said(text) == mark


@pytest.mark.parametrize("said", [Writing(delimiter="ab"), Writing(delimiter="7"), Writing(delimiter='"'),
                                  Writing(delimiter="\n"), Writing("no such"), Writing("base64"),
                                  Writing(header_line=-1)])  # fmt: skip
def test_what_cannot_be_is_refused_in_words(tmp_path: Path, said: Writing) -> None:
    with pytest.raises(RecordError) as refused:
        open_table(table(tmp_path / "a.csv"), said)
    assert refused.value.message.key in ("table.delimiter", "table.encoding_unknown", "table.header_line")
    assert refused.value.message.values["accepted"]


def test_encoding_and_header_are_kept_with_a_mapping_and_known_again(tmp_path: Path, store: Store) -> None:
    before = "Ward 4;x;y\nunit;pH;text\n"
    said = Writing("cp437", header_line=3)
    first = table(tmp_path / "a.csv", ";", "cp437", before)
    assert open_table(first).header != ROWS[0], "by looking alone the header is found elsewhere"
    mapping = answered(first, said)
    keep_mapping(store, mapping)
    assert kept_mappings(store)["analyser"] == mapping
    assert from_text(to_text(mapping)) == mapping
    found = recognise(first, kept_mappings(store))
    assert (found.mapping, found.said) == (mapping, said)
    assert ("note", "sp\u00e4t") in read(store, first)
    assert ("note", "sp\u00e4t") in read(store, first, mapping_name="analyser")
    other = table(tmp_path / "b.csv", ";", "utf-8", before)
    assert ("note", "sp\u00e4t") in read(store, other, said=Writing("utf-8")), "what is said now beats what is kept"
    doubtful = operations.read(store, "AB", NOW, ReadRequest(other, episode="E1")).value
    assert [d.message.key for d in doubtful.doubts] == ["table.encoding_assumed"], "UTF-8 is hardly CP437"


def test_a_mapping_without_it_is_kept_as_programs_before_read_it() -> None:
    assert '"format":1' in to_text(Mapping("a", ("x",)))
    assert '"format":2' in to_text(Mapping("a", ("x",), written=Writing("cp437")))
    assert from_text('{"name": "a", "header": ["x"], "format": 1}').written == Writing()


def test_a_sheet_that_was_chosen_is_opened_next_time(tmp_path: Path, store: Store) -> None:
    rows = [list(r) for r in ROWS]
    path = write_ods(tmp_path / "a.ods", ods_rows([["Title", "", ""], *rows]))
    said = Writing(header_line=2)
    keep_mapping(store, answered(path, said))
    assert [v for c, v in read(store, path) if c == "ph"] == ["7.31", "7.33"]
    xlsx = write_xlsx(tmp_path / "a.xlsx", sheet_xml([["Title"], *rows]))
    assert [v for c, v in read(store, xlsx) if c == "ph"] == ["7.31", "7.33"]


def test_where_several_mappings_fit_a_person_chooses(tmp_path: Path, store: Store) -> None:
    path = table(tmp_path / "a.csv")
    one = answered(path, Writing(), "one")
    keep_mapping(store, one)
    keep_mapping(store, replace(one, name="same as one"))
    assert read(store, path), "two that read it alike are no question"
    keep_mapping(store, replace(one, name="two", written_by="device"))
    with pytest.raises(RecordError) as refused:
        read(store, path)
    assert refused.value.message.key == "mapping.several_fit"
    assert read(store, path, mapping_name="one")
    looked = mappings.look(store, "AB", NOW, LookRequest(path)).value
    assert (looked.recognised, set(looked.several)) == (None, {"one", "same as one", "two"})
    chosen = mappings.look(store, "AB", NOW, LookRequest(path, by="two")).value
    assert chosen.recognised is not None
    assert chosen.recognised.name == "two"
    given = mappings.look(store, "AB", NOW, LookRequest(path, given=one)).value
    assert given.recognised == one
