"""What was recorded after a sequence: which episodes and channels changed, for whoever shows them."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass

import sqlalchemy as sa

from storage import schema as s
from storage.chain import last_batch
from storage.settings_kept import layout_revision

_AT_ONCE = 500
"""Names in one question: databases bound how many they take."""


@dataclass(frozen=True, slots=True)
class Changes:
    """What changed after a sequence. `layout_revision` rises with each layout kept or forgotten.

    `erased` says that an episode was removed; which one is not told, since nothing of it is kept.
    """

    head: int
    episodes: frozenset[str]
    channels: Mapping[str, frozenset[str]]
    policy_changed: bool = False
    documents_changed: bool = False
    erased: bool = False
    layout_revision: int = 0


def changes_between(connection: sa.Connection, seq: int) -> Changes:
    """The changes after `seq`, read by the tables' own keys."""
    last = last_batch(connection)
    head = 0 if last is None else int(last["last_seq"])
    revision = layout_revision(connection)
    if head <= seq:
        return Changes(head, frozenset(), {}, layout_revision=revision)
    e, c = s.entry.c, s.chunk.c
    channels: dict[str, set[str]] = {}
    replaced: set[str] = set()
    for here, away, channel, target in connection.execute(
        sa.select(e.episode_id, e.moved_from, e.channel, e.replaces).where(e.seq > seq)
    ):
        for episode in (here, away) if away else (here,):
            channels.setdefault(episode, set()).add(channel)
        if target:
            replaced.add(target)
    for episode, channel in branches(connection, replaced):
        channels.setdefault(episode, set()).add(channel)
    for episode, channel in connection.execute(sa.select(c.episode_id, c.channel).where(c.seq > seq)):
        channels.setdefault(episode, set()).add(channel)
    return Changes(
        head,
        frozenset(channels),
        {k: frozenset(v) for k, v in channels.items()},
        _any_after(connection, s.policy, seq),
        _any_after(connection, s.document, seq),
        _any_after(connection, s.erasure, seq),
        revision,
    )


def branches(connection: sa.Connection, replaced: set[str]) -> Iterator[tuple[str, str]]:
    """Where else an entry's replacements stand: of two, the later wins, so a new one can void a value elsewhere."""
    e = s.entry.c
    seen: set[str] = set()
    while replaced:
        some = sorted(replaced)[:_AT_ONCE]
        replaced.difference_update(some)
        seen.update(some)
        rows = connection.execute(sa.select(e.id, e.episode_id, e.channel).where(e.replaces.in_(some)))
        for entry_id, episode, channel in rows:
            yield episode, channel
            if entry_id not in seen:
                replaced.add(entry_id)


def _any_after(connection: sa.Connection, table: sa.Table, seq: int) -> bool:
    return connection.execute(sa.select(table.c.seq).where(table.c.seq > seq).limit(1)).first() is not None
