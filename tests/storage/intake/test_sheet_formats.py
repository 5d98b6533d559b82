"""A number of a spreadsheet keeps the decimals that its cell shows; where nobody can tell them, that is said."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import pytest

from app.words import sentence
from storage.intake.findings import Intake
from storage.intake.mapping import ColumnUse, Mapping, TimeUse
from storage.intake.sheet_formats import PERCENT, decimals_as_shown, decimals_of_format, number_as_shown
from storage.intake.table import open_table
from storage.intake.table_reading import read_table
from storage.intake.table_rows import Answers
from tests.storage.conftest import NOW
from tests.support.spreadsheets import ods_rows, sheet_xml, shown, write_ods, write_xlsx

TIMES = [f"2026-03-28 0{n}:00" for n in range(3)]
MAPPING = Mapping(
    "m", (), (ColumnUse("pH", "ph", "pH"), ColumnUse("pCO2", "paco2", "kPa"), ColumnUse("SpO2", "spo2", "%")),
    TimeUse("time", order="iso", zone="UTC"), decimal=".", written_by="person",
)  # fmt: skip


def read(path: Path) -> Intake:
    return read_table(path, MAPPING, now=NOW, answers=Answers("E1"))


def raws(intake: Intake, channel: str) -> list[tuple[str, int | None]]:
    return [(d.entry.raw, d.entry.decimals) for d in intake.entries if d.entry.channel == channel]


def test_xlsx_numbers_keep_the_decimals_their_cells_show(tmp_path: Path) -> None:
    rows = [["time", "pH", "pCO2", "SpO2"],
            [TIMES[0], shown(7.4, "0.00"), shown(8.0, "0.0"), shown(0.95, "0%")],
            [TIMES[1], shown(7.3, "0.00"), shown(7.25, "0.0"), shown(0.915, "0%")]]  # fmt: skip
    intake = read(write_xlsx(tmp_path / "a.xlsx", sheet_xml(rows)))
    assert not intake.refusals
    assert raws(intake, "ph") == [("7.40", 2), ("7.30", 2)]
    assert raws(intake, "paco2") == [("8.0", 1), ("7.25", 2)], "what a cell hides is not cut off"
    assert raws(intake, "spo2") == [("95", 0), ("91.5", 1)], "per cent as the cell shows it"
    assert not [d for d in intake.doubts if d.message.key == "sheet.precision_unknown"]


def test_a_number_without_a_format_is_taken_and_its_column_named(tmp_path: Path) -> None:
    rows = [["time", "pH", "pCO2", "SpO2"], [TIMES[0], 7.4, 8.0, 95], [TIMES[1], 7.31, shown(7.0, "0.0"), 91]]
    intake = read(write_xlsx(tmp_path / "a.xlsx", sheet_xml(rows)))
    assert raws(intake, "ph") == [("7.4", 1), ("7.31", 2)]
    found = [d for d in intake.doubts if d.message.key == "sheet.precision_unknown"]
    assert [(d.line, d.column) for d in found] == [(1, "pH"), (1, "pCO2")]
    assert "7.40" in sentence(found[0].message)
    sure = [["time", "pH", "pCO2", "SpO2"], [TIMES[0], 7.41, 8.1, 95]]
    assert not read(write_xlsx(tmp_path / "b.xlsx", sheet_xml(sure))).doubts, "7.41 can be nothing shorter"


def test_a_sheet_that_begins_in_a_corner_of_its_own(tmp_path: Path) -> None:
    rows = [[None, None, None, None, None], [None, "time", "pH", "pCO2", "SpO2"],
            [None, TIMES[0], shown(7.4, "0.00"), shown(8.0, "0.0"), shown(0.95, "0%")]]  # fmt: skip
    intake = read(write_xlsx(tmp_path / "a.xlsx", sheet_xml(rows)))
    assert raws(intake, "ph") == [("7.40", 2)]
    assert [d.entry.channel for d in intake.entries] == ["ph", "paco2", "spo2"]
    bad = [*rows, [None, TIMES[1], shown(9.4, "0.00"), 8.0, 95]]
    found = read(write_xlsx(tmp_path / "b.xlsx", sheet_xml(bad))).refusals
    assert [(r.line, r.column) for r in found] == [(4, "pH")], "lines are the spreadsheet's own"


def ods_number(value: float, text: str, kind: str = "float", more: str = "") -> str:
    return (f'<table:table-cell office:value-type="{kind}" office:value="{value}"{more}>'
            f"<text:p>{text}</text:p></table:table-cell>")  # fmt: skip


def ods_text(text: str) -> str:
    return f'<table:table-cell office:value-type="string"><text:p>{text}</text:p></table:table-cell>'


def test_ods_numbers_keep_the_decimals_of_the_text_beside_them(tmp_path: Path) -> None:
    rows = [
        ods_text(TIMES[0]) + ods_number(7.4, "7,40") + ods_number(8, "8,0 kPa")
        + ods_number(0.95, "95 %", "percentage"),
        ods_text(TIMES[1]) + ods_number(7.3, "7.30") + ods_number(8.25, "8.3") + ods_number(91, "91"),
        ods_text(TIMES[2]) + ods_number(7.3, "7.30") + '<table:table-cell/>' + ods_number(90, "90"),
    ]  # fmt: skip
    body = ods_rows([["time", "pH", "pCO2", "SpO2"]])
    body += "".join(f"<table:table-row>{row}</table:table-row>" for row in rows)
    intake = read(write_ods(tmp_path / "a.ods", body))
    assert not intake.refusals
    assert raws(intake, "ph") == [("7.40", 2), ("7.30", 2), ("7.30", 2)]
    assert raws(intake, "paco2") == [("8.0", 1), ("8.25", 2)]
    assert raws(intake, "spo2") == [("95", 0), ("91", 0), ("90", 0)]


def test_repeated_rows_and_cells_of_ods(tmp_path: Path) -> None:
    """Two equal readings stand as one row repeated; two equal columns as one cell repeated."""
    head = ods_rows([["time", "pH", "pCO2", "SpO2"]])
    again = (f'<table:table-row table:number-rows-repeated="2">{ods_text(TIMES[0])}'
             + ods_number(7.4, "7.40", more=' table:number-columns-repeated="2"') + "</table:table-row>")  # fmt: skip
    table = open_table(write_ods(tmp_path / "a.ods", head + again))
    assert [row[1:3] for _line, row in table.first] == [("7.40", "7.40"), ("7.40", "7.40")]


def test_the_preview_shows_what_will_be_recorded(tmp_path: Path) -> None:
    rows = [["time", "pH"], [TIMES[0], shown(7.4, "0.00")]]
    assert open_table(write_xlsx(tmp_path / "a.xlsx", sheet_xml(rows))).first == ((2, (TIMES[0], "7.40")),)


def test_a_long_table_of_a_sheet(tmp_path: Path) -> None:
    from storage.intake.mapping import LongUse

    rows = [["time", "test", "value"], [TIMES[0], "pH", shown(7.4, "0.00")], [TIMES[0], "pCO2", 8.0]]
    long = LongUse("test", "value", "", {"pH": "ph", "pCO2": "paco2"}, {"pH": "pH", "pCO2": "kPa"})
    intake = read_table(write_xlsx(tmp_path / "a.xlsx", sheet_xml(rows)), replace(MAPPING, columns=(), long=long),
                        now=NOW, answers=Answers("E1"))  # fmt: skip
    assert raws(intake, "ph") == [("7.40", 2)]
    assert [d.message.key for d in intake.doubts] == ["sheet.precision_unknown"]


@pytest.mark.parametrize(
    ("code", "decimals"),
    [
        ("0", 0), ("0.000", 3), ("#,##0.00", 2), ('0.0" kPa"', 1), ("0.00;[Red]-0.00", 2), ("[>=100]0;0.0", 0),
        ("_-* #,##0.0_-", 1), ("0.0#", 1), ("0.0%", PERCENT + 1), ("General", -1), ("@", -1), ("0.00E+00", -1),
        ("# ?/?", -1), ("hh:mm", -1), ("0.0,", -1), ("", -1), ('"7"', -1), ("\\a0.0", 1),
    ],
)  # fmt: skip
def test_number_formats(code: str, decimals: int) -> None:
    assert decimals_of_format(code) == decimals


@pytest.mark.parametrize(("text", "value", "decimals"), [
    ("7.40", 7.4, 2), ("1.234,50", 1234.5, 2), ("1'234", 1234.0, 0), ("12,345", 12.345, 3), ("07:30", 0.3125, -1),
    ("-1.0", -1.0, 1), ("about", 1.0, -1), ("7.4", 8.4, -1)])  # fmt: skip
def test_numbers_as_shown_by_text(text: str, value: float, decimals: int) -> None:
    assert decimals_as_shown(text, value) == decimals


def test_noise_of_floating_point_is_not_taken_for_hidden_decimals() -> None:
    assert number_as_shown(7.3999999999999995, 2) == "7.40"
    assert number_as_shown(0.1 + 0.2, 1) == "0.3"
    assert number_as_shown(0.285, PERCENT) == "28.5"
