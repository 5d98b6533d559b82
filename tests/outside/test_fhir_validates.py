"""What we write as FHIR validates with a model library (fhir.resources, R4B) and reads back the same there.

R4B differs from R4 in resources that are not written here; Observation, Bundle and CodeSystem are the same.
"""

from __future__ import annotations

import json
from decimal import Decimal
from pathlib import Path

import pytest

from core.record.channels import CHANNELS
from core.record.knowledge import standing
from storage.codes import LOCAL_SYSTEM
from storage.export.data_dictionary import code_system
from storage.export.fhir import write_fhir
from storage.store import Store
from tests.support.sample_ward import sample_night

bundles = pytest.importorskip("fhir.resources.R4B.bundle")
systems = pytest.importorskip("fhir.resources.R4B.codesystem")


def test_the_sample_shift_is_a_valid_bundle(tmp_path: Path) -> None:
    path = tmp_path / "out.json"
    with Store.open(sample_night(tmp_path)) as store:
        keys = store.episode_keys()[:3]
        count = write_fhir(store, path, episodes=keys)
        entries = {s.entry.id: s.entry for key in keys for s in standing(store.entries(key))}
    made = bundles.Bundle.model_validate_json(path.read_text("utf-8"))
    assert len(made.entry) == count > 100
    seen = 0
    for one in made.entry:
        observation = one.resource
        assert observation.get_resource_type() == "Observation"
        assert observation.status in ("final", "corrected")
        if observation.identifier is None:
            assert observation.valueSampledData is not None
            continue
        entry = entries[observation.identifier[0].value]
        own = [c.code for c in observation.code.coding if c.system == LOCAL_SYSTEM]
        assert own == [entry.channel]
        if observation.valueQuantity is not None:
            seen += 1
            assert observation.valueQuantity.value == Decimal(entry.raw.replace(",", "."))
    assert seen > 50


def test_our_code_system_is_valid() -> None:
    made = systems.CodeSystem.model_validate_json(json.dumps(code_system()))
    assert {c.code for c in made.concept} >= CHANNELS.keys()
