"""What every reader ends with: rows and samples judged together and against the store, as one intake."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Iterator, Sequence

from core.record.instant import DAY
from core.record.labels import alike
from core.record.message import Message
from storage.chunks import Block
from storage.draft_batch import SourceFacts
from storage.intake.entry_rows import EntryRows
from storage.intake.findings import Findings, Intake, Refusal, episodes_of
from storage.intake.fresh_chunks import FreshChunks
from storage.intake.held_samples import Compared, HeldSamples
from storage.intake.named_episodes import open_labels
from storage.intake.row_reading import EntryRow
from storage.intake.sample_spool import SampleSpool
from storage.store import Store

_BLOCKS_AT_ONCE, _SAMPLES_AT_ONCE = 2_000, 400_000
"""Blocks and samples that are compared at once with what the store has: enough to be quick, few enough for memory."""
_TIME_AT_ONCE = 20 * DAY
"""From the first to the last of them: the store may hold each second of it."""


def judged_intake(
    source: SourceFacts, rows: list[EntryRow], spool: SampleSpool, findings: Findings, existing: Store | None,
    *, whole: bool = True, repeated: int = 0, aside: Sequence[Refusal] = (), aside_count: int = 0,
    progress: Callable[[int, int], None] | None = None,
) -> Intake:  # fmt: skip
    """The intake of rows and samples that were read. `repeated` were known for held before they got here.

    `progress` is told now and then that the file is read (all of it); what it raises stops the work.
    """

    def step() -> None:
        if progress is not None:
            progress(source.size, source.size)

    step()
    judged = EntryRows(rows, spool.leak_uses, existing, findings)
    entries = judged.judged()
    chunks, known = new_chunks(spool, source.id, existing, step)
    for again in spool.repeated:
        message = Message("row.repeated", {"first_line": again.first_line, "accepted": "each row once"})
        findings.refuse(again.line, "", f"{again.episode} {again.channel}", message)
    findings.refused_rows += spool.repeated_count - len(spool.repeated)
    of = episodes_of(entries, chunks.spans)
    new = tuple(k for k in of if existing is None or not existing.has_episode(k))
    _doubt_names(new, rows, existing, findings)
    return Intake(
        source, entries, chunks if len(chunks) else (),
        tuple(sorted(findings.refusals, key=lambda r: r.line)), findings.refused_rows,
        judged.repeated + known + repeated,
        tuple(sorted(findings.doubts, key=lambda d: d.line)), whole,
        tuple(aside), max(aside_count, len(aside)), new_episodes=new,
    )  # fmt: skip


def _doubt_names(new: Sequence[str], rows: Iterable[EntryRow], existing: Store | None, findings: Findings) -> None:
    """Say where a new episode would have as its key what the ward calls another one that goes on."""
    labels = open_labels(existing) if new else {}
    doubtful = {key: called for key in new if (called := labels.get(alike(key)))}
    if not doubtful:
        return
    lines: dict[str, int] = {}
    for row in rows:
        lines.setdefault(row.draft.entry.episode, row.line)
    for key, called in doubtful.items():
        message = Message("row.key_is_label", {"value": key, "episodes": ", ".join(called[:3])})
        findings.doubt(lines.get(key, 1), "", key, message)


def new_chunks(
    spool: SampleSpool, source_id: str, existing: Store | None, step: Callable[[], None]
) -> tuple[FreshChunks, int]:
    """The samples that the store does not have just so, and how many it has."""
    fresh = FreshChunks(source_id)
    known = 0
    there = _known_episodes(spool, existing)
    for key in spool.kinds():
        held = HeldSamples(existing, *key) if existing is not None and key[0] in there else None
        for some in _in_parts(spool.blocks(key)):
            step()
            found = Compared(some) if held is None else held.compared(some)
            known += found.known
            for block in found.fresh:
                fresh.add(key, block)
            fresh.note_over(key, found.overlaid)
    return fresh, known


def _known_episodes(spool: SampleSpool, existing: Store | None) -> frozenset[str]:
    """Those of the spool's episodes that the store has anything of."""
    if existing is None:
        return frozenset()
    return frozenset(filter(existing.has_episode, {episode for episode, _channel in spool.kinds()}))


def _in_parts(blocks: Iterable[Block]) -> Iterator[list[Block]]:
    waiting: list[Block] = []
    count = 0
    for block in blocks:
        if waiting and block.t1 - waiting[0].t0 > _TIME_AT_ONCE:
            yield waiting
            waiting, count = [], 0
        waiting.append(block)
        count += block.n
        if len(waiting) >= _BLOCKS_AT_ONCE or count >= _SAMPLES_AT_ONCE:
            yield waiting
            waiting, count = [], 0
    if waiting:
        yield waiting
