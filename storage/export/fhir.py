"""Export of what stands as FHIR R4: one Bundle of Observations, in the precision in which values were typed.

A value has its LOINC code where that is sure, and our own code beside it; a unit is a UCUM code. Device samples go as
sampled data, a run of even steps each. Taken in again, the file gives the same current values.

The LOINC notice of `storage.codes` stands in the bundle itself.
"""

from __future__ import annotations

import json
from collections.abc import Iterator, Sequence
from decimal import Decimal, InvalidOperation
from pathlib import Path
from typing import Any

import numpy as np

from core.record.channels import CHANNELS, Channel, Group, Kind
from core.record.entries import Entry
from core.record.instant import iso
from core.record.knowledge import VALUE_ACTIONS, Standing, standing
from core.record.samples import DeviceSamples
from storage.codes import LOCAL_EPISODE, LOCAL_SYSTEM, LOINC, LOINC_NOTICE, UCUM, loinc_of, ucum_of
from storage.export.log_csv import number_text, value_text
from storage.export.whole_file import whole_file
from storage.intake.fhir_json import Number
from storage.intake.fhir_observation import LOCAL_ENTRY
from storage.store import Store

Json = dict[str, Any]
_MOST_IN_A_RUN = 10_000
_CATEGORY = "http://terminology.hl7.org/CodeSystem/observation-category"
_CATEGORIES = {Group.VITAL: "vital-signs", Group.GAS: "laboratory", Group.DEVICE: "procedure",
               Group.SETTING: "procedure", Group.EVENT: "procedure", Group.PROFILE: "survey"}  # fmt: skip


def write_fhir(
    store: Store, path: Path | str, *, episodes: Sequence[str] | None = None, head: int | None = None
) -> int:
    """Write the current values of episodes (all, when none are named) as a Bundle; how many observations.

    The file appears whole or not at all; an existing one is not overwritten.

    Raises:
        StoreError: `store.exists`, `store.export_failed`.
    """
    top = store.head() if head is None else head
    count = 0
    with whole_file(Path(path)) as file:
        file.write('{"resourceType":"Bundle","meta":{"tag":[{"system":' + json.dumps(LOCAL_SYSTEM))
        file.write(',"code":"notice","display":' + json.dumps(LOINC_NOTICE, ensure_ascii=False))
        file.write('}]},"type":"collection","entry":[')
        for key in store.episode_keys(top) if episodes is None else episodes:
            for url, observation in _observations(store, key, top):
                entry = {"fullUrl": url, "resource": observation} if url else {"resource": observation}
                file.write((",\n" if count else "\n") + written(entry))
                count += 1
        file.write("\n]}\n" if count else "]}\n")
    return count


def written(value: Any) -> str:
    """JSON text in which a `Number` stands as it was typed.

    >>> written({"value": Number("7.40"), "unit": "pH"})
    '{"value":7.40,"unit":"pH"}'
    """
    if isinstance(value, Number):
        return str(value)
    if isinstance(value, dict):
        return "{" + ",".join(f"{json.dumps(k)}:{written(v)}" for k, v in value.items()) + "}"
    if isinstance(value, list):
        return "[" + ",".join(map(written, value)) + "]"
    return json.dumps(value, ensure_ascii=False, allow_nan=False)


def _observations(store: Store, episode: str, head: int) -> Iterator[tuple[str, Json]]:
    stands = [s for s in standing(store.entries(episode, head)) if _is_value_of(episode, s.entry)]
    sites = {s.entry.at: s.entry.words or "" for s in stands if s.entry.channel == "site"}
    for s in stands:
        yield f"urn:uuid:{s.entry.id}", entry_observation(s, sites.get(s.entry.at, ""))
    for block in store.samples(episode, head):
        for observation in _sampled(block):
            yield "", observation


def _is_value_of(episode: str, e: Entry) -> bool:
    return e.episode == episode and e.action in VALUE_ACTIONS and e.channel in CHANNELS


def entry_observation(s: Standing, site: str = "") -> Json:
    """The observation of an entry that stands; `site` is the sample site of a gas, for its code."""
    e, known = s.entry, CHANNELS[s.entry.channel]
    made = _common(e.episode, known, site)
    made["status"] = "corrected" if s.corrected else "final"
    made["identifier"] = [{"system": LOCAL_ENTRY, "value": e.id}]
    made["effectiveDateTime"] = iso(e.at)
    made["issued"] = iso(e.recorded_at)
    if e.by:
        made["performer"] = [{"display": e.by}]
    made |= _value(known, e)
    if e.note:
        made["note"] = [{"text": e.note}]
    marks = {"doubt": e.doubt, "zone": "" if e.zone == "UTC" else e.zone}
    extensions = [{"url": f"{LOCAL_SYSTEM}:{k}", "valueString": v} for k, v in marks.items() if v]
    return ({"extension": extensions} if extensions else {}) | made


def _common(episode: str, known: Channel, site: str = "") -> Json:
    codings = [{"system": LOCAL_SYSTEM, "code": known.key, "display": known.name}]
    loinc = loinc_of(known.key, site) or loinc_of(known.key)
    if loinc:
        codings.insert(0, {"system": LOINC, "code": loinc})
    if loinc == "59408-5":  # the profile of vital signs demands this one beside it
        codings.insert(1, {"system": LOINC, "code": "2708-6"})
    return {
        "resourceType": "Observation",
        "status": "final",
        "category": [{"coding": [{"system": _CATEGORY, "code": _CATEGORIES[known.group]}]}],
        "code": {"coding": codings, "text": known.name},
        "subject": {"identifier": {"system": LOCAL_EPISODE, "value": episode}},
    }


def _value(known: Channel, e: Entry) -> Json:
    if known.kind is Kind.NUMBER:
        return {"valueQuantity": _quantity(known, *value_text(known, e))}
    if known.kind is Kind.INSTANT:
        return {"valueDateTime": iso(int(e.number or 0))}
    if known.kind is Kind.CHOICE:
        return {"valueCodeableConcept": {"coding": [{"system": LOCAL_SYSTEM, "code": e.words}], "text": e.words}}
    return {"valueString": e.words} if e.words else {"valueBoolean": True}


def _quantity(known: Channel, shown: str, unit: str) -> Json:
    code = ucum_of(unit or known.unit)
    made: Json = {"value": _number(shown), "unit": unit or known.unit}
    return made | {"system": UCUM, "code": code} if code else made


def _number(shown: str) -> Number:
    """A typed number as JSON has it: a point, a digit before it, its decimals kept."""
    try:
        return Number(format(Decimal(shown.replace(",", ".")), "f"))
    except InvalidOperation:
        return Number("0")


def _sampled(block: DeviceSamples) -> Iterator[Json]:
    """Runs of even steps, each as one observation of sampled data."""
    known, n, start = CHANNELS[block.channel], block.t.size, 0
    while start < n:
        end = _end_of_run(block, start)
        t, step = (
            block.t[start:end],
            int(block.t[start + 1] - block.t[start]) if end - start > 1 else 1_000_000,
        )
        words = ["E" if np.isnan(v) else number_text(v) for v in block.v[start:end].tolist()]
        made = _common(block.episode, known)
        span = {"start": iso(int(t[0])), "end": iso(int(t[-1]))}
        origin = _quantity(known, "0", known.unit)
        data = {"origin": origin, "period": Number(number_text(step / 1000)), "dimensions": Number("1"),
                "data": " ".join(words)}  # fmt: skip
        yield made | {"effectivePeriod": span, "valueSampledData": data}
        start = end


def _end_of_run(block: DeviceSamples, start: int) -> int:
    gaps = np.diff(block.t[start : start + _MOST_IN_A_RUN])
    if gaps.size == 0:
        return start + 1
    other = np.flatnonzero(gaps != gaps[0])
    return start + (int(other[0]) + 1 if other.size else gaps.size + 1)
