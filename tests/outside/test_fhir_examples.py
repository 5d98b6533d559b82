"""Every kept example of HL7 FHIR R4 is taken, or refused or left aside with a reason; none crashes.

Source: npm package `hl7.fhir.r4.examples` 4.0.1 (HL7 Inc, CC0-1.0); see `fhir_examples/README.md`. Values are as the
examples state them.
"""

from __future__ import annotations

import json
import os
from decimal import Decimal
from pathlib import Path
from zipfile import ZipFile

import pytest

from app.words import templates
from core.record.instant import parse
from storage.intake.fhir import read_fhir
from storage.intake.findings import Intake
from storage.intake.said import Said

FOLDER = Path(__file__).parent / "fhir_examples"
FILES = sorted(FOLDER.glob("*.json"))
ARCHIVE = FOLDER / "larger.zip"
LARGER = ZipFile(ARCHIVE).namelist()
WHOLE = Path(os.environ.get("FHIR_EXAMPLES", "none"))
NOW = parse("2026-03-28T02:00:00Z")


def read(path: Path) -> Intake:
    return read_fhir(path, now=NOW, said=Said(episodes={"*": "E1"}))


def with_a_time(name: str, folder: Path) -> Intake:
    """An example that states a date alone, given a time of day by the test: its value is then taken."""
    resource = json.loads((FOLDER / name).read_text("utf-8"), parse_float=Decimal)
    resource["effectiveDateTime"] = resource["effectiveDateTime"][:10] + "T10:00:00Z"
    path = folder / name
    path.write_text(json.dumps(resource, default=float), "utf-8")
    return read(path)


def check(path: Path) -> Intake:
    """Every value of a file is taken, refused or left aside, and what is said has words."""
    intake = read(path)
    for found in (*intake.refusals, *intake.aside, *intake.doubts):
        assert found.message.key in templates(), found
    resource = json.loads(path.read_text("utf-8"))
    if resource["resourceType"] == "Observation":
        assert intake.entries or intake.refusals or intake.aside, "nothing is passed over in silence"
    return intake


@pytest.mark.parametrize("path", FILES, ids=lambda p: p.stem)
def test_taken_or_given_a_reason(path: Path) -> None:
    check(path)


@pytest.mark.parametrize("name", LARGER)
def test_larger_bundles_are_taken_or_given_a_reason(name: str, tmp_path: Path) -> None:
    with ZipFile(ARCHIVE) as archive:
        path = Path(archive.extract(name, tmp_path))
    assert check(path).whole


@pytest.mark.soak
@pytest.mark.timeout(0)
@pytest.mark.skipif(not WHOLE.is_dir(), reason="FHIR_EXAMPLES names no folder of the unpacked npm package")
def test_every_observation_bundle_and_patient_of_the_package() -> None:
    """All 130 of them, the definitions of FHIR itself among them (up to 35 MB, which is refused as too large)."""
    paths = [p for kind in ("Observation", "Bundle", "Patient") for p in sorted(WHOLE.glob(f"{kind}-*.json"))]
    assert len(paths) == 130
    kept = {p.name for p in FILES} | set(LARGER)
    told = {p.name: [r.message.key for r in check(p).refusals] for p in paths if p.name not in kept}
    assert len(told) == 10, "what is not kept here: bundles of definitions, value sets and search parameters"
    assert told.pop("Bundle-resources.json") == ["file.too_large"]
    print(told)


def test_there_are_examples_of_each_kind() -> None:
    kinds = [p.stem.partition("-")[0] for p in FILES]
    assert (kinds.count("Observation"), kinds.count("Patient")) == (64, 22)
    assert kinds.count("Bundle") + len(LARGER) == 34, "ten more hold nothing but definitions of 2 to 35 MB"


@pytest.mark.parametrize(
    ("name", "channel", "value", "doubt"),
    [
        ("Observation-f002", "be", "12.6 mmol/L", "time.start_of_span"),
        ("Observation-f003", "paco2", "6.2 kPa", "time.start_of_span"),
        ("Observation-satO2", "spo2", "95 %", ""),
        ("Observation-f005", "hb", "7.2 g/dL", ""),
        ("Observation-glasgow", "gcs", "13 points", ""),
        ("Observation-gcs-qa", "gcs", "13 points", ""),
    ],
)
def test_values_that_are_taken(name: str, channel: str, value: str, doubt: str) -> None:
    found = [d.entry for d in read(FOLDER / f"{name}.json").entries if d.entry.channel == channel]
    assert [(f"{e.raw} {e.raw_unit}", e.doubt) for e in found] == [(value, doubt)]


@pytest.mark.parametrize(
    ("name", "channel", "value"),
    [
        ("Observation-respiratory-rate", "rr", "26 /min"),
        ("Observation-heart-rate", "hr", "44 /min"),
        ("Observation-body-temperature", "temp", "36.5 degC"),
        ("Observation-blood-pressure", "sbp", "107 mmHg"),
        ("Observation-example", "weight", "185 lb"),
    ],
)
def test_values_with_a_date_alone_are_refused_and_taken_once_they_have_a_time(
    tmp_path: Path, name: str, channel: str, value: str
) -> None:
    refused = read(FOLDER / f"{name}.json")
    assert [r.message.key for r in refused.refusals] == ["time.date_only"]
    found = with_a_time(f"{name}.json", tmp_path).entries
    assert [f"{d.entry.raw} {d.entry.raw_unit}" for d in found if d.entry.channel == channel] == [value]


def test_a_unit_that_the_channel_does_not_take_is_refused(tmp_path: Path) -> None:
    """The height is in inches."""
    refused = with_a_time("Observation-body-height.json", tmp_path)
    assert [(r.column, r.message.key) for r in refused.refusals] == [("value", "unit.unknown")]


def test_cancelled_values_are_left_aside() -> None:
    intake = read(FOLDER / "Observation-blood-pressure-cancel.json")
    assert {a.message.key for a in intake.aside} == {"result.nothing_to_withdraw"}
