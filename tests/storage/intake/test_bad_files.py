"""Hostile files: refused in words, memory bounded, the store untouched."""

from __future__ import annotations

import struct
import tracemalloc
import zipfile
from collections.abc import Callable
from pathlib import Path

import pytest

from app.operations import intake as operations
from app.operations.intake import ReadRequest
from app.operations.outcome import CancelledError, watched
from app.words import sentence
from storage.intake.file_kinds import FileKind, kind_of
from storage.intake.findings import Intake
from storage.intake.mapping import ColumnUse, Mapping, TimeUse
from storage.intake.table_reading import read_table
from storage.intake.table_rows import Answers
from storage.intake.writing import Writing
from storage.store import Store
from tests.storage.conftest import NOW
from tests.support.hl7_messages import gas, message
from tests.support.spreadsheets import ods_rows, sheet_xml, write_ods, write_xlsx

ROWS = [["time", "pH"], ["2026-03-28 00:30", 7.4], ["2026-03-28 01:00", 7.31]]
MAPPING = Mapping("m", ("time", "pH"), (ColumnUse("pH", "ph", "pH"),), TimeUse("time", order="iso", zone="UTC"),
                  decimal=".", written_by="person")  # fmt: skip
MEMORY = 160 << 20


def read(path: Path, store: Store | None = None) -> Intake:
    tracemalloc.start()
    try:
        return read_table(path, MAPPING, now=NOW, answers=Answers("E1"), existing=store)
    finally:
        peak = tracemalloc.get_traced_memory()[1]
        tracemalloc.stop()
        assert peak < MEMORY, f"{peak >> 20} MB"


def refused(path: Path) -> str:
    """The key by which a file is refused as a whole, having words."""
    intake = read(path)
    assert not intake.whole
    assert (intake.entries, intake.chunks) == ((), ())
    (found,) = intake.refusals
    assert found.message.key not in sentence(found.message), "a refusal has words"
    return found.message.key


def test_the_good_one_is_taken(tmp_path: Path) -> None:
    assert len(read(write_xlsx(tmp_path / "a.xlsx", sheet_xml(ROWS))).entries) == 2
    assert len(read(write_ods(tmp_path / "a.ods", ods_rows(ROWS))).entries) == 2


def bomb(path: Path) -> Path:
    """300 MB of spaces in 300 kB."""
    return write_xlsx(path, sheet_xml(ROWS), parts={"xl/sharedStrings.xml": b" " * (300 << 20)})


def laughs(path: Path) -> Path:
    entities = '<!ENTITY a0 "ha">' + "".join(f'<!ENTITY a{n} "{f"&a{n - 1};" * 10}">' for n in range(1, 10))
    return write_xlsx(path, f'<?xml version="1.0"?><!DOCTYPE x [{entities}]>' + sheet_xml([["&a9;"]]))


def lying_size(path: Path) -> Path:
    """An archive whose directory says a part is 10 bytes long; 300 MB come out of it."""
    bomb(path)
    data = bytearray(path.read_bytes())
    for mark, at in ((b"PK\x01\x02", 24), (b"PK\x03\x04", 22)):
        start = -1
        while (start := data.find(mark, start + 1)) >= 0:
            if struct.unpack_from("<I", data, start + at)[0] == 300 << 20:
                struct.pack_into("<I", data, start + at, 10)
    path.write_bytes(data)
    return path


HOSTILE: list[tuple[str, Callable[[Path], Path], str]] = [
    ("zip bomb", bomb, "sheet.too_large"),
    ("billion laughs", laughs, "sheet.document_type"),
    ("a size that is a lie", lying_size, "sheet.damaged"),
    ("nested", lambda p: write_xlsx(p, "<a>" * 10_000 + "</a>" * 10_000), "sheet.too_deep"),
    (
        "a lone cell in the far corner",
        lambda p: write_xlsx(p, sheet_xml(ROWS, extra='<row r="1048576"><c r="XFD1048576"><v>1</v></c></row>')),
        "sheet.too_many_cells",
    ),
    ("no address", lambda p: write_xlsx(p, sheet_xml(ROWS).replace('r="A1"', 'r="A0"')), "sheet.damaged"),
    ("merged cells", lambda p: write_xlsx(p, sheet_xml(ROWS, merged="A2:A3")), "sheet.merged"),
    ("not XML", lambda p: write_xlsx(p, "<worksheet><sheetData>"), "sheet.damaged"),
    (
        "no sheet",
        lambda p: write_xlsx(p, sheet_xml(ROWS), parts={"xl/workbook.xml": b"<workbook/>"}),
        "sheet.unknown",
    ),
    ("cut short", lambda p: _cut(write_xlsx(p, sheet_xml(ROWS))), "sheet.damaged"),
    (
        "many parts",
        lambda p: write_xlsx(p, sheet_xml(ROWS), parts={f"x/{n}": b"" for n in range(3000)}),
        "sheet.too_many_parts",
    ),
]


def _cut(path: Path) -> Path:
    path.write_bytes(path.read_bytes()[:-200])
    return path


@pytest.mark.parametrize(("make", "key"), [h[1:] for h in HOSTILE], ids=[h[0] for h in HOSTILE])
def test_hostile_xlsx(tmp_path: Path, make: Callable[[Path], Path], key: str) -> None:
    assert refused(make(tmp_path / "a.xlsx")) == key


REPEATED = (
    '<table:table-row table:number-rows-repeated="1048576"><table:table-cell table:number-columns-repeated="16384" '
    'office:value-type="string"><text:p>x</text:p></table:table-cell></table:table-row>'
)
SPANNED = (
    '<table:table-row><table:table-cell table:number-columns-spanned="2" office:value-type="string">'
    "<text:p>2026-03-28 00:30</text:p></table:table-cell></table:table-row>"
)


@pytest.mark.parametrize(("more", "key"), [(REPEATED, "sheet.too_many_cells"), (SPANNED, "sheet.merged")])
def test_hostile_ods(tmp_path: Path, more: str, key: str) -> None:
    assert refused(write_ods(tmp_path / "a.ods", ods_rows(ROWS) + more)) == key


def test_an_empty_tail_repeated_to_the_edge_is_no_bomb(tmp_path: Path) -> None:
    tail = '<table:table-row table:number-rows-repeated="1048500"><table:table-cell table:number-columns-repeated="16384"/></table:table-row>'  # noqa: E501
    assert len(read(write_ods(tmp_path / "a.ods", ods_rows(ROWS) + tail)).entries) == 2


def test_a_password(tmp_path: Path) -> None:
    path = write_xlsx(tmp_path / "a.xlsx", sheet_xml(ROWS))
    data = bytearray(path.read_bytes())
    for mark, at in ((b"PK\x01\x02", 8), (b"PK\x03\x04", 6)):
        start = -1
        while (start := data.find(mark, start + 1)) >= 0:
            data[start + at] |= 1
    path.write_bytes(data)
    assert refused(path) == "sheet.encrypted"


@pytest.mark.parametrize(
    ("data", "key"),
    [
        (b"", "file.empty"),
        (b"time,pH\n", "table.no_rows"),
        (b"time,pH\n" + b"x" * 3_000_000, "line.too_long"),
        (b'time,pH\n2026-03-28 00:30,"7.4\n', "row.quotes"),
        (b"time,pH\n\x00\x01\x02", "file.binary"),
        (b"\xd0\xcf\x11\xe0 old", "sheet.old_format"),
        (b"time,pH\n" + b"2026-03-28 00:30,7.4\n" * 20_000 + b"\x00\n", "file.binary"),
        (b"time,pH\n" + b"2026-03-28 00:30,7.4\n" * 20_000 + b"\xff\n", "file.encoding"),
        ((",".join(f"c{n}" for n in range(600)) + "\n" + "1," * 600 + "\n").encode(), "table.too_wide"),
        (b"PK\x03\x04 no archive", "sheet.damaged"),
    ],
)
def test_hostile_text(tmp_path: Path, data: bytes, key: str) -> None:
    path = tmp_path / "a.csv"
    path.write_bytes(data)
    assert refused(path) == key


def peak_of(path: Path, mapping: Mapping | None = None) -> tuple[Intake, int]:
    """What a file gives by the way that the program reads it, and the memory that Python took for it."""
    with Store.create(path.with_suffix(".luff"), now=NOW) as store:
        tracemalloc.start()
        try:
            intake = operations.read(
                store, "AB", NOW, ReadRequest(path, mapping, episode="E1" if mapping else "")
            ).value
            return intake, tracemalloc.get_traced_memory()[1]
        finally:
            tracemalloc.stop()
            assert store.head() == 0


RESOURCE = b'{"resourceType": "Observation", "status": "final", "x": %s}'
GREETING = b"MSH|^~\\&|A|L|L|W|202603280030+0000||ORU^R01|1|P|2.5.1\rPID|1||0042\rOBR|1\r"
TEN_THOUSAND_DEEP = b"[" * 10_000 + b"]" * 10_000


@pytest.mark.parametrize(
    ("name", "data", "key"),
    [
        ("a.json", RESOURCE % TEN_THOUSAND_DEEP, "json.too_deep"),
        ("a.json", RESOURCE % (b'{"a":' * 10_000 + b"1" + b"}" * 10_000), "json.too_deep"),
        ("a.json", RESOURCE % (b"[" + b"[]," * 3_000_000 + b"[]]"), "json.too_many_values"),
        ("a.json", RESOURCE % (b"[" + b'{"a":1},' * 1_500_000 + b"{}]"), "json.too_many_values"),
        ("a.json", b"{" + b" " * (33 << 20), "file.too_large"),
        ("a.json", RESOURCE % b'"\xff"', "file.encoding"),
        ("a.hl7", GREETING + b"OBX|" + b"x" * 3_000_000, "line.too_long"),
        ("a.hl7", GREETING + (b"OBX|" + b"|" * 100_000 + b"\r") * 3, "hl7.too_many_fields"),
        ("a.hl7", GREETING + (b"NTE|1||" + b"^" * 100_000 + b"\r") * 3, "hl7.too_many_fields"),
        ("a.hl7", GREETING + b"OBX|1|ST|x||\xe9\r", "file.encoding"),
        ("a.log", b"episode,at,channel,value,unit,by,note\n" + b"x" * 3_000_000, "line.too_long"),
        ("a.log", b"episode,at,channel,value,unit,by,note\nE1,\x00", "file.binary"),
        ("a.log", "episode,at,channel,value,unit,by,note\n".encode("utf-16"), "file.binary"),
        ("a.log", b'episode,at,channel,value,unit,by,note\nE1,"x\n', "row.quotes"),
    ],
    ids=lambda x: x if isinstance(x, str) else "",
)
def test_hostile_results_and_logs(tmp_path: Path, name: str, data: bytes, key: str) -> None:
    path = tmp_path / name
    path.write_bytes(data)
    mapping = MAPPING if key == "file.binary" and data.startswith(b"\xff\xfe") else None
    intake, peak = peak_of(path, mapping) if mapping is None else (read(path), 0)
    assert (intake.whole, intake.entries, intake.chunks) == (False, (), ())
    assert intake.refusals[-1].message.key in (key, "table.no_rows")
    assert intake.refusals[-1].message.key not in sentence(intake.refusals[-1].message), "a refusal has words"
    assert peak < MEMORY, f"{peak >> 20} MB"


def test_more_entries_or_episodes_than_can_be_judged_together(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    from storage.intake import findings, sample_spool

    monkeypatch.setattr(findings, "MOST_ENTRIES", 3)
    monkeypatch.setattr(sample_spool, "MOST_SERIES", 3)
    log = "episode,at,channel,value,unit,by,note\n"
    minutes = [f"2026-03-28T01:{n:02d}:00+00:00" for n in range(5)]
    logs = {
        "file.too_many_entries": log + "".join(f"E1,{at},rr,20,/min,AB,\n" for at in minutes),
        "file.too_many_episodes": log + "".join(f"E{at},{at},leak,20,L/min,device,\n" for at in minutes),
    }
    for key, text in logs.items():
        path = tmp_path / "a.csv"
        path.write_text(text)
        assert refused_by_log(path) == key
    path = tmp_path / "table.csv"
    path.write_text("time,pH\n" + "".join(f"{at},7.4\n" for at in minutes))
    assert refused(path) == "file.too_many_entries"


def refused_by_log(path: Path) -> str:
    intake = peak_of(path)[0]
    path.with_suffix(".luff").unlink()
    assert not intake.whole
    return intake.refusals[-1].message.key


@pytest.mark.parametrize("year", ["1900", "1989", "2027", "2099", "2100"])
@pytest.mark.parametrize("kind", ["table", "sheet", "hl7", "fhir", "log"])
def test_dates_of_another_time_are_refused_by_their_line(tmp_path: Path, store: Store, kind: str, year: str) -> None:
    """Before there was such a log, or ahead of the clock: both are slips, and none is recorded."""
    at = f"{year}-03-28T01:00:00+00:00"
    path = tmp_path / "a.file"
    if kind == "sheet":
        write_xlsx(path, sheet_xml([["time", "pH"], [at[:16].replace("T", " "), 7.4]]))
    else:
        path.write_text({
            "table": f"time,pH\n{at[:16].replace('T', ' ')},7.4\n",
            "hl7": message(gas(), at=f"{year}03280100+0000"),
            "fhir": '{"resourceType": "Observation", "status": "final", "code": {"coding": [{"system": '
                    '"http://loinc.org", "code": "9279-1"}]}, "valueQuantity": {"value": 20}, '
                    f'"effectiveDateTime": "{at}"}}',
            "log": f"episode,at,channel,value,unit,by,note\nE1,{at},rr,20,/min,AB,\n",
        }[kind])  # fmt: skip
    is_table = kind in ("table", "sheet")
    request = ReadRequest(path, MAPPING if is_table else None, episode="" if kind == "log" else "E1")
    intake = operations.read(store, "AB", NOW, request).value
    assert intake.entries == ()
    keys = {r.message.key for r in intake.refusals}
    assert keys <= {"instant.out_of_range", "instant.in_future", "instant.unreadable"}
    assert keys


@pytest.mark.parametrize(
    "formula", ['=HYPERLINK("http://x","y")', "@SUM(A1)", "+cmd|' /C calc'!A0", "-2+3+cmd|'x'!A0"]
)
def test_a_formula_in_a_text_column_is_refused(tmp_path: Path, formula: str) -> None:
    mapping = MAPPING.with_column("note", "note")
    path = tmp_path / "a.csv"
    quoted = formula.replace('"', '""')
    path.write_text(f'time,pH,note\n2026-03-28 00:30,7.4,"{quoted}"\n')
    intake = read_table(path, mapping, now=NOW, answers=Answers("E1"))
    assert [(r.line, r.column, r.message.key) for r in intake.refusals] == [(2, "note", "value.formula")]


def test_a_wrong_encoding_named_by_a_person_is_refused_by_line(tmp_path: Path, store: Store) -> None:
    path = tmp_path / "a.csv"
    path.write_bytes("time,pH,note\n2026-03-28 00:30,7.4,müde\n".encode("cp1252"))
    intake = operations.read(store, "AB", NOW, ReadRequest(path, MAPPING, episode="E1", said=Writing("utf-8"))).value
    assert [(r.line, r.message.key) for r in intake.refusals] == [(2, "file.encoding")]


@pytest.mark.parametrize("kind", ["table", "hl7", "fhir", "log"])
def test_a_file_that_changes_while_it_is_read(tmp_path: Path, store: Store, kind: str) -> None:
    texts = {
        "table": "time,pH\n" + "2026-03-28 00:30,7.4\n" * 3,
        "hl7": message(gas()),
        "fhir": '{"resourceType": "Bundle"}',
        "log": "episode,at,channel,value,unit,by,note\nE1,2026-03-28T01:00:00+00:00,rr,20,/min,AB,\n",
    }
    path = tmp_path / "a.file"
    path.write_text(texts[kind])

    def grow(*_: int) -> None:
        with path.open("a") as file:
            file.write("\n")

    mapping = MAPPING if kind == "table" else None
    request = ReadRequest(path, mapping, episode="" if kind == "log" else "E1")
    if kind == "fhir":
        from unittest.mock import patch

        from storage.intake import steady_file

        with patch.object(steady_file.SteadyFile, "begin", lambda p: steady_file.SteadyFile(p, 26, 0, 0)):
            intake = operations.read(store, "AB", NOW, request).value
    else:
        with watched(grow):
            intake = operations.read(store, "AB", NOW, request).value
    assert [r.message.key for r in intake.refusals][-1:] == ["file.changed"]
    assert not intake.whole
    assert store.head() == 0


@pytest.mark.parametrize("kind", ["table", "hl7", "fhir"])
def test_cancelled_at_any_report_nothing_stays(tmp_path: Path, store: Store, kind: str) -> None:
    path = tmp_path / "a.file"
    path.write_text({"table": "time,pH\n2026-03-28 00:30,7.4\n", "hl7": message(gas()),
                     "fhir": '{"resourceType": "Observation", "status": "final"}'}[kind])  # fmt: skip

    def stop(*_: int) -> None:
        raise CancelledError

    with watched(stop), pytest.raises(CancelledError):
        operations.read(store, "AB", NOW, ReadRequest(path, MAPPING if kind == "table" else None, episode="E1"))
    assert store.head() == 0


def test_kinds_are_told_by_content_and_not_by_name(tmp_path: Path) -> None:
    path = tmp_path / "a.pdf"
    for data, kind in (
        (b"episode,at,channel,value,unit,by,note\n", FileKind.LOG_CSV),
        (b"episode,at,channel,value,unit\n", FileKind.LOG_CSV),
        (b"\x0bMSH|^~\\&|", FileKind.HL7V2),
        (b"\xef\xbb\xbf {", FileKind.FHIR),
        (b"time,pH", FileKind.TABLE),
        (b"MSHX,pH", FileKind.TABLE),
        (b"", FileKind.TABLE),
    ):
        path.write_bytes(data)
        assert kind_of(path) is kind
    with zipfile.ZipFile(path, "w"):
        pass
    assert kind_of(path) is FileKind.TABLE
