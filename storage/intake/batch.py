"""Taking a file's intake into the store: whole or not at all."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace

from core.record.instant import Instant
from core.record.message import refuse
from storage.draft_batch import DraftBatch, DraftChunk, DraftEntry, Receipt
from storage.intake.findings import Intake
from storage.store import Store

_CHUNKS_AT_ONCE = 20_000
"""Blocks of samples in one batch: enough to be quick, few enough to keep memory bounded."""

_LEFT_OUT_NAMED = 1_000


def take_in(store: Store, intake: Intake, *, by: str, now: Instant, without_refused: bool = False) -> Receipt | None:
    """Add what a file brings, in one transaction. None where the store already has all of it.

    With `without_refused` a person has decided to leave the refused rows out; the source then says which.
    Recording times of the file stand only in an empty store marked as imported; elsewhere they are kept as
    what the source claims.

    Raises:
        RecordError: `intake.refused` when rows are refused, or the file could not be read to its end.
    """
    if not intake.whole or (intake.refusals and not without_refused):
        raise refuse("intake.refused", rows=intake.refused_rows, path=intake.source.name,
                     accepted="a file without refused rows")  # fmt: skip
    if not intake.entries and not intake.chunks:
        return None
    source = intake.source
    if intake.refusals:
        lines = ",".join(str(r) for r in sorted({r.line for r in intake.refusals}))
        values = "; ".join(f"{r.line} {r.column}".strip() for r in intake.refusals[:_LEFT_OUT_NAMED])
        facts = {**source.facts, "left_out_rows": intake.refused_rows, "left_out_lines": lines,
                 "left_out_values": values}  # fmt: skip
        source = replace(source, facts=facts)
    intake = replace(intake, source=source)
    honoured = store.imported and store.head() == 0
    drafts, times = zip(*_batches(intake, by, now, honoured), strict=True)
    receipts = store.append_drafts(drafts, times)
    return replace(receipts[-1], first_seq=receipts[0].first_seq, ids=tuple(i for r in receipts for i in r.ids))


def _batches(intake: Intake, by: str, now: Instant, honoured: bool) -> Iterator[tuple[DraftBatch, Instant]]:
    for entries, recorded_at in _by_recording(intake.entries, now) if honoured else [(intake.entries, now)]:
        if entries:
            yield DraftBatch(by, "intake", entries, source=intake.source), recorded_at
    for start in range(0, len(intake.chunks), _CHUNKS_AT_ONCE):
        some: tuple[DraftChunk, ...] = intake.chunks[start : start + _CHUNKS_AT_ONCE]
        yield DraftBatch(by, "intake", chunks=some, source=intake.source), now


def _by_recording(entries: tuple[DraftEntry, ...], now: Instant) -> Iterator[tuple[tuple[DraftEntry, ...], Instant]]:
    """Entries by the time at which they were recorded; those without one are recorded now."""
    groups: dict[Instant, list[DraftEntry]] = {}
    for draft in entries:
        claimed = draft.source_recorded_at
        groups.setdefault(now if claimed is None else min(claimed, now), []).append(draft)
    for recorded_at in sorted(groups):
        yield tuple(groups[recorded_at]), recorded_at
