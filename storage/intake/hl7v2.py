"""Results by HL7 v2: ORU^R01 messages of a file, read as a ward's analysers and record systems write them.

What is read: MSH (separators, time, character set), PID-3 (identifiers), OBR-3/7/15, SPM-4 (what was sampled),
OBX-2/3/4/5/6/11/14 and NTE. The `hl7` package cuts a message into segments and fields; nothing else of it is used.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

from core.record.instant import Instant
from core.record.message import Message, RecordError
from storage.draft_batch import SourceFacts
from storage.intake.coded_value import CodeBook
from storage.intake.findings import Findings, Intake, UnreadableFileError
from storage.intake.hl7v2_message import MessageRows
from storage.intake.hl7v2_messages import MessageReader
from storage.intake.judged import judged_intake
from storage.intake.moments_of_gas import SampleSites
from storage.intake.patients import Patients
from storage.intake.result_versions import ResultVersions
from storage.intake.row_reading import EntryRow
from storage.intake.said import Aside, Said
from storage.intake.sample_spool import SampleSpool
from storage.store import Store

Progress = Callable[[int, int], None]


def read_hl7(
    path: Path | str, *, now: Instant, said: Said | None = None, existing: Store | None = None,
    progress: Progress | None = None, cancelled: Callable[[], bool] | None = None,
) -> Intake:  # fmt: skip
    """Read a file of HL7 v2 messages against the clock and what the store already has. Nothing is written.

    Raises:
        RecordError: `intake.cancelled`.
        OSError: the file cannot be read.
    """
    said = said or Said()
    findings, aside = Findings(), Aside()
    patients = Patients(existing, said.episodes, now)
    versions, sites = ResultVersions(existing), SampleSites()
    reader = MessageReader(Path(path), progress, cancelled)
    rows = MessageRows(now, said.zone, CodeBook(said.codes), patients, findings, aside)
    made: list[EntryRow] = []
    whole = True
    try:
        for raw in reader:
            for result, site in rows.read(raw):
                try:
                    sites.note(result.entry, site, result.line, result.issued)
                except RecordError as error:
                    findings.refuse(result.line, "OBR-15", site, error.message)
                    continue
                row = versions.add(result)
                if row is not None:
                    made.append(row)
    except UnreadableFileError as error:
        findings.refuse(error.line, "", error.value, error.message)
        whole = False
    for gone in versions.nothing_to_withdraw:
        values = {"channel": gone.entry.channel, "status": gone.why}
        aside.put(gone.line, "OBX-11", gone.why, Message("result.nothing_to_withdraw", values))
    facts: dict[str, str | int | float | bool | None] = {"format": "HL7 v2", "zone": said.zone}
    facts["messages"] = rows.count
    source = SourceFacts("hl7v2", Path(path).name, reader.sha, reader.size, facts)
    made = [*sites.rows(versions), *patients.confirmations("HL7"), *made]
    intake = judged_intake(source, made, SampleSpool(), findings, existing, whole=whole,
                           repeated=versions.repeated, aside=aside.listed, aside_count=aside.count)  # fmt: skip
    return replace(intake, unknown_patients=tuple(patients.unknown))
