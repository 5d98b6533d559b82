"""What an old store holds that a restored backup does not: the work of the hours since, to be entered again."""

from __future__ import annotations

from dataclasses import dataclass

import sqlalchemy as sa

from core.record.instant import Instant
from storage import schema as s


@dataclass(frozen=True, slots=True)
class NewerEpisode:
    """What came later for one episode: entries, device samples, and when something was last recorded."""

    episode: str
    entries: int
    samples: int
    last_recorded: Instant


@dataclass(frozen=True, slots=True)
class Newer:
    """What a store recorded after a sequence. `others` counts documents, policies and events."""

    head: int
    batches: int
    first_recorded: Instant | None
    episodes: tuple[NewerEpisode, ...]
    others: int


def newer(connection: sa.Connection, head: int) -> Newer:
    """Everything recorded after a sequence, by episode in order of the last recording."""
    b = s.batch.c
    later = b.last_seq > head
    query = sa.select(sa.func.count(), sa.func.min(b.recorded_at), sa.func.max(b.last_seq)).where(later)
    batches, first, newest = connection.execute(query).one()
    found: dict[str, list[int]] = {}
    for table, count in ((s.entry, sa.func.count()), (s.chunk, sa.func.sum(s.chunk.c.n))):
        t = table.c
        by_episode = (
            sa.select(t.episode_id, count, sa.func.max(b.recorded_at))
            .join_from(table, s.batch, t.batch_seq == b.seq)
            .where(t.seq > head)
            .group_by(t.episode_id)
        )
        for episode, number, last in connection.execute(by_episode):
            kept = found.setdefault(episode, [0, 0, 0])
            kept[0 if table is s.entry else 1] = int(number)
            kept[2] = max(kept[2], int(last))
    others = sum(
        connection.execute(sa.select(sa.func.count()).select_from(t).where(t.c.seq > head)).scalar_one()
        for t in (s.document, s.policy, s.person_event)
    )
    episodes = sorted((NewerEpisode(k, *v) for k, v in found.items()), key=lambda e: (-e.last_recorded, e.episode))
    return Newer(int(newest or head), int(batches), first, tuple(episodes), int(others))
