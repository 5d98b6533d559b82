"""Operations on handovers: gathering a shift, and keeping a closed one as it was printed."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import TYPE_CHECKING

from app.operations.as_known import CameLater, LaterRequest, came_later
from app.operations.episode import load
from app.operations.outcome import Outcome, report
from app.operations.policy import in_force
from core.figures.shift import ShiftFigures, WardShift, episode_shift, stands_in_shift
from core.judgement.policy import Policy
from core.record.episode import Episode
from core.record.instant import Instant
from core.record.message import refuse

if TYPE_CHECKING:
    from storage.documents import DocumentFacts
    from storage.store import Store

KIND = "handover"
MOST_LENGTH = 7 * 24 * 3_600_000_000
"""Longer than a week is no shift: a typing error in a date."""


@dataclass(frozen=True, slots=True)
class HandoverRequest:
    """A shift, as known at a moment (None: all that is recorded)."""

    start: Instant
    end: Instant
    as_known_at: Instant | None = None


@dataclass(frozen=True, slots=True)
class Handover:
    """A shift gathered for handing over. `records` hold each episode's record as known, by key.

    `printed_head` is the ledger's sequence and 16 hex digits of its newest hash. `imported`: recording times
    are those of a file taken in, so that they say nothing of who was late.
    """

    shift: WardShift
    records: Mapping[str, Episode]
    policy: Policy
    printed_head: str
    prepared_at: Instant
    as_known_at: Instant | None = None
    imported: bool = False
    later: CameLater = field(default_factory=dict)
    """What came later than `as_known_at`, by episode; empty for what is known now."""


@dataclass(frozen=True, slots=True)
class ClosedHandover:
    """A handover as it was printed."""

    name: str
    pdf: bytes


def prepare(store: Store, who: str, now: Instant, request: HandoverRequest) -> Outcome[Handover]:
    """Gather a shift, its episodes in order of concern. Reports progress by episode.

    Raises:
        RecordError: `handover.backwards`, `handover.too_long`.
    """
    check_shift(request.start, request.end)
    known_head = None if request.as_known_at is None else store.head_known_at(request.as_known_at)
    policy = in_force(store, known_head)
    records: dict[str, Episode] = {}
    shifts: list[ShiftFigures] = []
    keys = store.episode_keys(known_head)
    for number, key in enumerate(keys):
        report(number, len(keys))
        record = load(store, key, request.as_known_at)
        if stands_in_shift(record, request.start, request.end):
            records[key] = record
            shifts.append(episode_shift(record, request.start, request.end, policy))
    shifts.sort(key=lambda s: (s.now.concern.rank, s.now.concern.order, s.now.label))
    ward = WardShift(request.start, request.end, tuple(shifts))
    later: CameLater = {}
    if request.as_known_at is not None:
        later = came_later(store, who, now, LaterRequest(request.as_known_at)).value
    made = Handover(ward, records, policy, store.printed_head(), now, request.as_known_at, store.imported, later)
    return Outcome(made, store.head())


def close(store: Store, who: str, now: Instant, request: ClosedHandover) -> Outcome[str]:
    """Keep a handover in the ledger as it was printed; its document's id. It is never altered after."""
    document = store.put_document(KIND, request.name, request.pdf, who, now)
    return Outcome(document, store.head())


def note_print(store: Store, who: str, now: Instant, request: str) -> Outcome[bool]:
    """Keep in the chain that a handover was printed or written to a file, which one and with which head.

    Whether it could be kept: a store that takes no writing keeps nothing.
    """
    if not store.takes_writing():
        return Outcome(False, store.head())
    return Outcome(True, store.record_event("print", person=who, now=now, detail=request).last_seq)


def closed_name(shift: str, given_by: str, taken_by: str) -> str:
    """What a closed handover is called in the list.

    >>> closed_name("Shift 27-Mar-2026 19:30 to 07:30", "AB", "CD")
    'Shift 27-Mar-2026 19:30 to 07:30, AB to CD'
    """
    return f"{shift}, {given_by} to {taken_by}"


def closed_list(store: Store, who: str, now: Instant, request: None) -> Outcome[tuple[DocumentFacts, ...]]:
    """Every closed handover, the newest first."""
    found = tuple(d for d in reversed(store.documents()) if d.kind == KIND)
    return Outcome(found, store.head())


def closed(store: Store, who: str, now: Instant, request: str) -> Outcome[bytes]:
    """The bytes of a closed handover by its document's id.

    Raises:
        StoreError: `document.unknown`, `document.damaged`.
    """
    return Outcome(store.document(request), store.head())


def check_shift(start: Instant, end: Instant) -> None:
    """Refuse what is no shift.

    Raises:
        RecordError: `handover.backwards`, `handover.too_long`.
    """
    if end <= start:
        raise refuse("handover.backwards", start=start, end=end)
    if end - start > MOST_LENGTH:
        raise refuse("handover.too_long", hours=(end - start) / 3_600_000_000, accepted=168)
