"""Any table by mapping: what is asked, what is proposed, what is recorded, cell by cell."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from datetime import datetime
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from core.record.instant import iso, parse
from core.record.message import RecordError
from core.record.samples import Flags, Times
from storage.intake.batch import take_in
from storage.intake.byte_fields import fields_of
from storage.intake.findings import Intake
from storage.intake.mapping import (
    ColumnUse,
    LongUse,
    Mapping,
    TimeUse,
    fits,
    from_text,
    keep_mapping,
    kept_mapping,
    kept_mappings,
    open_questions,
    to_text,
)
from storage.intake.proposals import propose
from storage.intake.recognising import recognise
from storage.intake.table import open_table
from storage.intake.table_preview import preview
from storage.intake.table_reading import read_table
from storage.intake.table_rows import Answers
from storage.intake.table_times import fitting_orders, read_time
from storage.intake.time_columns import read_times
from storage.store import Store
from tests.storage.conftest import NOW
from tests.support.spreadsheets import date, ods_rows, sheet_xml, write_ods, write_xlsx

ZONE = "Europe/Oslo"
GERMAN = (
    "Bett 4\n\nProbe am;pH;pCO2;pO2 (kPa);Notiz\n27.03.2026 22:10;7,31;8,1;7,9;wach\n"
    "27.03.2026 23:40;7,40;7,2;;müde\n"
)
Write = Callable[..., Path]


@pytest.fixture
def write(tmp_path: Path) -> Write:
    def run(text: str, encoding: str = "utf-8", name: str = "table.csv") -> Path:
        path = tmp_path / name
        path.write_bytes(text.encode(encoding))
        return path

    return run


def answered(path: Path, **units: str) -> Mapping:
    """The proposal with the given columns' units answered."""
    mapping = propose(open_table(path), ZONE).mapping
    for column, unit in units.items():
        use = next(c for c in mapping.columns if c.column == column)
        mapping = mapping.with_column(column, use.channel, unit)
    return mapping


def values(intake: Intake) -> list[tuple[str, str, str, float | None]]:
    return [(d.entry.channel, iso(d.entry.at), f"{d.entry.raw} {d.entry.raw_unit}".strip(), d.entry.number)
            for d in intake.entries]  # fmt: skip


@pytest.mark.parametrize("encoding", ["utf-8", "utf-8-sig", "utf-16", "utf-16-le", "utf-16-be", "cp1252"])
@pytest.mark.parametrize("ends", ["\n", "\r\n", "\r"])
def test_any_encoding_and_line_end_reads_the_same(write: Write, encoding: str, ends: str) -> None:
    path = write(GERMAN.replace("\n", ends), encoding)
    table = open_table(path)
    assert table.header == ("Probe am", "pH", "pCO2", "pO2 (kPa)", "Notiz")
    mapping = answered(path, pCO2="kPa")
    mapping = mapping.with_column("Notiz", "note")
    intake = read_table(path, mapping, now=NOW, answers=Answers("E1"))
    assert not intake.refusals
    assert values(intake)[0] == ("ph", "2026-03-27T21:10:00+00:00", "7,31 pH", 7.31)
    assert [d.entry.words for d in intake.entries if d.entry.channel == "note"] == ["wach", "müde"]
    assert [d.entry.decimals for d in intake.entries if d.entry.channel == "ph"] == [2, 2], "7,40 stays 7,40"
    assumed = [d.message.key for d in intake.doubts]
    assert assumed == (["table.encoding_assumed"] if encoding == "cp1252" else [])


@pytest.mark.parametrize("mark", [",", ";", "\t", "|"])
def test_any_delimiter(write: Write, mark: str) -> None:
    text = "time,pH,note\n2026-03-27 22:10,7.31,calm\n2026-03-27 23:10,7.33,calm\n".replace(",", mark)
    path = write(text)
    assert open_table(path).dialect.delimiter == mark
    assert len(read_table(path, answered(path), now=NOW, answers=Answers("E1")).entries) == 4


def test_a_gas_pressure_without_unit_is_asked_with_a_hint_and_never_guessed(write: Write) -> None:
    path = write(GERMAN)
    proposal = propose(open_table(path), ZONE)
    use = next(c for c in proposal.mapping.columns if c.column == "pCO2")
    assert (use.channel, use.unit) == ("paco2", "")
    assert proposal.hints["pCO2"].key == "proposal.likely_kpa"
    assert next(c for c in proposal.mapping.columns if c.column == "pO2 (kPa)").unit == "kPa"
    asked = open_questions(proposal.mapping, episode_given=True, has_offsets=False)
    assert [m.key for m in asked] == ["mapping.unit"]
    with pytest.raises(RecordError) as refused:
        read_table(path, proposal.mapping, now=NOW, answers=Answers("E1"))
    assert refused.value.message.key == "mapping.unit"


@pytest.mark.parametrize(
    ("cells", "hint"),
    [
        ("40.1 55.0", "proposal.likely_mmhg"),
        ("4.0 12.0", "proposal.likely_kpa"),
        ("14 45", "proposal.either_unit"),
    ],
)
def test_hints_of_gas_pressures(write: Write, cells: str, hint: str) -> None:
    low, high = cells.split()
    path = write(f"time,pCO2\n2026-03-27 22:10,{low}\n2026-03-27 22:20,{high}\n")
    assert propose(open_table(path)).hints["pCO2"].key == hint


def test_every_open_question_keeps_a_table_from_being_read(write: Write) -> None:
    path = write("time,leak (L/min),pH\n03/04/2025 10:00,20,7.3\n04/05/2025 10:00,21,7.3\n")
    mapping = propose(open_table(path)).mapping
    asked = {m.key for m in open_questions(mapping, episode_given=False, has_offsets=False)}
    assert asked == {"mapping.time_order", "mapping.time_zone", "mapping.episode", "mapping.leak"}
    for change, key in (
        (replace(mapping, written_by=""), "mapping.writer"),
        (replace(mapping, decimal=""), "mapping.decimal"),
        (replace(mapping, columns=()), "mapping.nothing"),
        (replace(mapping, time=TimeUse()), "mapping.no_time"),
        (mapping.with_column("time", "ph", "pH"), "mapping.twice"),
        (mapping.with_column("pH", "pulse ox"), "mapping.channel_unknown"),
    ):
        assert key in {m.key for m in open_questions(change, episode_given=True, has_offsets=True)}


def test_day_and_month_that_may_be_swapped_are_asked() -> None:
    assert fitting_orders(["03/04/2026 10:00", "01/02/2026 10:00"]) == ("dmy", "mdy")
    assert fitting_orders(["03/14/2026 10:00"]) == ("mdy",)
    assert fitting_orders(["2026-03-04 10:00"]) == ("iso",)


def test_a_cell_that_is_wrong_is_named_and_the_rest_stays_readable(write: Write) -> None:
    path = write(
        "time,pH,pCO2 (mmHg),note\n"
        "2026-03-27 22:10,7.31,61,ok\n"
        "2026-03-27 22:20,9.31,x,=HYPERLINK(1)\n"
        '2026-03-27 22:30,"7,31",> 60,-2 to bed\n'
        "2026-03-27,7.31,60,a\n"
        "1900-01-01 00:00,7.31,60,a\n"
        "2099-01-01 00:00,7.31,60,a\n"
        "2026-03-27 22:40,7.31\n"
        "2026-03-27 22:50,7.31,60,b,extra\n"
    )
    intake = read_table(path, replace(answered(path), decimal="."), now=NOW, answers=Answers("E1"))
    found = {(r.line, r.column, r.message.key) for r in intake.refusals}
    assert found == {
        (3, "pH", "value.past_hard_limit"), (3, "pCO2 (mmHg)", "value.not_a_number"), (3, "note", "value.formula"),
        (4, "pH", "value.other_mark"), (4, "pCO2 (mmHg)", "value.comparator"),
        (5, "time", "time.date_only"), (6, "time", "instant.out_of_range"), (7, "time", "instant.in_future"),
        (9, "", "row.columns"),
    }  # fmt: skip
    assert ("note", "-2 to bed") in {(d.entry.channel, d.entry.raw) for d in intake.entries}
    assert intake.refused_rows == 6


def test_refused_cells_are_left_out_only_when_a_person_says_so(write: Write, store: Store) -> None:
    path = write("time,pH,pCO2 (mmHg)\n2026-03-27 22:10,7.31,61\n2026-03-27 22:20,7.32,x\n")
    intake = read_table(path, answered(path), now=NOW, answers=Answers("E1"), existing=store)
    with pytest.raises(RecordError):
        take_in(store, intake, by="AB", now=NOW)
    assert store.head() == 0
    take_in(store, intake, by="AB", now=NOW, without_refused=True)
    (source,) = store.sources()
    assert source.facts["left_out_values"] == "3 pCO2 (mmHg)"
    assert source.facts["time_order"] == "iso"
    assert len(store.entries("E1")) == 3


def test_taken_twice_it_brings_nothing(write: Write, store: Store) -> None:
    path = write("time,pH,rr,by\n2026-03-27 22:10,7.31,22,AB\n")
    mapping = replace(answered(path), written_by="person")
    take_in(store, read_table(path, mapping, now=NOW, answers=Answers("E1")), by="AB", now=NOW)
    again = read_table(path, mapping, now=NOW, answers=Answers("E1"), existing=store)
    assert (again.entries, again.repeated_in_store) == ((), 2)
    assert take_in(store, again, by="AB", now=NOW) is None
    assert {e.by for e in store.entries("E1")} == {"AB"}


def test_a_long_table_names_its_channels_and_units(write: Write) -> None:
    path = write(
        "Patient;Taken;Test;Result;Unit\nE1;2026-03-27 22:10;pCO2;8,1;kPa\nE2;2026-03-27 22:11;pH;7,31;\n"
        "E1;2026-03-27 22:10;pCO2;8,1;psi\nE1;2026-03-27 22:10;Sodium;140;mmol/L\nE1;2026-03-27 22:12;pO2;60;\n"
    )
    proposal = propose(open_table(path), ZONE)
    long = proposal.mapping.long
    assert long == LongUse("Test", "Result", "Unit", {"pCO2": "paco2", "pH": "ph", "Sodium": "", "pO2": "pao2"}, {})
    intake = read_table(path, replace(proposal.mapping, written_by="person"), now=NOW)
    assert [(d.entry.episode, d.entry.channel, d.entry.raw_unit) for d in intake.entries] == [
        ("E1", "paco2", "kPa"), ("E2", "ph", "pH"),
    ]  # fmt: skip
    assert {(r.line, r.message.key) for r in intake.refusals} == {(4, "unit.unknown"), (6, "unit.missing")}


def test_a_word_of_a_long_table_that_the_mapping_does_not_name_is_refused(write: Write) -> None:
    path = write("time,test,value\n2026-03-27 22:10,pH,7.31\n")
    mapping = replace(answered(path), written_by="person")
    path = write("time,test,value\n2026-03-27 22:10,pH,7.31\n2026-03-27 22:20,Cl,101\n")
    intake = read_table(path, mapping, now=NOW, answers=Answers("E1"))
    assert [(r.line, r.message.key) for r in intake.refusals] == [(3, "mapping.word_unknown")]


def test_xlsx_and_ods_read_like_the_same_table_as_text(tmp_path: Path) -> None:
    """28-Mar-2026 00:30 is day 46109.0208333 of a spreadsheet's count."""
    rows = [
        ["Sampled", "pH", "pCO2 (kPa)"],
        [date(46109 + 0.5 / 24), 7.4, 8.1],
        [date(46109 + 1 / 24), 7.31, 7.0],
    ]
    xlsx = write_xlsx(tmp_path / "gases.xlsx", sheet_xml([["Ward 4"], [], *rows]))
    table = open_table(xlsx)
    assert (table.dialect.header_line, table.dialect.sheet, table.sheets) == (3, "Gases", ("Gases",))
    intake = read_table(table, answered(xlsx), now=NOW, answers=Answers("E1"))
    assert not intake.refusals
    assert values(intake)[0] == ("ph", "2026-03-27T23:30:00+00:00", "7.4 pH", 7.4)
    texts: list[list[str | float]] = [["Sampled", "pH", "pCO2 (kPa)"], ["2026-03-28 00:30", 7.4, 8.1]]
    ods = write_ods(tmp_path / "gases.ods", ods_rows([*texts, ["2026-03-28 01:00", 7.31, 7]]))
    assert values(read_table(ods, answered(ods), now=NOW, answers=Answers("E1"))) == values(intake)


def test_a_mapping_is_kept_and_recognised_whatever_the_order_of_columns(write: Write, store: Store) -> None:
    path = write(GERMAN)
    mapping = replace(answered(path, pCO2="kPa"), name="analyser")
    keep_mapping(store, mapping)
    assert kept_mapping(store, "analyser") == mapping
    turned = ("Notiz", "ph", "PCO2", "pO2 (kPa)", "Probe  am")
    assert fits(kept_mappings(store)["analyser"], turned)
    assert not fits(mapping, ("pH",))
    assert recognise(path, kept_mappings(store)).mapping == mapping
    with pytest.raises(RecordError) as refused:
        kept_mapping(store, "other")
    assert refused.value.message.values["accepted"] == "analyser"
    assert from_text(to_text(mapping)) == mapping
    for text, key in (
        ("{", "mapping.unreadable"),
        ('{"format": 99}', "mapping.newer"),
        ("[]", "mapping.unreadable"),
    ):
        with pytest.raises(RecordError) as refused:
            from_text(text)
        assert refused.value.message.key == key


def test_a_mapping_whose_column_is_gone_says_which(write: Write) -> None:
    path = write("time,pH\n2026-03-27 22:10,7.31\n")
    mapping = answered(path).with_column("lactate", "lactate", "mmol/L")
    with pytest.raises(RecordError) as refused:
        read_table(path, mapping, now=NOW, answers=Answers("E1"))
    assert (refused.value.message.key, refused.value.message.values["column"]) == (
        "mapping.column_gone",
        "lactate",
    )


def test_the_preview_shows_what_will_be_recorded_and_what_is_open(write: Write) -> None:
    path = write(GERMAN)
    table = open_table(path)
    rows = preview(table, propose(table, ZONE).mapping, Answers("E1"))
    first = {c.channel: c for c in rows[0].cells}
    assert iso(rows[0].at or 0) == "2026-03-27T21:10:00+00:00"
    assert first["ph"].reading is not None
    assert first["paco2"].problem is not None
    assert first["paco2"].problem.key == "mapping.unit"
    intake = read_table(path, answered(path, pCO2="kPa"), now=NOW, answers=Answers("E1"))
    shown = {(c.channel, r.at, c.reading.number) for r in preview(table, answered(path, pCO2="kPa"), Answers("E1"))
             for c in r.cells if c.reading is not None}  # fmt: skip
    assert shown == {(d.entry.channel, d.entry.at, d.entry.number) for d in intake.entries}


def test_a_trend_with_remarks_of_a_person_asks_who_wrote_it(write: Write) -> None:
    rows = "".join(f"2026-03-27 01:{m:02d},2{m % 10},{'calm' if m == 3 else ''}\n" for m in range(40))
    assert propose(open_table(write("Time,Leak (L/min),Remark\n" + rows)), ZONE).mapping.written_by == ""
    assert propose(open_table(write("Time,Leak (L/min)\n" + rows.replace(",calm", "").replace(",\n", "\n"))),
                   ZONE).mapping.written_by == "device"  # fmt: skip
    assert propose(open_table(write("Time,Leak (L/min),Remark\n2026-03-27 01:00,20,calm\n")),
                   ZONE).mapping.written_by == "person"  # fmt: skip


# times


def at_once(texts: list[str], use: TimeUse) -> tuple[Times, Flags]:
    return read_times(fields_of([[x] for x in texts]), 0, None, np.arange(len(texts)), use)


@given(
    st.datetimes(min_value=datetime(1995, 1, 1), max_value=datetime(2090, 1, 1)),  # noqa: DTZ001
    st.sampled_from(["Europe/Oslo", "America/New_York", "Asia/Kolkata", "Australia/Lord_Howe", "UTC"]),
    st.sampled_from(["iso", "dmy", "mdy", "ymd"]),
    st.sampled_from(["", ".%f"]),
)
def test_times_at_once_are_times_one_by_one(moment, zone, order, fraction) -> None:  # type: ignore[no-untyped-def]
    form = {"iso": "%Y-%m-%d", "dmy": "%d.%m.%Y", "mdy": "%m/%d/%Y", "ymd": "%Y/%m/%d"}[order]
    texts = [moment.strftime(f"{form} %H:%M:%S{fraction}")] * 3
    use = TimeUse("t", order=order, zone=zone)
    t, good = at_once(texts, use)
    try:
        expected = read_time(texts[0], use)
    except RecordError:
        assert not good.any(), "an hour of a change of the clock is left to the slow way"
        return
    assert (t[good] == expected).all()


def test_hours_around_a_change_of_the_clock() -> None:
    texts = ["2025-10-26 01:59:59", "2025-10-26 02:30:00", "2025-10-26 03:00:00", "2025-03-30 02:30:00"]
    use = TimeUse("t", order="iso", zone=ZONE)
    t, good = at_once(texts, use)
    assert good.tolist() == [True, False, True, False]
    assert np.array_equal(t[good], [parse("2025-10-25T23:59:59Z"), parse("2025-10-26T02:00:00Z")])
    for text, key in ((texts[1], "time.repeated"), (texts[3], "time.skipped")):
        with pytest.raises(RecordError) as refused:
            read_time(text, use)
        assert refused.value.message.key == key
    first, second = (read_time(texts[1], replace(use, repeated=w)) for w in ("first", "second"))
    assert second - first == 3_600_000_000


@pytest.mark.parametrize(
    ("text", "order", "expected"),
    [
        ("28-Mar-2026 02:10", "dmy", "2026-03-28T01:10:00+00:00"),
        ("March 28 2026 02:10 PM", "mdy", "2026-03-28T13:10:00+00:00"),
        ("28.03.26 12:05 AM", "dmy", "2026-03-27T23:05:00+00:00"),
        ("2026-03-28T02:10:00Z", "iso", "2026-03-28T02:10:00+00:00"),
        ("2026-03-28 02:10:00,5-0400", "iso", "2026-03-28T06:10:00.500000+00:00"),
        ("1774663800", "epoch_s", "2026-03-28T02:10:00+00:00"),
        ("1774663800250", "epoch_ms", "2026-03-28T02:10:00.250000+00:00"),
    ],
)
def test_ways_of_writing_a_time(text: str, order: str, expected: str) -> None:
    assert iso(read_time(text, TimeUse("t", order=order, zone=ZONE))) == expected


def test_date_and_clock_in_two_columns(write: Write) -> None:
    path = write("Datum;Uhrzeit;pH\n27.03.2026;22:10;7,31\n28.03.2026;00:10;7,32\n")
    mapping = answered(path)
    assert (mapping.time.date, mapping.time.clock) == ("Datum", "Uhrzeit")
    found = values(read_table(path, mapping, now=NOW, answers=Answers("E1")))
    assert [v[1] for v in found] == ["2026-03-27T21:10:00+00:00", "2026-03-27T23:10:00+00:00"]


def test_column_uses_may_be_changed_one_by_one() -> None:
    mapping = Mapping(columns=(ColumnUse("a", "ph", "pH"),))
    assert mapping.with_column("a", "").used == ()
    assert mapping.with_column("b", "rr", "/min").used[1] == ColumnUse("b", "rr", "/min")


def test_a_text_of_an_old_program_is_told_from_one_of_windows(write: Write, tmp_path: Path) -> None:
    """A byte that is no letter of cp1252 (0x81 is u with two dots in cp437) rules it out; both stay an assumption."""
    for encoding, text in (("cp437", "müde"), ("cp1252", "müde"), ("cp1252", "€ 5")):
        path = tmp_path / "a.csv"
        path.write_bytes(f"time,pH,note\n2026-03-28 00:30,7.4,{text}\n".encode(encoding))
        table = open_table(path)
        assert (table.dialect.encoding, table.dialect.encoding_is_sure) == (encoding, False)
        assert table.column("note") == (text,)
