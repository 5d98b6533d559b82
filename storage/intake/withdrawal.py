"""Withdrawing all that a file brought: entries by their inverse, samples by a mask of their source.

What lay under it comes back, as if the file had never been taken, in whatever order files are withdrawn: the samples
of a withdrawn source are passed over in reading, and no inverse brings back the value of another withdrawn file.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, field, replace

from core.record.entries import Action, Entry, NewEntry
from core.record.instant import Instant
from core.record.knowledge import REPLACING_ACTIONS, VALUE_ACTIONS
from core.record.message import refuse
from storage.draft_batch import DraftBatch, DraftEntry, Receipt, SourceFacts
from storage.reading_sources import SampleSpan
from storage.rules import WITHDRAWN_WHOLE
from storage.store import Store

ALREADY_THERE = "already_there"
"""The fact of a source that counts what the store had already, so that it was not taken twice."""
_NOT_YET = 1 << 62


@dataclass(frozen=True, slots=True)
class Withdrawn:
    """What was withdrawn. `kept` counts entries that somebody has corrected since, which stay as corrected.

    `emptied` are the episodes of which nothing stands any more: no screen shows them. `relied_on` names files that
    were taken later and of which some values were there already by this one: they were not taken twice.
    """

    name: str
    entries: int
    sample_spans: int
    kept: int
    receipt: Receipt
    emptied: tuple[str, ...] = ()
    relied_on: tuple[str, ...] = ()


def withdraw_source(store: Store, source_id: str, *, by: str, now: Instant) -> Withdrawn:
    """Withdraw all that a source brought, in one batch.

    A file all of whose values were corrected since is withdrawn too: they must not come back with a correction's end.

    Raises:
        RecordError: `intake.unknown_source`, `intake.withdrawn_already`.
    """
    sources = store.sources()
    source = next((s for s in sources if s.id == source_id), None)
    if source is None:
        raise refuse("intake.unknown_source", value=source_id[:80], accepted="a file that was taken in")
    gone = {str(s.facts.get("of", "")): s.first_seq for s in sources if s.kind == "withdrawal"}
    if source_id in gone:
        raise refuse("intake.withdrawn_already", path=source.name, accepted="a file that still stands")
    chains = _Chains(store, {source_id: _NOT_YET, **gone})
    brought = [e for e in store.source_entries(source_id) if e.action in REPLACING_ACTIONS | VALUE_ACTIONS]
    ends = {chains.end(e).id: chains.end(e) for e in brought if chains.brought_by_file(e)}
    spans = store.source_spans(source_id)
    made = (chains.inverse(e, by) for e in sorted(ends.values(), key=lambda e: -e.seq))
    inverses = [new for new in made if new is not None]
    drafts = tuple(DraftEntry(new) for new in (*inverses, *(_mask(s, source_id, by) for s in spans)))
    facts = SourceFacts("withdrawal", source.name, facts={"of": source_id})
    receipt = store.append_drafts((DraftBatch(by, "intake.withdraw", drafts, (), facts),), (now,))[0]
    kept = sum(chains.end(e).id not in ends and chains.end(e).action is not Action.WITHDRAW for e in brought)
    touched = dict.fromkeys([d.entry.episode for d in drafts])
    emptied = tuple(key for key in touched if store.episode(key).is_empty)
    later = [s for s in sources if s.first_seq > source.last_seq and s.id not in gone and s.facts.get(ALREADY_THERE)]
    relied = tuple(dict.fromkeys(s.name for s in later if _episodes(store, s.id) & touched.keys()))
    return Withdrawn(source.name, len(inverses), len(spans), kept, receipt, emptied, relied)


def _episodes(store: Store, source_id: str) -> set[str]:
    entries, spans = store.source_entries(source_id), store.source_spans(source_id)
    return {e.episode for e in entries} | {s.episode for s in spans}


@dataclass
class _Chains:
    """The chains of corrections that a file is part of. `gone`: withdrawn files, and from which sequence on."""

    store: Store
    gone: dict[str, int]
    _entries: dict[str, tuple[Entry, ...]] = field(default_factory=dict)
    _by_id: dict[str, Entry] = field(default_factory=dict)
    _followers: dict[str, Entry] = field(default_factory=dict)
    _sources: dict[str, str] = field(default_factory=dict)

    def entries(self, episode: str) -> tuple[Entry, ...]:
        """All entries that bear on an episode."""
        if episode not in self._entries:
            self._entries[episode] = found = self.store.entries(episode)
            self._sources |= self.store.source_ids(episode)
            for e in found:
                self._by_id[e.id] = e
                if e.replaces and e.action in REPLACING_ACTIONS:
                    before = self._followers.get(e.replaces)
                    self._followers[e.replaces] = e if before is None or before.seq < e.seq else before
        return self._entries[episode]

    def end(self, entry: Entry) -> Entry:
        """The entry that counts now of those that an entry is followed by."""
        self.entries(entry.episode)
        while (later := self._followers.get(entry.id)) is not None:
            entry = later
            self.entries(entry.episode)
        return entry

    def brought_by_file(self, entry: Entry) -> bool:
        """Whether what counts now in an entry's chain is of a file that is withdrawn, and no person's correction."""
        end = self.end(entry)
        if end.reason == WITHDRAWN_WHOLE and end.action is not Action.WITHDRAW:
            value = next((b for b in self._before(end) if _value(b) == _value(end)), None)
            return value is not None and self._of_gone(value)
        return self._of_gone(end)

    def inverse(self, end: Entry, by: str) -> NewEntry:
        """The entry that brings back what stood before all that withdrawn files brought."""
        before = next((b for b in self._before(end) if not self._of_gone(b)), None)
        if before is None or before.action not in VALUE_ACTIONS:
            return NewEntry(end.episode, end.channel, end.at, zone=end.zone, by=by, action=Action.WITHDRAW,
                            replaces=end.id, reason=WITHDRAWN_WHOLE)  # fmt: skip
        action = Action.CORRECT if before.episode == end.episode else Action.MOVE
        return replace(as_new(before), by=by, action=action, replaces=end.id, reason=WITHDRAWN_WHOLE)

    def _before(self, entry: Entry) -> Iterable[Entry]:
        """What an entry's chain held before it, the newest first, without what withdrawals put there."""
        while (before := self._by_id.get(entry.replaces)) is not None:
            if before.reason != WITHDRAWN_WHOLE:
                yield before
            entry = before

    def _of_gone(self, entry: Entry) -> bool:
        self.entries(entry.episode)
        return self._sources.get(entry.id) in self.gone and entry.reason != WITHDRAWN_WHOLE


def _value(e: Entry) -> tuple[Instant, float | None, str | None, str]:
    return e.at, e.number, e.words, e.raw


def as_new(e: Entry) -> NewEntry:
    """The value of an entry as a new one, without what made the old one."""
    return NewEntry(e.episode, e.channel, e.at, e.number, e.words, e.raw, e.raw_unit, e.decimals, e.zone, e.by,
                    e.note, e.doubt)  # fmt: skip


def _mask(span: SampleSpan, source_id: str, by: str) -> NewEntry:
    return NewEntry(span.episode, span.channel, span.start, float(span.end), by=by, action=Action.MASK,
                    reason=WITHDRAWN_WHOLE, source=source_id)  # fmt: skip
