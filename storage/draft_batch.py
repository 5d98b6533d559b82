"""A batch before the ledger takes it: rows of several tables, in the order in which they take their numbers."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from types import MappingProxyType
from uuid import uuid4

from core.record.entries import NewEntry
from core.record.instant import Instant
from storage.chunks import Block


@dataclass(frozen=True, slots=True)
class SourceFacts:
    """What was read, and how: a file, a device's stream. `facts` are named values worth keeping."""

    kind: str
    name: str
    sha: str = ""
    size: int = 0
    facts: Mapping[str, str | int | float | bool | None] = field(default_factory=lambda: MappingProxyType({}))
    id: str = field(default_factory=lambda: str(uuid4()))


@dataclass(frozen=True, slots=True)
class DraftEntry:
    """An entry on its way in. `id` where the source named it; `source_recorded_at` as the source claims it."""

    entry: NewEntry
    id: str = ""
    source_recorded_at: Instant | None = None


@dataclass(frozen=True, slots=True)
class DraftChunk:
    """A block of device samples on its way in."""

    episode: str
    channel: str
    source: str
    block: Block


@dataclass(frozen=True, slots=True)
class DraftDocument:
    """A document to be kept as it is, e.g. a closed handover as it was printed."""

    kind: str
    name: str
    data: bytes
    id: str = field(default_factory=lambda: str(uuid4()))


@dataclass(frozen=True, slots=True)
class DraftEvent:
    """Something a person did that is no entry: a sign-in, a print, an export."""

    person: str
    event: str
    detail: str = ""


@dataclass(frozen=True, slots=True)
class DraftPolicy:
    """A policy put in force."""

    hash: str
    text: str


@dataclass(frozen=True, slots=True)
class DraftErasure:
    """What the chain keeps of a row that is removed: where it stood and its digest."""

    table: str
    seq: int
    batch: int
    digest: str
    reason: str


@dataclass(frozen=True, slots=True)
class DraftBatch:
    """Everything one operation adds to the ledger: it is taken whole or not at all."""

    by: str
    operation: str
    entries: tuple[DraftEntry, ...] = ()
    chunks: tuple[DraftChunk, ...] = ()
    source: SourceFacts | None = None
    documents: tuple[DraftDocument, ...] = ()
    policies: tuple[DraftPolicy, ...] = ()
    events: tuple[DraftEvent, ...] = ()
    erasures: tuple[DraftErasure, ...] = ()


@dataclass(frozen=True, slots=True)
class Receipt:
    """What the ledger says of a batch it took. `ids` are those of its entries, in order.

    `skew` is how far, in microseconds, the clock stood behind the last recording (0 when it did not).
    """

    batch_seq: int
    first_seq: int
    last_seq: int
    ids: tuple[str, ...]
    recorded_at: Instant
    head_hash: str
    skew: int = 0
