"""FHIR R4 resources made for tests. Patients and values are invented."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

Json = dict[str, Any]
LOINC, UCUM = "http://loinc.org", "http://unitsofmeasure.org"
PATIENT: Json = {
    "resourceType": "Patient",
    "id": "p1",
    "identifier": [{"system": "urn:ward", "value": "0042"}],
}


def observation(code: str = "2744-1", value: str = "7.40", unit: str = "[pH]", **more: Any) -> Json:
    """One Observation with a quantity; `value` is put in as it is written."""
    made: Json = {
        "resourceType": "Observation", "id": f"o-{code}", "status": "final",
        "code": {"coding": [{"system": LOINC, "code": code}]}, "subject": {"reference": "Patient/p1"},
        "effectiveDateTime": "2026-03-28T00:25:00+00:00",
        "valueQuantity": {"value": f"@{value}@", "system": UCUM, "code": unit},
    }  # fmt: skip
    made |= more
    return {k: v for k, v in made.items() if v is not None}


def bundle(*resources: Json) -> Json:
    """A Bundle of resources."""
    return {"resourceType": "Bundle", "type": "collection", "entry": [{"resource": r} for r in resources]}


def write(path: Path, resource: Json) -> Path:
    """Write a resource, its numbers as they were given."""
    text = json.dumps(resource)
    path.write_text(text.replace('"@', "").replace('@"', ""), "utf-8")
    return path
