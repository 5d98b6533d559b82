"""Results by HL7 v2: ORU^R01 messages of a file, read as a ward's analysers and record systems write them.

What is read: MSH (separators, time, character set), PID-3 (identifiers), OBR-3/7/15, SPM-4 (what was sampled),
OBX-2/3/4/5/6/11/14 and NTE. The `hl7` package cuts a message into segments and fields; nothing else of it is used.
"""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

from core.record.instant import Instant
from storage.draft_batch import SourceFacts
from storage.intake.coded_value import CodeBook
from storage.intake.findings import Intake, UnreadableFileError
from storage.intake.hl7v2_message import BY, MessageRows
from storage.intake.hl7v2_messages import MessageReader
from storage.intake.results_intake import ResultsIntake
from storage.intake.said import Said
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
    made = ResultsIntake(said, now, existing)
    reader = MessageReader(Path(path), progress, cancelled)
    rows = MessageRows(now, said.zone, CodeBook(said.codes), made.patients, made.findings, made.aside)
    whole = True
    try:
        for raw in reader:
            made.take(rows.read(raw), "OBR-15")
    except UnreadableFileError as error:
        made.findings.refuse(error.line, "", error.value, error.message)
        whole = False
    facts = {"format": "HL7 v2", "zone": said.zone, "messages": str(rows.count)}
    source = SourceFacts("hl7v2", Path(path).name, reader.sha, reader.size, facts)
    return made.finished(source, BY, "OBX-11", whole=whole)
