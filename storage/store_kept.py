"""What a store keeps beside its entries: layouts, drafts, policies, documents."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import sqlalchemy as sa

from core.record.instant import Instant
from storage import documents, facts_kept, proven_reading, restore_report, schema, settings_kept
from storage.draft_batch import DraftBatch, DraftDocument, DraftEvent, DraftPolicy, Receipt
from storage.store_proven import StoreProven

_ALL = 2**62


@dataclass(frozen=True)
class StoreKept(StoreProven):
    """The part of an open store that keeps texts and documents. `storage.store.Store` is the whole."""

    def append_drafts(self, drafts: Sequence[DraftBatch], times: Sequence[Instant]) -> list[Receipt]:
        """Add batches to the ledger."""
        raise NotImplementedError

    def fact(self, key: str) -> str | None:
        """One of the store's own facts as it stands now, or None."""
        facts = schema.store_facts.c
        with self._opened.database.read() as connection:
            found = connection.execute(sa.select(facts.value).where(facts.key == key)).scalar()
        return None if found is None else str(found)

    def put_fact(self, key: str, value: str) -> None:
        """Keep one of the store's own facts, outside the ledger. What a person decides is an event instead."""
        with self._opened.database.write() as connection:
            facts_kept.put(connection, {key: value})

    def newer_than(self, head: int) -> restore_report.Newer:
        """What was recorded after a sequence, by episode: what a backup of that sequence lacks."""
        with self._opened.database.read() as connection:
            return restore_report.newer(connection, head)

    def layout(self, name: str) -> str | None:
        """A layout's text, or None."""
        return self.layouts().get(name)

    def layouts(self) -> Mapping[str, str]:
        """Every layout's text by name."""
        with self._opened.database.read() as connection:
            return settings_kept.layouts(connection)

    def put_layout(self, name: str, text: str | None) -> None:
        """Keep a layout, or forget it (None). Layouts are outside the ledger."""
        with self._opened.database.write() as connection:
            settings_kept.put_layout(connection, name, text)

    def draft(self, name: str) -> str | None:
        """What was being typed under a name, or None."""
        return self.drafts().get(name)

    def drafts(self) -> Mapping[str, str]:
        """Every draft's text by name."""
        with self._opened.database.read() as connection:
            return settings_kept.drafts(connection)

    def put_draft(self, name: str, text: str | None, now: Instant = 0) -> None:
        """Keep what is being typed, or forget it (None). Drafts are outside the ledger, encrypted with it."""
        with self._opened.database.write() as connection:
            settings_kept.put_draft(connection, name, text, now)

    def policy(self, head: int | None = None) -> tuple[str, str] | None:
        """The (hash, text) of the policy in force at a sequence, or None while the store has none."""
        with self._opened.database.read() as connection:
            if self._held(connection):
                proven_reading.check_policy(connection, _ALL if head is None else head)
            return documents.policy(connection, _ALL if head is None else head)

    def policies(self, head: int | None = None) -> tuple[documents.KeptPolicy, ...]:
        """Every policy that was put in force up to a sequence, the newest first."""
        with self._opened.database.read() as connection:
            if self._held(connection):
                proven_reading.check_policy(connection, _ALL if head is None else head)
            return documents.policies(connection, _ALL if head is None else head)

    def put_policy(self, text: str, hash: str, by: str, now: Instant) -> Receipt:
        """Put a policy in force."""
        draft = DraftBatch(by, "policy", policies=(DraftPolicy(hash, text),))
        return self.append_drafts((draft,), (now,))[0]

    def put_document(self, kind: str, name: str, data: bytes, by: str, now: Instant, facts: str = "") -> str:
        """Keep a document as it is, in the chain; its id. `facts` tell in one text what it is of, for reading again
        what a name written for people does not say; they are an event of the same batch."""
        doc = DraftDocument(kind, name, data)
        events = (DraftEvent(by, kind, facts),) if facts else ()
        self.append_drafts((DraftBatch(by, "document", documents=(doc,), events=events),), (now,))
        return doc.id

    def documents(self) -> tuple[documents.DocumentFacts, ...]:
        """What documents are kept, in order."""
        with self._opened.database.read() as connection:
            if self._held(connection):
                proven_reading.check_documents(connection)
            return documents.listed(connection)

    def document(self, document_id: str) -> bytes:
        """A document's bytes.

        Raises:
            StoreError: `document.unknown`, or `document.damaged` when they are not those that were kept.
        """
        with self._opened.database.read() as connection:
            return documents.data(connection, document_id)
