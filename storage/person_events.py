"""Reading the events of the chain that are no entries: people, sign-ins, prints, exports, policies put in force."""

from __future__ import annotations

from collections.abc import Sequence

import sqlalchemy as sa

from storage import schema as s
from storage.people import PersonEvent


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
