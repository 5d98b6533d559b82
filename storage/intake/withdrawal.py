"""Withdrawing all that a file brought: entries by their inverse, samples by masks; what lay under them comes back."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from core.record.entries import Action, Entry, NewEntry
from core.record.instant import Instant
from core.record.message import refuse
from core.record.samples import DeviceSamples
from storage.draft_batch import DraftBatch, DraftEntry, Receipt, SourceFacts
from storage.intake.entry_rows import WITHDRAWN_WHOLE as WHOLE
from storage.reading_sources import SampleSpan, TakenSource
from storage.store import Store, encoded


@dataclass(frozen=True, slots=True)
class Withdrawn:
    """What was withdrawn. `kept` counts entries that somebody has corrected since, which stay as corrected."""

    name: str
    entries: int
    sample_spans: int
    kept: int
    receipt: Receipt


def withdraw_source(store: Store, source_id: str, *, by: str, now: Instant) -> Withdrawn:
    """Withdraw all that a source brought, in one batch.

    Raises:
        RecordError: `intake.unknown_source`, `intake.withdrawn_already`.
    """
    source = next((s for s in store.sources() if s.id == source_id), None)
    if source is None:
        raise refuse("intake.unknown_source", value=source_id[:80], accepted="a file that was taken in")
    entries = store.source_entries(source_id)
    superseded = store.superseded([e.id for e in entries])
    standing = [e for e in entries if e.id not in superseded and e.action is not Action.WITHDRAW]
    masked = {(e.episode, e.channel) for s in store.source_spans(source_id) for e in store.entries(s.episode)
              if e.action is Action.MASK and e.source == source_id and e.reason == WHOLE}  # fmt: skip
    spans = [s for s in store.source_spans(source_id) if (s.episode, s.channel) not in masked]
    if not standing and not spans:
        raise refuse("intake.withdrawn_already", path=source.name, accepted="a file that still stands")
    drafts = [DraftEntry(_inverse(store, e, by)) for e in reversed(standing)]
    drafts += [DraftEntry(_mask(s, source_id, by)) for s in spans]
    restored = [block for s in spans for block in _under(store, s, source)]
    facts = SourceFacts("withdrawal", source.name, facts={"of": source_id})
    chunks = tuple(chunk for block in restored for chunk in encoded(replace(block, source=facts.id)))
    batch = DraftBatch(by, "intake.withdraw", tuple(drafts), chunks, facts)
    receipt = store.append_drafts((batch,), (now,))[0]
    kept = sum(e.id in superseded and e.action is not Action.WITHDRAW for e in entries)
    return Withdrawn(source.name, len(standing), len(spans), kept, receipt)


def _inverse(store: Store, entry: Entry, by: str) -> NewEntry:
    """The entry that brings back what stood before a file's entry."""
    before = None
    if entry.replaces:
        before = next((e for e in store.entries(entry.episode) if e.id == entry.replaces), None)
    if before is None or before.action in (Action.WITHDRAW, Action.MASK, Action.SHIFT):
        return NewEntry(entry.episode, entry.channel, entry.at, zone=entry.zone, by=by, action=Action.WITHDRAW,
                        replaces=entry.id, reason=WHOLE)  # fmt: skip
    return replace(as_new(before), by=by, action=Action.CORRECT, replaces=entry.id, reason=WHOLE)


def as_new(e: Entry) -> NewEntry:
    """The value of an entry as a new one, without what made the old one."""
    return NewEntry(e.episode, e.channel, e.at, e.number, e.words, e.raw, e.raw_unit, e.decimals, e.zone, e.by,
                    e.note, e.doubt)  # fmt: skip


def _mask(span: SampleSpan, source_id: str, by: str) -> NewEntry:
    return NewEntry(span.episode, span.channel, span.start, float(span.end), by=by, action=Action.MASK, reason=WHOLE,
                    source=source_id)  # fmt: skip


def _under(store: Store, span: SampleSpan, source: TakenSource) -> list[DeviceSamples]:
    """The samples that the file had hidden: those known before it, where nothing later lies over them."""
    found = store.samples(span.episode, head=source.first_seq - 1, channel=span.channel)
    out = []
    for block in found:
        keep = (block.t >= span.start) & (block.t <= span.end)
        for later in store.later_spans(span, source.last_seq):
            keep &= (block.t < later.start) | (block.t > later.end)
        if keep.any():
            out.append(replace(block, t=np.ascontiguousarray(block.t[keep]), v=block.v[keep]))
    return out
