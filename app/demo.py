"""The sample shift in a throw-away store, at a pretended moment late in the night."""

from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path

from core.record.instant import HOUR, MINUTE, Instant, parse
from core.record.message import Message
from storage.draft_batch import DraftBatch, DraftChunk, DraftEntry
from storage.errors import StoreError
from storage.intake.findings import Intake
from storage.store import Store

STORE_NAME = "sample-shift.luffmark"
BY = "DEMO"
_SOON, _LATE = 3 * MINUTE, 50 * MINUTE
_ROUND = frozenset({"rr", "hr", "spo2", "sbp", "gcs", "temp"})
ZONE = "Europe/London"
"""The wall clock of the invented ward; in this night it stands at UTC."""


def demo_now() -> Instant:
    """The moment the demonstration pretends it is."""
    import sample_data

    return parse(sample_data.DEMO_CLOCK)


def make_demo_store(folder: Path) -> Path:
    """Take the sample shift's files into a new store in `folder`; its path.

    Raises:
        StoreError: the folder cannot hold a store, or a sample file is not what it was.
    """
    import sample_data
    from app.operations import policy

    path, now = folder / STORE_NAME, demo_now()
    with Store.create(path, now=now - 12 * HOUR, by=BY, imported=True) as store:
        recorded: dict[Instant, list[DraftBatch]] = {}
        for file in sample_data.files():
            for batch, at in _as_recorded(_read(file, now, store)):
                recorded.setdefault(min(at, now), []).append(batch)
        ordered = [(batch, at) for at in sorted(recorded) for batch in recorded[at]]
        store.append_drafts([batch for batch, _ in ordered], [at for _, at in ordered])
        policy.begin(store, BY, now, None)
    return path


def _read(file: Path, now: Instant, store: Store) -> Intake:
    from storage.intake.log_csv import read_log_csv

    intake = read_log_csv(file, now=now, existing=store)
    if intake.refusals:
        found = intake.refusals[0]
        detail = f"{file.name}, line {found.line}: {found.message.key}"
        raise StoreError(Message("demo.sample_refused", {"detail": detail}))
    return intake


def _as_recorded(intake: Intake) -> Iterator[tuple[DraftBatch, Instant]]:
    """The night as a ward would have recorded it, so that it can be looked back at: what people typed a few minutes
    after it happened, every eighth observation at the end of a round; each device block when it was full."""
    groups: dict[Instant, list[DraftEntry]] = {}
    for draft in intake.entries:
        late = draft.entry.channel in _ROUND and (draft.entry.at // MINUTE + len(draft.entry.episode)) % 8 == 0
        groups.setdefault(draft.entry.at + (_LATE if late else _SOON), []).append(draft)
    for at, entries in groups.items():
        yield DraftBatch(BY, "intake", tuple(entries), source=intake.source), at
    blocks: dict[Instant, list[DraftChunk]] = {}
    for chunk in intake.chunks:
        blocks.setdefault(chunk.block.t1 + MINUTE, []).append(chunk)
    for at, chunks in blocks.items():
        yield DraftBatch(BY, "intake", chunks=tuple(chunks), source=intake.source), at
