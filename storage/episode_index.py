"""Which episodes there are, and which are open: a derived table, kept with each batch and rebuildable."""

from __future__ import annotations

import sqlalchemy as sa

from core.record.entries import Action
from core.record.episode import build_episode
from core.record.knowledge import standing
from core.record.settings import SettingsInForce
from core.record.support import BEARS_ON_THE_END, ENDING, support_time
from storage import schema as s
from storage.changes import branches
from storage.draft_batch import DraftBatch, Receipt
from storage.reading_ledger import episode_entries

_now = s.episode_now.c


def note_batch(connection: sa.Connection, draft: DraftBatch, receipt: Receipt) -> set[str]:
    """Bring the table up to date with a batch that was just taken, in the same transaction; the episodes touched."""
    latest: dict[str, int] = {}
    for d in draft.entries:
        latest[d.entry.episode] = max(latest.get(d.entry.episode, d.entry.at), d.entry.at)
    for c in draft.chunks:
        latest[c.episode] = max(latest.get(c.episode, c.block.t1), c.block.t1)
    ends = _touched_ends(connection, draft)
    for episode, last_at in latest.items():
        _note(connection, episode, last_at, receipt)
    for episode in ends:
        ended = ended_at(connection, episode, receipt.last_seq)
        connection.execute(sa.update(s.episode_now).where(_now.episode_id == episode).values(ended_at=ended))
    return latest.keys() | ends


def _touched_ends(connection: sa.Connection, draft: DraftBatch) -> set[str]:
    """Episodes that this batch may have ended or brought back."""
    bearing = [d.entry for d in draft.entries if d.entry.channel in BEARS_ON_THE_END]
    touched = {e.episode for e in bearing if e.channel in ENDING or e.replaces}
    moved = [e.replaces for e in bearing if e.action is Action.MOVE]
    if moved:
        query = sa.select(s.entry.c.moved_from).where(s.entry.c.replaces.in_(moved))
        touched |= {row[0] for row in connection.execute(query) if row[0]}
    touched |= {episode for episode, _ in branches(connection, {e.replaces for e in bearing if e.replaces})}
    gone_on = {e.episode for e in bearing} - touched
    if gone_on:
        query = sa.select(_now.episode_id).where(_now.episode_id.in_(sorted(gone_on)), _now.ended_at.is_not(None))
        touched |= {row[0] for row in connection.execute(query)}
    return touched


def _note(connection: sa.Connection, episode: str, last_at: int, receipt: Receipt) -> None:
    known = connection.execute(sa.select(_now.last_at).where(_now.episode_id == episode)).first()
    if known is None:
        row = {"episode_id": episode, "first_seq": receipt.first_seq, "last_seq": receipt.last_seq,
               "last_at": last_at, "ended_at": None}  # fmt: skip
        connection.execute(sa.insert(s.episode_now), row)
        return
    connection.execute(
        sa.update(s.episode_now)
        .where(_now.episode_id == episode)
        .values(last_seq=receipt.last_seq, last_at=max(last_at, known[0]))
    )


def ended_at(connection: sa.Connection, episode: str, head: int) -> int | None:
    """When support ended by what stands, as the figures read it, or None while it goes on."""
    found = standing(episode_entries(connection, episode, head))
    if not any(x.entry.channel in ENDING and x.entry.episode == episode for x in found):
        return None
    record = build_episode(episode, found)
    return support_time(record, SettingsInForce(record)).end


def episode_keys(connection: sa.Connection, head: int) -> tuple[str, ...]:
    """Every episode first recorded by `head`, in order of first recording."""
    query = sa.select(_now.episode_id).where(_now.first_seq <= head).order_by(_now.first_seq, _now.episode_id)
    return tuple(row[0] for row in connection.execute(query))


def open_episode_keys(connection: sa.Connection) -> tuple[str, ...]:
    """Every episode whose support has not ended, in order of first recording."""
    query = sa.select(_now.episode_id).where(_now.ended_at.is_(None))
    return tuple(row[0] for row in connection.execute(query.order_by(_now.first_seq, _now.episode_id)))


def standing_keys(connection: sa.Connection, since: int, head: int | None) -> tuple[str, ...]:
    """Every episode that may stand at or after `since` as known at a sequence, in order of first recording.

    The table tells the end as known now. Where something was recorded after `head`, the end may have been another
    one then, so such an episode is named too: the caller holds each against its own record.
    """
    stands = _now.ended_at.is_(None) | (_now.ended_at > since)
    query = sa.select(_now.episode_id).order_by(_now.first_seq, _now.episode_id)
    if head is None:
        query = query.where(stands)
    else:
        query = query.where(_now.first_seq <= head, stands | (_now.last_seq > head))
    return tuple(row[0] for row in connection.execute(query))


def is_known(connection: sa.Connection, episode: str) -> bool:
    """Whether anything was ever recorded of an episode that is still there."""
    return connection.execute(sa.select(_now.first_seq).where(_now.episode_id == episode)).first() is not None


def rebuilt(connection: sa.Connection) -> list[dict[str, object]]:
    """The table as the ledger alone makes it, by episode."""
    found: dict[str, dict[str, object]] = {}
    e, c, b = s.entry.c, s.chunk.c, s.batch.c
    for table, at in ((s.entry, e.at), (s.chunk, c.t1)):
        query = (
            sa.select(table.c.episode_id, sa.func.min(b.first_seq), sa.func.max(b.last_seq), sa.func.max(at))
            .join_from(table, s.batch, table.c.batch_seq == b.seq)
            .group_by(table.c.episode_id)
        )
        for episode, first, last, last_at in connection.execute(query):
            row = found.setdefault(episode, {"episode_id": episode, "first_seq": first, "last_seq": last,
                                             "last_at": last_at, "ended_at": None})  # fmt: skip
            row.update(_widest(row, first, last, last_at))
    may_have = sa.select(e.episode_id).distinct().where(e.channel.in_(sorted(ENDING)))
    head = max((int(str(row["last_seq"])) for row in found.values()), default=0)  # an entry may have moved away since
    for (episode,) in connection.execute(may_have).all():
        found[episode]["ended_at"] = ended_at(connection, episode, head)
    return [found[key] for key in sorted(found)]


def _widest(row: dict[str, object], first: int, last: int, last_at: int) -> dict[str, object]:
    return {
        "first_seq": min(int(str(row["first_seq"])), first),
        "last_seq": max(int(str(row["last_seq"])), last),
        "last_at": max(int(str(row["last_at"])), last_at),
    }


def kept(connection: sa.Connection) -> list[dict[str, object]]:
    """The table as it is kept, by episode."""
    query = sa.select(s.episode_now).order_by(_now.episode_id)
    return [dict(row) for row in connection.execute(query).mappings()]


def rebuild(connection: sa.Connection) -> None:
    """Make the table anew from the ledger."""
    rows = rebuilt(connection)
    connection.execute(sa.delete(s.episode_now))
    if rows:
        connection.execute(sa.insert(s.episode_now), rows)
