"""Observations by FHIR R4 in JSON: a resource, a Bundle, or one resource a line (.ndjson). Narrow on purpose:
what an observation of vital signs, gases or settings needs, and a reason for everything else."""

from __future__ import annotations

from collections import Counter
from collections.abc import Callable
from pathlib import Path

from core.record.instant import Instant
from core.record.message import Message, refuse
from storage.draft_batch import SourceFacts
from storage.intake.coded_value import CodeBook
from storage.intake.fhir_bundle import Holdings
from storage.intake.fhir_json import read_resources, text
from storage.intake.fhir_observation import BY, ObservationRows
from storage.intake.findings import Intake, UnreadableFileError
from storage.intake.results_intake import ResultsIntake
from storage.intake.said import Said
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
    made = ResultsIntake(said, now, existing)
    try:
        resources, sha, size = read_resources(file)
    except UnreadableFileError as error:
        made.findings.refuse(error.line, "", error.value, error.message)
        return made.finished(SourceFacts("fhir", file.name), BY, "status", whole=False)
    holdings = Holdings.of(resources)
    rows = ObservationRows(now, CodeBook(said.codes), made.patients, holdings, made.findings, made.aside, made.spool)
    try:
        for i, found in enumerate(holdings.observations):
            if cancelled is not None and cancelled():
                raise refuse("intake.cancelled", path=file.name)
            if progress is not None and i % 100 == 0:
                progress(i, len(holdings.observations))
            made.take(rows.read(found), "specimen")
    except UnreadableFileError as error:
        made.findings.refuse(error.line, "", error.value, error.message)
        return made.finished(SourceFacts("fhir", file.name, sha, size), BY, "status", whole=False)
    for kind, count in Counter(text(f.resource, "resourceType") for f in holdings.others).items():
        if kind not in ("Patient", "Specimen"):
            made.aside.put(0, "resourceType", kind, Message("fhir.other_resource", {"kind": kind, "count": count}))
    facts = {"format": "FHIR R4", "observations": str(len(holdings.observations))}
    return made.finished(SourceFacts("fhir", file.name, sha, size, facts), BY, "status")
