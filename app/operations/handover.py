"""Operations on handovers: gathering a shift, and keeping a closed one as it was printed."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import TYPE_CHECKING

from app.operations.as_known import CameLater, LaterRequest, came_later
from app.operations.episode import load
from app.operations.last_handover import KIND, ClosingFacts, Comparer, Handed, handed_before
from app.operations.last_handover import facts_of as facts_closed
from app.operations.outcome import Outcome, report
from app.operations.policy import in_force
from core.figures.shift import ShiftFigures, WardShift, episode_shift, stands_in_shift
from core.figures.since_handover import SinceHandover
from core.judgement.policy import Policy
from core.record.episode import Episode
from core.record.instant import Instant
from core.record.message import refuse

if TYPE_CHECKING:
    from storage.documents import DocumentFacts
    from storage.store import Store

MOST_LENGTH = 7 * 24 * 3_600_000_000
"""Longer than a week is no shift: a typing error in a date."""


@dataclass(frozen=True, slots=True)
class HandoverRequest:
    """A shift, as known at a moment (None: all that is recorded).

    Its figures are as of its end, or as of now where it still runs (nobody is late for what has not come), or as of
    `as_of` where that is earlier.
    """

    start: Instant
    end: Instant
    as_known_at: Instant | None = None
    as_of: Instant | None = None

    def stands_at(self, now: Instant) -> Instant:
        """The moment its figures are of."""
        return min(at for at in (self.end, now, self.as_known_at, self.as_of) if at is not None)


@dataclass(frozen=True, slots=True)
class Handover:
    """A shift gathered for handing over. `records` hold each episode's record as known, by key.

    `shift` ends where its figures stand; `end` is where the shift does.

    `printed_head` is the ledger's sequence and 16 hex digits of its newest hash. `imported`: recording times
    are those of a file taken in, so that they say nothing of who was late.
    """

    shift: WardShift
    records: Mapping[str, Episode]
    policy: Policy
    printed_head: str
    prepared_at: Instant
    end: Instant
    head: int
    handed: Handed
    """What it is compared with."""
    since: Mapping[str, SinceHandover]
    """What is otherwise than was handed over, by episode."""
    as_known_at: Instant | None = None
    imported: bool = False
    later: CameLater = field(default_factory=dict)
    """What came later than `as_known_at`, by episode; empty for what is known now."""


@dataclass(frozen=True, slots=True)
class ClosedHandover:
    """A handover as it was printed, and of what."""

    name: str
    pdf: bytes
    facts: ClosingFacts | None = None


def facts_of(handover: Handover) -> ClosingFacts:
    """What is kept beside the print of a handover, so that the next one can be compared with it."""
    return ClosingFacts(handover.shift.start, handover.end, handover.shift.end, handover.head)


def prepare(store: Store, who: str, now: Instant, request: HandoverRequest) -> Outcome[Handover]:
    """Gather a shift, its episodes in order of concern. Reports progress by episode.

    Raises:
        RecordError: `handover.backwards`, `handover.too_long`, `handover.not_begun`.
    """
    check_shift(request.start, request.end)
    as_of = request.stands_at(now)
    if as_of <= request.start:
        raise refuse("handover.not_begun", start=request.start, now=as_of)
    known_head = None if request.as_known_at is None else store.head_known_at(request.as_known_at)
    policy = in_force(store, known_head)
    head = store.head() if known_head is None else known_head
    handed = handed_before(store, request.start, request.end, as_of, known_head)
    comparer, since = Comparer(store, handed, policy), dict[str, SinceHandover]()
    records: dict[str, Episode] = {}
    shifts: list[ShiftFigures] = []
    keys = store.standing_keys(request.start, known_head)
    for number, key in enumerate(keys):
        report(number, len(keys))
        record = load(store, key, request.as_known_at)
        if stands_in_shift(record, request.start, as_of):
            records[key] = record
            shifts.append(episode_shift(record, request.start, as_of, policy))
            since[key] = comparer.since(record, shifts[-1].now)
    shifts.sort(key=lambda s: (s.now.concern.rank, s.now.concern.order, s.now.label))
    ward = WardShift(request.start, as_of, tuple(shifts))
    later: CameLater = {}
    if request.as_known_at is not None:
        later = came_later(store, who, now, LaterRequest(request.as_known_at)).value
    made = Handover(ward, records, policy, store.printed_head(), now, request.end, head, handed, since,
                    request.as_known_at, store.imported, later)  # fmt: skip
    return Outcome(made, store.head())


def close(store: Store, who: str, now: Instant, request: ClosedHandover) -> Outcome[str]:
    """Keep a handover in the ledger as it was printed; its document's id. It is never altered after."""
    facts = "" if request.facts is None else request.facts.text()
    document = store.put_document(KIND, request.name, request.pdf, who, now, facts)
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


def closed_of_shift(
    store: Store, who: str, now: Instant, request: tuple[Instant, Instant]
) -> Outcome[tuple[DocumentFacts, ...]]:
    """Every closed handover of the shift from start to end, the newest first."""
    found = closed_list(store, who, now, None).value
    own = tuple(d for d in found if (f := facts_closed(d)).start == request[0] and f.end == request[1])
    return Outcome(own, store.head())


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
