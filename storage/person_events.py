"""The events of the chain that are no entries: people, sign-ins, prints, exports, policies put in force."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import sqlalchemy as sa

from core.record.instant import Instant
from storage import schema as s


@dataclass(frozen=True, slots=True)
class PersonEvent:
    """One event of the chain that concerns a person. `by` is who did it; `skew` as in the batch."""

    seq: int
    person: str
    event: str
    detail: str
    by: str
    recorded_at: Instant
    skew: int = 0


def person_events(
    connection: sa.Connection, events: Sequence[str], person: str | None, newest: int | None
) -> tuple[PersonEvent, ...]:
    """Events of some kinds (all when none is named) in order; of one person, and only the newest where asked."""
    e, b = s.person_event.c, s.batch.c
    query = sa.select(e.seq, e.person, e.event, e.detail, b.by, b.recorded_at, b.skew).join_from(
        s.person_event, s.batch, e.batch_seq == b.seq
    )
    if events:
        query = query.where(e.event.in_(list(events)))
    if person is not None:
        query = query.where(e.person == person)
    rows = connection.execute(query.order_by(e.seq.desc()).limit(newest)).all()
    return tuple(PersonEvent(*row) for row in reversed(rows))
