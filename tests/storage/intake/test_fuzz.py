"""Mutated files of every kind: each is taken or refused in words; none crashes, hangs or touches the store."""

from __future__ import annotations

import json
import random
from pathlib import Path

import pytest

from app.operations import intake as operations
from app.operations.intake import ReadRequest
from app.words import templates
from core.record.message import RecordError
from storage.intake.mapping import ColumnUse, Mapping, TimeUse
from storage.store import Store
from tests.storage.conftest import NOW
from tests.support.fhir_resources import PATIENT, bundle, observation
from tests.support.hl7_messages import gas, message, obx
from tests.support.spreadsheets import ods_rows, sheet_xml, write_ods, write_xlsx

LOG = (
    "episode,at,channel,value,unit,by,note\nE1,2026-03-28T01:00:00+00:00,ph,7.31,,AB,\n"
    'E1,2026-03-28T01:00:00+00:00,note,"a ""b"" c",,AB,\nE1,2026-03-28T01:00:00+00:00,leak,24,L/min,device,\n'
)
TABLE = "time;pH;pCO2;leak\n28.03.2026 00:10;7,31;8,1;24\n28.03.2026 00:20;7,33;7,9;\n"
MAPPING = Mapping(
    "m",
    (),
    (ColumnUse("pH", "ph", "pH"), ColumnUse("pCO2", "paco2", "kPa"), ColumnUse("leak", "leak", "L/min")),
    TimeUse("time", order="dmy", zone="Europe/Oslo"),
    decimal=",",
    written_by="device",
    leak_definition="total",
)
SHEET = [["time", "pH", "pCO2", "leak"], ["28.03.2026 00:10", "7,31", "8,1", "24"]]
SPICE = (b"\x00", b"\xff\xfe", b'"', b"\n", b"\r", b";", b"|", b"^", b"~", b"&", b"\\X", b"{", b"[", b"9" * 40, b"-",
         b"1e309", b"<!DOCTYPE", b"2099", b"1900", b"\xc3", b"'", b"=cmd", b"NaN", b"null", b"")  # fmt: skip


def originals(folder: Path) -> dict[str, bytes]:
    """One good file of each kind."""
    fhir = json.dumps(bundle(PATIENT, observation(), observation("2019-8", "6.0", "kPa")))
    xlsx = write_xlsx(folder / "o.xlsx", sheet_xml(SHEET)).read_bytes()
    ods = write_ods(folder / "o.ods", ods_rows(SHEET)).read_bytes()
    hl7 = message([*gas(), obx("ph", "7.2", status="C"), "NTE|1||a \\T\\ b"])
    return {
        "log.csv": LOG.encode(),
        "a.csv": TABLE.encode(),
        "a.hl7": hl7.encode(),
        "a.json": fhir.replace('"@', "").replace('@"', "").encode(),
        "a.xlsx": xlsx,
        "a.ods": ods,
    }


def mutated(data: bytes, dice: random.Random) -> bytes:
    """The bytes with a few of them changed, cut out, doubled, or spiced."""
    made = bytearray(data)
    for _ in range(dice.randint(1, 6)):
        at = dice.randrange(len(made) + 1)
        size = dice.choice((1, 1, 2, 8, 40))
        what = dice.randrange(5)
        if what == 0 and at < len(made):
            made[at] ^= 1 << dice.randrange(8)
        elif what == 1:
            del made[at : at + size]
        elif what == 2:
            made[at:at] = made[at : at + size]
        elif what == 3:
            made[at:at] = dice.choice(SPICE)
        else:
            made[at : at + size] = dice.choice(SPICE)
    return bytes(made)


def survives(path: Path, store: Store) -> int:
    """Read one file; how many rows were refused."""
    request = ReadRequest(
        path, None if path.name == "log.csv" else MAPPING, episode="" if path.name == "log.csv" else "E1"
    )
    try:
        intake = operations.read(store, "AB", NOW, request).value
    except RecordError as error:
        return 1 if error.message.key in templates() else pytest.fail(f"no words for {error.message.key}")
    for found in (*intake.refusals, *intake.doubts, *intake.aside):
        assert found.message.key in templates(), found
    if not intake.whole:
        assert intake.refusals
        assert (intake.entries, intake.chunks) == ((), ()) or path.name in ("log.csv", "a.hl7")
    return intake.refused_rows


def fuzz(folder: Path, store: Store, count: int, seed: int) -> dict[str, int]:
    dice = random.Random(seed)
    files = originals(folder)
    refused = dict.fromkeys(files, 0)
    for n in range(count):
        name = list(files)[n % len(files)]
        path = folder / name
        path.write_bytes(mutated(files[name], dice))
        try:
            refused[name] += survives(path, store) > 0
        except Exception as error:
            raise AssertionError(f"mutation {n} of seed {seed}: {path.read_bytes()[:2000]!r}") from error
    assert store.head() == 0
    return refused


@pytest.mark.parametrize("seed", [1, 2])
def test_a_few_hundred_mutated_files(tmp_path: Path, store: Store, seed: int) -> None:
    refused = fuzz(tmp_path, store, 300, seed)
    assert all(count > 5 for count in refused.values()), "the mutations bite"


def test_the_originals_are_taken(tmp_path: Path, store: Store) -> None:
    for name, data in originals(tmp_path).items():
        path = tmp_path / name
        path.write_bytes(data)
        assert survives(path, store) == 0, name
