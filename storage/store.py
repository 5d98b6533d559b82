"""The one door to the store. It returns frozen values, never rows; every change goes through the ledger.

A store is safe to share between threads: writers take turns, readers see one consistent state each.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass
from pathlib import Path
from types import TracebackType
from typing import Self

import sqlalchemy as sa

from core.record.entries import Entry, NewEntry
from core.record.episode import Episode, build_episode
from core.record.instant import Instant
from core.record.knowledge import standing
from core.record.message import Message, refuse
from core.record.samples import DeviceSamples
from storage import episode_index as index
from storage import erasure, keys, opening, row_proofs
from storage import proven_reading as proven
from storage import reading_ledger as reading
from storage import reading_sources as taken
from storage import schema as s
from storage.block_cuts import blocks_of
from storage.chain import GENESIS, last_batch
from storage.changes import Changes, changes_between
from storage.draft_batch import (
    DraftBatch,
    DraftChunk,
    DraftEntry,
    DraftEvent,
    Receipt,
    SourceFacts,
)
from storage.engine import BUSY_SECONDS, fold_journal
from storage.errors import StoreError
from storage.ledger import append_batch, replaced_entries
from storage.person_events import PersonEvent, person_events
from storage.rules import Replaced, is_device_channel
from storage.store_care import StoreCare

__all__ = ["Changes", "Receipt", "SourceFacts", "Store", "StoreError"]

_ALL = 2**62
_PRINTED_DIGITS = 16


@dataclass(frozen=True)
class Store(StoreCare):
    """An open store. Make one with `create` or `open`; close it, or use it as a context manager."""

    @classmethod
    def create(
        cls, path: Path | str, *, passphrase: str | None = None, now: Instant, by: str = "",
        imported: bool = False, cost: keys.Cost = keys.DEFAULT_COST,
    ) -> Store:  # fmt: skip
        """Make a new store. Without a passphrase it is plain. `imported` lets recording times of files stand.

        Raises:
            StoreError: `store.exists`, `store.no_folder`, `store.network_share`.
            RecordError: `passphrase.too_short`.
        """
        facts = {"imported": "yes" if imported else "no", "created_at": str(now), "created_by": by}
        return cls(Path(path), opening.create(Path(path), passphrase, facts, cost))

    @classmethod
    def open(
        cls, path: Path | str, *, passphrase: str | None = None, read_only: bool = False,
        busy_seconds: float = BUSY_SECONDS,
    ) -> Store:  # fmt: skip
        """Open a store, by passphrase or recovery code when it is encrypted.

        Raises:
            StoreError: it is missing, newer, damaged, busy, or the passphrase is wrong.
        """
        store = cls(Path(path), opening.open_store(Path(path), passphrase, read_only, busy_seconds))
        if not (store.read_only or store.is_encrypted):
            store.complete_proofs()
        return store

    def close(self) -> None:
        """Close the store; nothing waits to be saved."""
        self._opened.database.close()

    def __enter__(self) -> Self:
        return self

    def __exit__(
        self, kind: type[BaseException] | None, error: BaseException | None, trace: TracebackType | None
    ) -> None:
        self.close()

    def takes_writing(self, seconds: float = 0.2) -> bool:
        """Whether an entry could be recorded now: not read-only, and no other program holds the write lock."""
        return not self.read_only and self._opened.database.takes_writing(seconds)

    @property
    def imported(self) -> bool:
        """Whether recording times of files are honoured while it is empty."""
        return self._opened.facts.get("imported") == "yes"

    @property
    def notices(self) -> tuple[Message, ...]:
        """What a person should know of how it opened."""
        return self._opened.notices

    @property
    def recovery_code(self) -> str | None:
        """The recovery code, right after creation and never again."""
        return self._opened.recovery_code

    @property
    def store_id(self) -> str:
        """The store's own id."""
        return self._opened.facts["store_id"]

    # -- the head ------------------------------------------------------------------------------------

    def head(self) -> int:
        """The newest sequence; 0 in an empty store."""
        return self._head()[0]

    def head_hash(self) -> str:
        """The chain's newest hash, 64 hex digits."""
        return self._head()[1]

    def printed_head(self) -> str:
        """Sequence and the first 16 hex digits of the hash: what a print shows to prove the chain's tail."""
        seq, digest = self._head()
        return f"{seq} {digest[:_PRINTED_DIGITS]}"

    def proves(self, printed: str) -> bool:
        """Whether the store still holds the head that was once printed, or written down by a witness."""
        seq, _, digits = printed.strip().partition(" ")
        if not seq.isdigit() or len(digits) != _PRINTED_DIGITS:
            return False
        query = sa.select(s.batch.c.hash).where(s.batch.c.last_seq == int(seq))
        with self._opened.database.read() as connection:
            found = connection.execute(query).scalar()
        return found is not None and str(found).startswith(digits.lower())

    def _head(self) -> tuple[int, str]:
        with self._opened.database.read() as connection:
            last = last_batch(connection) if self.is_encrypted else row_proofs.checked_last(connection)
            return (0, GENESIS) if last is None else (int(last["last_seq"]), str(last["hash"]))

    def head_known_at(self, known_at: Instant) -> int:
        """The largest sequence recorded by a moment; 0 when nothing had been."""
        b = s.batch.c  # recording times never step back, so the newest batch by then has the largest sequence
        query = sa.select(b.last_seq).where(b.recorded_at <= known_at).order_by(b.recorded_at.desc(), b.seq.desc())
        with self._opened.database.read() as connection:
            head = int(connection.execute(query.limit(1)).scalar() or 0)
            if not self.is_encrypted:
                proven.check_known_at(connection, known_at, head)
            return head

    def recorded_beside(self, at: Instant) -> tuple[Instant | None, Instant | None]:
        """The newest moment before `at` and the earliest after it at which anything was recorded."""
        when = s.batch.c.recorded_at
        with self._opened.database.read() as connection:
            before = connection.execute(sa.select(sa.func.max(when)).where(when < at)).scalar()
            after = connection.execute(sa.select(sa.func.min(when)).where(when > at)).scalar()
        return before, after

    def changes_since(self, seq: int) -> Changes:
        """What was recorded after a sequence, by this process or another."""
        with self._opened.database.read() as connection:
            return changes_between(connection, seq)

    # -- writing -------------------------------------------------------------------------------------

    def append(
        self, entries: Sequence[NewEntry], *, by: str, operation: str, now: Instant,
        samples: Sequence[DeviceSamples] = (), source: SourceFacts | None = None,
    ) -> Receipt:  # fmt: skip
        """Add entries and device samples as one batch, whole or not at all.

        Raises:
            RecordError: an entry breaks a rule, or there is nothing to add.
            StoreError: busy, full, read-only.
        """
        chunks = tuple(chunk for block in samples for chunk in encoded(block))
        drafts = tuple(DraftEntry(e) for e in entries)
        return self.append_drafts((DraftBatch(by, operation, drafts, chunks, source),), (now,))[0]

    def append_drafts(
        self, drafts: Iterable[DraftBatch], times: Iterable[Instant], *,
        unless: Callable[[Changes], bool] | None = None, since: int = 0,
    ) -> list[Receipt]:  # fmt: skip
        """Add batches in order in one transaction, each recorded at its time (never before the one before).

        `unless` looks, inside the write lock, at what was recorded after `since`; where it says so, nothing is added
        and the list is empty.
        """
        with self._opened.database.write() as connection:
            receipts: list[Receipt] = []
            if unless is not None and unless(changes_between(connection, since)):
                return receipts
            for draft, now in zip(drafts, times, strict=True):
                receipts.append(self._append(connection, draft, now))
        return receipts

    def _append(self, connection: sa.Connection, draft: DraftBatch, now: Instant) -> Receipt:
        """Add a batch with all that is derived from it."""
        made = append_batch(connection, draft, now)
        touched = index.note_batch(connection, draft, made.receipt)
        if not self.is_encrypted:
            row_proofs.note_batch(connection, made.header, made.rows, touched)
        return made.receipt

    def record_event(
        self, event: str, *, person: str, now: Instant, detail: str = "", by: str | None = None
    ) -> Receipt:
        """Chain what a person did that is no entry: a sign-in, a print, an export. `by` where another did it."""
        draft = DraftBatch(person if by is None else by, event, events=(DraftEvent(person, event, detail),))
        return self.append_drafts((draft,), (now,))[0]

    def person_events(
        self, events: Sequence[str] = (), *, person: str | None = None, newest: int | None = None
    ) -> tuple[PersonEvent, ...]:
        """What people did that is no entry, in order: of some kinds, of one person, only the newest."""
        with self._opened.database.read() as connection:
            return person_events(connection, events, person, newest)

    def erase_episode(
        self, episode: str, *, reason: str, by: str, now: Instant, documents_until: Instant | None = None
    ) -> Receipt:
        """Remove every row of an episode for good, and documents and drafts kept up to a moment; their digests stay
        in the chain.

        Raises:
            RecordError: `erasure.unknown_episode`, `erasure.no_reason`.
        """
        with self._opened.database.write() as connection:
            held = self._held(connection)
            gone = erasure.erasures_of(connection, episode, reason)
            if documents_until is not None:
                gone += erasure.erased_documents(connection, documents_until, reason)
                erasure.remove_drafts(connection, documents_until)
            kept = erasure.kept_elsewhere(connection, episode)
            draft = DraftBatch(by, "erase", kept, erasures=gone)
            receipt = self._append(connection, draft, now)
            erasure.remove(connection, gone, episode)
            if held:
                row_proofs.rebuild(connection)
        fold_journal(self._opened.database)
        return receipt

    def erase_documents(self, until: Instant, *, reason: str, by: str, now: Instant) -> int:
        """Remove documents and drafts kept up to a moment; digests stay in the chain. How many documents went."""
        with self._opened.database.write() as connection:
            held = self._held(connection)
            gone = erasure.erased_documents(connection, until, reason)
            erasure.remove_drafts(connection, until)
            if gone:
                self._append(connection, DraftBatch(by, "erase", erasures=gone), now)
                erasure.remove(connection, gone, None)
                if held:
                    row_proofs.rebuild(connection)
        fold_journal(self._opened.database)
        return len(gone)

    # -- reading -------------------------------------------------------------------------------------

    def entries(self, episode: str, head: int | None = None) -> tuple[Entry, ...]:
        """All entries that bear on an episode up to a sequence, in order. What stands: `knowledge.standing`."""
        with self._opened.database.read() as connection:
            return self._entries(connection, episode, _ALL if head is None else head)

    def samples(
        self, episode: str, head: int | None = None, channel: str | None = None,
        between: tuple[Instant, Instant] | None = None,
    ) -> tuple[DeviceSamples, ...]:  # fmt: skip
        """The device samples of an episode, one block per channel, with later blocks, masks and shifts applied.

        With `between` all samples from the first to the second moment; others may be among them.
        """
        top = _ALL if head is None else head
        with self._opened.database.read() as connection:
            spans = reading.spans_in_force(self._entries(connection, episode, top))
            rows_of = self._rows_of(connection)
            return reading.episode_samples(connection, episode, top, spans, channel, between, rows_of)

    def episode(self, key: str, head: int | None = None) -> Episode:
        """The episode as arrays, as known at a sequence."""
        top = _ALL if head is None else head
        with self._opened.database.read() as connection:
            entries, rows_of = self._entries(connection, key, top), self._rows_of(connection)
            samples = reading.episode_samples(connection, key, top, reading.spans_in_force(entries), rows_of=rows_of)
        return build_episode(key, standing(entries), samples)

    def episode_keys(self, head: int | None = None) -> tuple[str, ...]:
        """Every episode that had been recorded by a sequence, in order of first recording."""
        with self._opened.database.read() as connection:
            if self._held(connection):
                proven.check_episodes(connection)
            return index.episode_keys(connection, _ALL if head is None else head)

    def open_episode_keys(self) -> tuple[str, ...]:
        """The episodes with no end recorded, in order of first recording; quick in a store of any age."""
        with self._opened.database.read() as connection:
            return index.open_episode_keys(connection)

    def standing_keys(self, since: Instant, head: int | None = None) -> tuple[str, ...]:
        """The episodes that may not have ended by `since`, as known at a sequence; quick in a store of any age.

        None that stood is missing; one whose end was changed after `head` may be among them.
        """
        with self._opened.database.read() as connection:
            found = index.standing_keys(connection, since, head)
            if self._held(connection):
                proven.check_standing(connection, since, head, found)
            return found

    def has_episode(self, key: str) -> bool:
        """Whether anything is recorded of an episode."""
        with self._opened.database.read() as connection:
            return index.is_known(connection, key)

    def texts_of(self, channel: str) -> tuple[tuple[str, str], ...]:
        """Every text that stands for a text channel, with its episode: (episode, text)."""
        with self._opened.database.read() as connection:
            return reading.texts_of(connection, channel)

    def sources(self) -> tuple[taken.TakenSource, ...]:
        """Every file or stream that was taken in, with what it brought, in order of taking."""
        with self._opened.database.read() as connection:
            return taken.taken_sources(connection)

    def source_entries(self, source_id: str) -> tuple[Entry, ...]:
        """The entries that a source brought, in order."""
        with self._opened.database.read() as connection:
            return taken.source_entries(connection, source_id)

    def origins(self, episode: str) -> dict[str, str]:
        """The names of the files that an episode's entries came from, by the entry's id; typed ones are left out."""
        with self._opened.database.read() as connection:
            return taken.origins(connection, episode)

    def source_ids(self, episode: str) -> dict[str, str]:
        """The sources that an episode's entries came from, by the entry's id; typed ones are left out."""
        with self._opened.database.read() as connection:
            return taken.source_ids(connection, episode)

    def source_spans(self, source_id: str) -> tuple[taken.SampleSpan, ...]:
        """Where a source's device samples lie, one span per episode and channel."""
        with self._opened.database.read() as connection:
            return taken.source_spans(connection, source_id)

    def known_entry_ids(self, ids: Sequence[str]) -> frozenset[str]:
        """Those of `ids` that are entries of the store."""
        with self._opened.database.read() as connection:
            return frozenset(replaced_entries(connection, ids))

    def replaced(self, entry_id: str) -> Replaced | None:
        """What the rules need to know of an entry that is to be replaced; None where the store has it not."""
        with self._opened.database.read() as connection:
            return replaced_entries(connection, [entry_id]).get(entry_id)


def encoded(block: DeviceSamples) -> tuple[DraftChunk, ...]:
    """Device samples as chunks, of an hour or of up to a day.

    Raises:
        RecordError: `samples.*` when the channel is no device channel or times do not increase.
    """
    if not is_device_channel(block.channel):
        raise refuse("entry.not_a_device_channel", channel=block.channel,
                     accepted="a numeric device or vital channel")  # fmt: skip
    if block.t.shape != block.v.shape or (block.t[1:] <= block.t[:-1]).any():
        raise refuse("samples.not_increasing", channel=block.channel, accepted="strictly increasing times")
    return tuple(
        DraftChunk(block.episode, block.channel, block.source, made)
        for made in blocks_of(block.t, block.v, block.decimals)
    )
