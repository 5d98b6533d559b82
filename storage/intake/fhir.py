"""Observations by FHIR R4 in JSON: a resource, a Bundle, or one resource a line (.ndjson). Narrow on purpose:
what an observation of vital signs, gases or settings needs, and a reason for everything else."""

from __future__ import annotations

from collections import Counter
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

from core.record.instant import Instant
from core.record.message import Message, RecordError, refuse
from storage.draft_batch import SourceFacts
from storage.intake.coded_value import CodeBook
from storage.intake.fhir_bundle import Holdings
from storage.intake.fhir_json import read_resources, text
from storage.intake.fhir_observation import BY, ObservationRows
from storage.intake.findings import Findings, Intake, UnreadableFileError
from storage.intake.judged import judged_intake
from storage.intake.moments_of_gas import SampleSites
from storage.intake.patients import Patients
from storage.intake.result_versions import ResultVersions
from storage.intake.row_reading import EntryRow
from storage.intake.said import Aside, Said
from storage.intake.sample_spool import SampleSpool
from storage.store import Store

Progress = Callable[[int, int], None]


def read_fhir(
    path: Path | str, *, now: Instant, said: Said | None = None, existing: Store | None = None,
    progress: Progress | None = None, cancelled: Callable[[], bool] | None = None,
) -> Intake:  # fmt: skip
    """Read a file of FHIR against the clock and what the store already has. Nothing is written.

    A finding's `line` is the number of its resource in the file, from 1.

    Raises:
        RecordError: `intake.cancelled`.
        OSError: the file cannot be read.
    """
    said, file = said or Said(), Path(path)
    findings, aside, spool = Findings(), Aside(), SampleSpool()
    try:
        resources, sha, size = read_resources(file)
    except UnreadableFileError as error:
        findings.refuse(error.line, "", error.value, error.message)
        return judged_intake(SourceFacts("fhir", file.name), [], spool, findings, existing, whole=False)
    holdings = Holdings.of(resources)
    patients = Patients(existing, said.episodes, now)
    versions, sites = ResultVersions(existing), SampleSites()
    rows = ObservationRows(now, CodeBook(said.codes), patients, holdings, findings, aside, spool)
    made: list[EntryRow] = []
    for i, found in enumerate(holdings.observations):
        if cancelled is not None and cancelled():
            raise refuse("intake.cancelled", path=file.name)
        if progress is not None and i % 100 == 0:
            progress(i, len(holdings.observations))
        for result, site in rows.read(found):
            try:
                sites.note(result.entry, site, result.line, result.issued)
            except RecordError as error:
                findings.refuse(result.line, "specimen", site, error.message)
                continue
            row = versions.add(result)
            if row is not None:
                made.append(row)
    for gone in versions.nothing_to_withdraw:
        values = {"channel": gone.entry.channel, "status": gone.why}
        aside.put(gone.line, "status", gone.why, Message("result.nothing_to_withdraw", values))
    for kind, count in Counter(text(f.resource, "resourceType") for f in holdings.others).items():
        if kind not in ("Patient", "Specimen"):
            aside.put(0, "resourceType", kind, Message("fhir.other_resource", {"kind": kind, "count": count}))
    facts: dict[str, str | int | float | bool | None] = {"format": "FHIR R4"}
    facts["observations"] = len(holdings.observations)
    source = SourceFacts("fhir", file.name, sha, size, facts)
    made = [*sites.rows(versions), *patients.confirmations(BY), *made]
    intake = judged_intake(source, made, spool, findings, existing, repeated=versions.repeated,
                           aside=aside.listed, aside_count=aside.count)  # fmt: skip
    return replace(intake, unknown_patients=tuple(patients.unknown))
