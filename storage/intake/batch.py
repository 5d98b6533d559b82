"""Taking a file's intake into the store: whole or not at all."""

from __future__ import annotations

from collections import deque
from collections.abc import Callable, Iterable, Iterator
from dataclasses import replace
from functools import partial

from core.record.instant import Instant
from core.record.message import refuse
from storage.draft_batch import DraftBatch, DraftChunk, DraftEntry, Receipt
from storage.intake.findings import Intake
from storage.intake.patients import CHANNEL as IDENTIFIER
from storage.intake.withdrawal import ALREADY_THERE
from storage.store import Changes, Store

Progress = Callable[[int, int], None]
_CHUNKS_AT_ONCE = 5_000
"""Blocks of samples in one batch: enough to be quick, few enough to keep memory bounded."""

_BYTES_AT_ONCE = 2 << 20
"""Bytes of samples in one batch: between batches the work tells how far it is, and can be stopped."""

_LEFT_OUT_NAMED = 1_000


def take_in(
    store: Store, intake: Intake, *, by: str, now: Instant, without_refused: bool = False,
    progress: Progress | None = None,
) -> Receipt | None:  # fmt: skip
    """Add what a file brings, in one transaction. None where the store already has all of it.

    `progress(done, total)` is told blocks of samples; what it raises stops the taking, and nothing stays.

    With `without_refused` a person has decided to leave the refused rows out; the source then says which.
    Recording times of the file stand only in an empty store marked as imported; elsewhere they are kept as
    what the source claims.

    Raises:
        RecordError: `intake.refused` when rows are refused, or the file could not be read to its end;
            `intake.overtaken` when something of its episodes was recorded since it was read.
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
    counts = {ALREADY_THERE: intake.repeated_in_store, "laid_over_samples": intake.overlaid}
    source = replace(source, facts={**source.facts, **{name: count for name, count in counts.items() if count}})
    honoured = store.imported and store.head() == 0
    times: deque[Instant] = deque()
    drafts = _drafts(_batches(replace(intake, source=source), by, now, honoured, progress), times)
    receipts = store.append_drafts(drafts, _taken_from(times), unless=partial(_overtakes, intake),
                                   since=store.head() if intake.head is None else intake.head)  # fmt: skip
    if not receipts:
        raise refuse("intake.overtaken", path=source.name, accepted="the file, read again")
    return replace(receipts[-1], first_seq=receipts[0].first_seq, ids=tuple(i for r in receipts for i in r.ids))


def _overtakes(intake: Intake, changes: Changes) -> bool:
    """Whether something was recorded that the reading of the file would have looked at."""
    if changes.erased or changes.episodes & set(intake.episodes):
        return True
    by_identifier = intake.source.kind in ("hl7v2", "fhir")
    return by_identifier and any(IDENTIFIER in channels for channels in changes.channels.values())


def _drafts(batches: Iterator[tuple[DraftBatch, Instant]], times: deque[Instant]) -> Iterator[DraftBatch]:
    """The batches, each noted in `times` as it is given; none is held (as `tee` would hold some fifty)."""
    for draft, at in batches:
        times.append(at)
        yield draft


def _taken_from(times: deque[Instant]) -> Iterator[Instant]:
    while times:
        yield times.popleft()


def _batches(
    intake: Intake, by: str, now: Instant, honoured: bool, progress: Progress | None
) -> Iterator[tuple[DraftBatch, Instant]]:
    """The batches one by one, each with its recording time: all of them at once would not be held in memory."""
    groups = _by_recording(intake.entries, now) if honoured else {now: list(intake.entries)}
    for at in sorted(groups):
        if groups[at]:
            yield DraftBatch(by, "intake", tuple(groups[at]), source=intake.source), at
    done = 0
    for some in _parts(intake.chunks):
        if progress is not None:
            progress(done, len(intake.chunks))
        done += len(some)
        yield DraftBatch(by, "intake", chunks=some, source=intake.source), now
    if progress is not None:
        progress(done, done)  # the last moment at which it can be stopped


def _parts(chunks: Iterable[DraftChunk]) -> Iterator[tuple[DraftChunk, ...]]:
    """Chunks in parts that memory holds easily."""
    waiting: list[DraftChunk] = []
    size = 0
    for chunk in chunks:
        waiting.append(chunk)
        size += len(chunk.block.blob)
        if len(waiting) >= _CHUNKS_AT_ONCE or size >= _BYTES_AT_ONCE:
            yield tuple(waiting)
            waiting, size = [], 0
    if waiting:
        yield tuple(waiting)


def _by_recording(entries: tuple[DraftEntry, ...], now: Instant) -> dict[Instant, list[DraftEntry]]:
    """Entries by the time at which they were recorded; those without one are recorded now."""
    groups: dict[Instant, list[DraftEntry]] = {}
    for draft in entries:
        claimed = draft.source_recorded_at
        groups.setdefault(now if claimed is None else min(claimed, now), []).append(draft)
    return groups
