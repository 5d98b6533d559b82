"""What every reader ends with: rows and samples judged together and against the store, as one intake."""

from __future__ import annotations

from collections.abc import Sequence

from core.record.message import Message
from storage.draft_batch import DraftChunk, SourceFacts
from storage.intake.entry_rows import EntryRows
from storage.intake.findings import Findings, Intake, Refusal
from storage.intake.held_samples import held_samples
from storage.intake.row_reading import EntryRow
from storage.intake.sample_spool import SampleSpool
from storage.store import Store


def judged_intake(
    source: SourceFacts, rows: list[EntryRow], spool: SampleSpool, findings: Findings, existing: Store | None,
    *, whole: bool = True, repeated: int = 0, aside: Sequence[Refusal] = (), aside_count: int = 0,
) -> Intake:  # fmt: skip
    """The intake of rows and samples that were read. `repeated` were known for held before they got here."""
    judged = EntryRows(rows, spool.leak_uses, existing, findings)
    entries = judged.judged()
    chunks, known = new_chunks(spool, source.id, existing)
    for again in spool.repeated:
        message = Message("row.repeated", {"first_line": again.first_line, "accepted": "each row once"})
        findings.refuse(again.line, "", f"{again.episode} {again.channel}", message)
    return Intake(
        source, entries, chunks,
        tuple(sorted(findings.refusals, key=lambda r: r.line)), findings.refused_rows,
        judged.repeated + known + repeated,
        tuple(sorted(findings.doubts, key=lambda d: d.line)), whole,
        tuple(aside), max(aside_count, len(aside)),
    )  # fmt: skip


def new_chunks(spool: SampleSpool, source_id: str, existing: Store | None) -> tuple[tuple[DraftChunk, ...], int]:
    """The hours of samples that the store does not have just so, and how many samples it has."""
    fresh: list[DraftChunk] = []
    known = 0
    for key in spool.kinds():
        held = None if existing is None else held_samples(existing, *key)
        for block in spool.blocks(key):
            if held is not None and held.has(block):
                known += block.n
            else:
                fresh.append(DraftChunk(*key, source_id, block))
    return tuple(fresh), known
