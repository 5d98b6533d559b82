"""What we write as FHIR is valid R4 (4.0.1) by HL7's own JSON Schema, and reads back equal, values and decimals.

Source: `fhir.schema.json` of HL7 FHIR R4 4.0.1 (http://hl7.org/fhir/json-schema/4.0), CC0-1.0, kept in
`fhir_r4_schema.json` without descriptions and cut to Observation, Bundle, CodeSystem and the types they are made of.
`test_fhir_validates.py` holds the same output against a model library of R4B.
"""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import pytest

from app import demo
from app.operations import intake as operations
from app.operations.intake import ReadRequest, TakeRequest
from core.record.instant import HOUR
from core.record.knowledge import standing
from storage.export.data_dictionary import code_system
from storage.export.fhir import write_fhir
from storage.store import Store
from tests.support.sample_ward import sample_night

validators = pytest.importorskip("jsonschema.validators")
SCHEMA = json.loads((Path(__file__).parent / "fhir_r4_schema.json").read_text("utf-8"))


def wrong(resource: dict[str, Any], kind: str) -> list[str]:
    """What HL7's schema says against a resource of a kind, with where it stands."""
    made = validators.Draft6Validator({**SCHEMA, "oneOf": [{"$ref": f"#/definitions/{kind}"}]})
    return [f"{list(e.absolute_path)}: {e.message}" for e in made.iter_errors(resource)][:5]


@pytest.fixture(scope="module")
def written(tmp_path_factory: pytest.TempPathFactory) -> tuple[Path, Path, tuple[str, ...]]:
    """The sample shift's store, three of its episodes as FHIR, and their keys."""
    folder = tmp_path_factory.mktemp("fhir")
    store, path = sample_night(folder), folder / "out.json"
    with Store.open(store) as opened:
        keys = opened.episode_keys()[:3]
        write_fhir(opened, path, episodes=keys)
    return store, path, keys


def test_the_sample_shift_is_valid_r4(written: tuple[Path, Path, tuple[str, ...]]) -> None:
    bundle = json.loads(written[1].read_text("utf-8"))
    assert bundle["resourceType"] == "Bundle"
    assert wrong({k: v for k, v in bundle.items() if k != "entry"}, "Bundle") == []
    kinds = set()
    for entry in bundle["entry"]:
        resource = entry["resource"]
        assert wrong({**entry, "resource": None} | {"resource": resource}, "Bundle_Entry") == []
        assert wrong(resource, "Observation") == []
        assert resource["status"], "R4 demands it, which the schema cannot say"
        assert resource["code"]["coding"]
        kinds |= {k for k in resource if k.startswith("value")}
    assert {"valueQuantity", "valueSampledData", "valueCodeableConcept"} <= kinds


def test_our_code_system_is_valid_r4() -> None:
    assert wrong(code_system(), "CodeSystem") == []


@pytest.mark.parametrize(
    "change",
    [{"status": "done"}, {"valueQuantity": {"value": "7.40"}}, {"effectiveDateTime": "28.03.2026"},
     {"triggeredBy": []}, {"valueSampledData": {"data": "1"}, "bodyStructure": {}}],
    ids=["a status of no code list", "a number as text", "a date of no form", "an element of R5", "elements of R5"],
)  # fmt: skip
def test_the_schema_bites(written: tuple[Path, Path, tuple[str, ...]], change: dict[str, Any]) -> None:
    resource = json.loads(written[1].read_text("utf-8"))["entry"][0]["resource"]
    assert wrong({**resource, **change}, "Observation")


def test_it_reads_back_equal(written: tuple[Path, Path, tuple[str, ...]], tmp_path: Path) -> None:
    """Values, units, decimals, times and doubts of what stands; samples to the last one."""
    source, path, keys = written
    now = demo.demo_now() + 24 * HOUR
    with Store.open(source) as old, Store.create(tmp_path / "new.luffmark", now=now) as new:
        intake = operations.read(new, "AB", now, ReadRequest(path)).value
        assert not intake.refusals
        operations.take(new, "AB", now, TakeRequest(intake))
        for key in keys:
            assert standing_values(new, key) == standing_values(old, key)
            theirs = {s.channel: (s.t.tolist(), s.v.tolist()) for s in old.samples(key)}
            assert {s.channel: (s.t.tolist(), s.v.tolist()) for s in new.samples(key)} == theirs


def standing_values(store: Store, key: str) -> set[tuple[Any, ...]]:
    found = [s.entry for s in standing(store.entries(key))]
    return {(e.channel, e.at, e.number, e.words, e.raw, e.raw_unit, e.decimals) for e in found}
