"""FHIR out: precision, codes, units, and read back the same values."""

from __future__ import annotations

import json
from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest

from core.record.channels import CHANNELS
from core.record.knowledge import VALUE_ACTIONS, standing
from core.record.samples import DeviceSamples
from storage.codes import LOCAL_SYSTEM, LOINC, LOINC_NOTICE, MEANINGS, UNITS, loinc_of, ucum_of
from storage.errors import StoreError
from storage.export.data_dictionary import code_system
from storage.export.data_dictionary import rows as dictionary
from storage.export.fhir import write_fhir
from storage.intake.batch import take_in
from storage.intake.fhir import read_fhir
from storage.intake.log_csv import read_log_csv
from storage.store import Store
from tests.storage.conftest import NOW

AT = "2026-03-28T01:00:00+00:00"
ROWS = (
    f"E1,{AT},ph,7.40,,AB,",
    f"E1,{AT},paco2,8.0,kPa,AB,",
    f"E1,{AT},pao2,61,mmHg,AB,on the mask",
    f"E1,{AT},site,arterial,,AB,",
    f"E1,{AT},fio2,35,%,AB,",
    "E1,2026-03-28T01:10:00+00:00,fio2,.35,fraction,AB,",
    f"E1,{AT},ipap,16,cmH2O,AB,",
    f"E1,{AT},epap,6,cmH2O,AB,",
    f'E1,{AT},note,"said ""better"", <b>",,AB,',
    f"E1,{AT},mask_adjusted,,,AB,",
    f"E1,{AT},acvpu,alert,,AB,",
    f"E1,{AT},started_at,2026-03-28T00:10:00+00:00,,AB,",
    f"E1,{AT},spo2,60,%,AB,",
    f"E1,{AT},be,+2.50,mmol/L,AB,",
    f"E1,{AT},gcs,15,,AB,",
)


@pytest.fixture
def full(store: Store, tmp_path: Path) -> Store:
    path = tmp_path / "log.csv"
    path.write_text("\n".join(("episode,at,channel,value,unit,by,note", *ROWS)) + "\n")
    intake = read_log_csv(path, now=NOW)
    assert not intake.refusals
    take_in(store, intake, by="AB", now=NOW)
    t = NOW - 3_600_000_000 + np.array([0, 1, 2, 3, 7, 8]) * 1_000_000
    v = np.array([24.5, np.nan, 25.0, 26.0, 24.0, 24.0])
    store.append((), by="AB", operation="test", now=NOW, samples=(DeviceSamples("E1", "leak", "dev", t, v, 1),))
    return store


def texts_by_channel(path: Path) -> dict[str, str]:
    """The written JSON of each value, by our own code."""
    found = {}
    for line in path.read_text("utf-8").split("\n"):
        for key in CHANNELS:
            if f'"system":"{LOCAL_SYSTEM}","code":"{key}"' in line:
                found.setdefault(key, line)
    return found


def test_precision_codes_and_units_as_written(full: Store, tmp_path: Path) -> None:
    path = tmp_path / "out.json"
    assert write_fhir(full, path) == len(ROWS) + 2
    lines = texts_by_channel(path)
    assert (
        '"valueQuantity":{"value":7.40,"unit":"pH","system":"http://unitsofmeasure.org","code":"[pH]"}' in lines["ph"]
    )
    assert '"value":8.0,"unit":"kPa","system":"http://unitsofmeasure.org","code":"kPa"' in lines["paco2"]
    assert '"value":2.50,' in lines["be"]
    assert f'"system":"{LOINC}","code":"2744-1"' in lines["ph"]
    assert f'"system":"{LOINC}","code":"2708-6"' in lines["spo2"]
    assert LOINC not in lines["ipap"], "no code is sure for IPAP: our own stands alone"
    assert LOINC not in lines["leak"]
    assert json.dumps(LOINC_NOTICE, ensure_ascii=False) in path.read_text("utf-8")


def test_read_back_it_gives_the_same_current_values(
    full: Store, make_store: Callable[..., Store], tmp_path: Path
) -> None:
    path = tmp_path / "out.json"
    write_fhir(full, path)
    other = make_store("other.luff", imported=True)
    intake = read_fhir(path, now=NOW, existing=other)
    assert (intake.refusals, intake.aside) == ((), ())
    take_in(other, intake, by="CD", now=NOW)

    def stands(store: Store) -> set[object]:
        return {
            (
                e.id,
                e.at,
                e.channel,
                e.number,
                e.words,
                e.raw.lstrip("+").replace(".35", "0.35") if e.raw == ".35" else e.raw.lstrip("+"),
                e.raw_unit,
                e.decimals,
                e.by,
                e.note,
                e.doubt,
                e.zone,
            )
            for e in (s.entry for s in standing(store.entries("E1")))
            if e.action in VALUE_ACTIONS
        }

    assert stands(full) == stands(other)
    (a,), (b,) = full.samples("E1"), other.samples("E1")
    assert np.array_equal(a.t, b.t)
    assert np.array_equal(a.v, b.v, equal_nan=True)
    again = read_fhir(path, now=NOW, existing=other)
    assert (again.entries, again.chunks) == ((), ())


def test_an_existing_file_stays(full: Store, tmp_path: Path) -> None:
    path = tmp_path / "out.json"
    path.write_text("mine")
    with pytest.raises(StoreError):
        write_fhir(full, path)
    assert path.read_text() == "mine"
    assert [p.name for p in tmp_path.iterdir() if "unfinished" in p.name] == []


def test_every_code_is_of_a_channel_and_every_number_has_a_unit_code() -> None:
    assert {m.channel for m in MEANINGS.values()} <= CHANNELS.keys()
    for known in CHANNELS.values():
        for unit in known.units:
            assert ucum_of(unit.name) in UNITS, (known.key, unit.name)


def test_check_digits_of_loinc_codes() -> None:
    """The last digit of a LOINC code is a check digit, mod 10 (LOINC Users' Guide)."""
    for code in MEANINGS:
        number, _, check = code.partition("-")
        total = sum(sum(divmod(int(d) * (2 - i % 2), 10)) for i, d in enumerate(reversed(number)))
        assert (10 - total % 10) % 10 == int(check), code


def test_the_dictionary_names_every_channel() -> None:
    assert [r["channel"] for r in dictionary()] == list(CHANNELS)
    assert "arterial 2744-1" in next(r["loinc"] for r in dictionary() if r["channel"] == "ph")
    assert {c["code"] for c in code_system()["concept"]} >= CHANNELS.keys()
    assert loinc_of("hco3", "venous") == "14627-4"
