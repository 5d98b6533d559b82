"""Observations by FHIR R4: codes, units, times, components, members, absent values, status, identity."""

from __future__ import annotations

import json
from collections.abc import Callable
from pathlib import Path

import pytest

from core.record.instant import iso
from core.record.knowledge import standing
from storage.intake.batch import take_in
from storage.intake.fhir import read_fhir
from storage.intake.findings import Intake
from storage.intake.said import Said
from storage.store import Store
from tests.storage.conftest import NOW
from tests.support.fhir_resources import LOINC, PATIENT, UCUM, Json, bundle, observation, write

Reader = Callable[..., Intake]
KNOWN = Said(episodes={"urn:ward|0042": "E1"})


@pytest.fixture
def read(tmp_path: Path) -> Reader:
    def run(*observations: Json, said: Said = KNOWN, existing: Store | None = None) -> Intake:
        path = write(tmp_path / "results.json", bundle(PATIENT, *observations))
        return read_fhir(path, now=NOW, said=said, existing=existing)

    return run


def refused(intake: Intake) -> list[tuple[str, str]]:
    return [(r.column, r.message.key) for r in intake.refusals]


def aside(intake: Intake) -> list[str]:
    return [a.message.key for a in intake.aside]


def of(intake: Intake, channel: str) -> list[str]:
    return [f"{d.entry.raw} {d.entry.raw_unit}".strip() for d in intake.entries if d.entry.channel == channel]


@pytest.mark.parametrize("value", ["7.40", "7.4", "7.400", "7.4e0"])
def test_precision_is_kept(read: Reader, value: str) -> None:
    intake = read(observation(value=value))
    assert of(intake, "ph") == [f"{value.removesuffix('e0')} pH"]
    assert of(intake, "site") == ["arterial"]


def test_the_code_counts_and_never_the_unit_shown(read: Reader) -> None:
    shown = {"value": "@6.2@", "unit": "mmHg", "system": UCUM, "code": "kPa"}
    assert of(read(observation("2019-8", valueQuantity=shown)), "paco2") == ["6.2 kPa"]
    no_code = {"value": "@6.2@", "unit": "kPa"}
    assert refused(read(observation("2019-8", valueQuantity=no_code))) == [("value", "unit.missing")]
    foreign = {"value": "@6.2@", "unit": "kPa", "system": "http://snomed.info/sct", "code": "259018003"}
    assert refused(read(observation("2019-8", valueQuantity=foreign))) == [("value", "unit.missing")]


def test_several_codings(read: Reader) -> None:
    both = {"coding": [{"system": "urn:x", "code": "A"}, {"system": LOINC, "code": "2708-6"},
                       {"system": LOINC, "code": "59408-5"}]}  # fmt: skip
    assert of(read(observation(value="91", unit="%") | {"code": both}), "spo2") == ["91 %"]
    contrary = {"coding": [{"system": LOINC, "code": "9279-1"}, {"system": LOINC, "code": "8867-4"}]}
    assert aside(read(observation(value="20", unit="/min") | {"code": contrary})) == ["code.not_ours"]


@pytest.mark.parametrize(
    ("category", "channel"), [("vital-signs", "spo2"), ("laboratory", "sao2"), ("survey", ""), ("", "")]
)
def test_arterial_saturation_is_told_from_a_pulse_oximeter_by_its_category(
    read: Reader, category: str, channel: str
) -> None:
    categories = [{"coding": [{"code": category}]}] if category else []
    intake = read(observation("2708-6", "91", "%", category=categories))
    assert of(intake, channel) == (["91 %"] if channel else [])
    assert aside(intake) == ([] if channel else ["code.ambiguous_saturation"])


@pytest.mark.parametrize(
    ("times", "key"),
    [
        ({"effectiveDateTime": "2026-03-28"}, "time.date_only"),
        ({"effectiveDateTime": "2026-03"}, "time.date_only"),
        ({"effectiveDateTime": "2026-03-28T01:00:00"}, "instant.no_offset"),
        ({"effectiveDateTime": None}, "time.none"),
        ({"effectiveDateTime": None, "effectiveTiming": {"event": []}}, "time.not_a_moment"),
        (
            {"effectiveDateTime": None, "effectivePeriod": {"end": "2026-03-28T01:00:00Z"}},
            "time.not_a_moment",
        ),
        (
            {
                "effectiveDateTime": None,
                "effectivePeriod": {"start": "2026-03-28T01:00:00Z", "end": "2026-03-27T01:00:00Z"},
            },
            "entry.span_backwards",
        ),
        ({"effectiveDateTime": "2026-03-29T01:00:00Z"}, "instant.in_future"),
        ({"effectiveDateTime": "1900-01-01T01:00:00Z"}, "instant.out_of_range"),
        ({"effectiveDateTime": "2099-01-01T01:00:00Z"}, "instant.in_future"),
    ],
)
def test_times_that_are_no_moment_are_refused_with_the_reason(read: Reader, times: Json, key: str) -> None:
    assert refused(read(observation(**times))) == [("effective", key)]


def test_a_period_counts_from_its_start_and_a_long_one_is_in_doubt(read: Reader) -> None:
    for end, doubts in (
        ("2026-03-28T01:10:00Z", []),
        ("2026-03-28T02:00:00Z", ["time.start_of_span"]),
        (None, []),
    ):
        period = {"start": "2026-03-28T01:00:00Z"} | ({"end": end} if end else {})
        intake = read(observation(effectiveDateTime=None, effectivePeriod=period))
        entry = next(d.entry for d in intake.entries if d.entry.channel == "ph")
        assert iso(entry.at) == "2026-03-28T01:00:00+00:00"
        assert [d.message.key for d in intake.doubts] == doubts
        assert entry.doubt == (doubts[0] if doubts else "")


def test_components_are_read_each_by_its_own_code(read: Reader) -> None:
    def part(code: str, value: str) -> Json:
        quantity = {"value": f"@{value}@", "system": UCUM, "code": "mm[Hg]"}
        return {"code": {"coding": [{"system": LOINC, "code": code}]}, "valueQuantity": quantity}

    parts = [part("8480-6", "124"), part("8462-4", "x"), part("8478-0", "90")]
    parts[1]["valueQuantity"] = {"value": "@9@", "system": UCUM, "code": "mm[Hg]"}
    panel = observation("85354-9", valueQuantity=None, component=parts)
    intake = read(panel)
    assert of(intake, "sbp") == ["124 mmHg"]
    assert refused(intake) == [("component[1]", "value.past_hard_limit")]
    assert aside(intake) == ["code.not_ours"], "the panel itself has no value and needs no reason; 8478-0 does"


def test_members_are_read_and_take_the_time_of_their_panel_in_doubt(read: Reader) -> None:
    panel = observation("24336-0", valueQuantity=None, id="panel",
                        hasMember=[{"reference": "Observation/m1"}, {"reference": "Observation/m2"}])  # fmt: skip
    one = observation("2744-1", "7.31", id="m1", effectiveDateTime=None)
    two = observation("2019-8", "6.0", "kPa", id="m2")
    intake = read(panel, one, two)
    assert (of(intake, "ph"), of(intake, "paco2")) == (["7.31 pH"], ["6.0 kPa"])
    assert [d.message.key for d in intake.doubts] == ["time.of_panel"]


def test_a_contained_observation_is_read(read: Reader) -> None:
    inner = observation("2744-1", "7.31", id="in", subject={"reference": "Patient/p1"})
    panel = observation("24336-0", valueQuantity=None, contained=[inner], hasMember=[{"reference": "#in"}])
    assert of(read(panel), "ph") == ["7.31 pH"]


def test_absent_values_and_other_states_are_left_aside(read: Reader) -> None:
    absent = observation(valueQuantity=None, dataAbsentReason={"coding": [{"code": "not-performed"}]})
    intake = read(absent, observation("9279-1", "20", "/min", status="registered"),
                  observation("8867-4", "80", "/min", status="entered-in-error"))  # fmt: skip
    assert aside(intake) == ["result.no_value", "result.not_yet", "result.nothing_to_withdraw"]
    assert intake.aside[0].message.values["why"] == "not-performed"
    assert intake.entries == () or {d.entry.channel for d in intake.entries} <= {"identifier"}


@pytest.mark.parametrize(
    ("more", "key"),
    [
        ({"modifierExtension": [{"url": "urn:x"}]}, "fhir.modifier"),
        ({"status": "later"}, "result.status_unknown"),
        ({"status": None}, "result.status_unknown"),
        ({"subject": {"reference": "Group/herd"}}, "patient.not_a_patient"),
        ({"subject": {"reference": "Patient/p9"}}, "patient.unknown"),
        ({"subject": None}, "patient.no_identifier"),
        (
            {"valueQuantity": {"value": "@60@", "comparator": ">", "system": UCUM, "code": "[pH]"}},
            "value.comparator",
        ),
        ({"valueQuantity": None, "valueString": "high"}, "value.not_a_number"),
        ({"valueQuantity": None, "valueBoolean": True}, "value.missing"),
    ],
)
def test_what_must_not_be_taken(read: Reader, more: Json, key: str) -> None:
    assert [k for _, k in refused(read(observation(**more)))] == [key]


def test_a_correction_supersedes_and_an_error_withdraws(read: Reader, store: Store) -> None:
    def take(*observations: Json) -> Intake:
        intake = read(*observations, existing=store)
        take_in(store, intake, by="AB", now=NOW)
        return intake

    take(observation(value="7.31"), observation("2019-8", "6.0", "kPa"))
    take(observation(value="7.25", status="amended"))
    take(observation("2019-8", "6.0", "kPa", status="entered-in-error", effectiveDateTime=None))
    stands = {s.entry.channel: s for s in standing(store.entries("E1"))}
    assert (stands["ph"].entry.number, stands["ph"].corrected) == (7.25, True)
    assert "paco2" not in stands
    again = read(observation(value="7.31"), observation(value="7.25", status="amended"), existing=store)
    assert (again.entries, again.repeated_in_store) == ((), 3), "two versions, and the site"


def test_specimens_tell_the_site(read: Reader, tmp_path: Path) -> None:
    specimen = {"resourceType": "Specimen", "id": "s", "type": {"coding": [{"code": "BLDV"}]}}
    blood = observation("11558-4", "7.31", specimen={"reference": "Specimen/s"})
    path = write(tmp_path / "a.json", bundle(PATIENT, specimen, blood))
    assert of(read_fhir(path, now=NOW, said=KNOWN), "site") == ["venous"]


def test_sampled_data_become_device_samples(read: Reader) -> None:
    sampled = {"origin": {"value": "@0@", "system": UCUM, "code": "/min"}, "period": "@60000@", "dimensions": "@1@",
               "data": "20 21 E 23"}  # fmt: skip
    intake = read(observation("9279-1", valueQuantity=None, valueSampledData=sampled))
    (block,) = intake.samples
    assert (block.channel, block.t.size) == ("rr", 4)
    assert block.t[1] - block.t[0] == 60_000_000
    for change in (
        {"dimensions": "@2@"},
        {"factor": "@2@"},
        {"period": "@0@"},
        {"data": "20 U"},
        {"origin": {}},
    ):
        bad = read(observation("9279-1", valueQuantity=None, valueSampledData=sampled | change))
        assert len(bad.refusals) == 1, change
        assert bad.samples == ()


@pytest.mark.parametrize(
    ("text", "key"),
    [
        ("{", "json.unreadable"),
        ('{"a": NaN}', "json.no_number"),
        ('{"a": 1, "a": 2}', "json.double_key"),
        ("[]", "fhir.no_resource"),
        ('{"a": 1}', "fhir.no_resource"),
        ("[" * 10_000 + "]" * 10_000, "json.too_deep"),
        (
            '{"resourceType": "Bundle", "entry": ' + '[{"entry": ' * 10_000 + "1" + "}]" * 10_000 + "}",
            "json.too_deep",
        ),
    ],
)
def test_json_that_is_none(tmp_path: Path, text: str, key: str) -> None:
    path = tmp_path / "a.json"
    path.write_text(text)
    intake = read_fhir(path, now=NOW)
    assert (intake.whole, [r.message.key for r in intake.refusals]) == (False, [key])


def test_one_resource_a_line(tmp_path: Path) -> None:
    rows = [PATIENT, observation(value="7.31"), observation("2019-8", "6.0", "kPa")]
    path = tmp_path / "a.ndjson"
    path.write_text("\n".join(json.dumps(r).replace('"@', "").replace('@"', "") for r in rows))
    assert of(read_fhir(path, now=NOW, said=KNOWN), "ph") == ["7.31 pH"]


def test_other_resources_are_counted_and_left_aside(read: Reader) -> None:
    intake = read(observation(), {"resourceType": "Encounter"}, {"resourceType": "Encounter"})
    assert intake.aside[0].message.values == {"kind": "Encounter", "count": 2}
