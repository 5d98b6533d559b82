"""The tables of the store. Portable types, every column typed; instants are int64 microseconds UTC.

Ledger tables are append-only (see `triggers`); every row of them takes one number of one sequence, so that
the largest number names a state of the whole store. Ids are UUIDs and never order.
"""

from __future__ import annotations

from sqlalchemy import (
    BigInteger,
    Column,
    Dialect,
    Float,
    ForeignKey,
    Index,
    Integer,
    LargeBinary,
    MetaData,
    String,
    Table,
    Text,
)

FORMAT = 1
"""The format of the store's file. A store of a higher format is refused."""

metadata = MetaData()


class Blob(LargeBinary):
    """Bytes, given to the driver as they are: wrapping each costs more than writing it."""

    cache_ok = True

    def bind_processor(self, dialect: Dialect) -> None:  # noqa: ARG002 - the library's own signature
        """No wrapping."""
        return


def _sequence() -> tuple[Column[int], Column[int], Column[bytes]]:
    """What every ledger row carries: its number, its batch, and a salt that keeps its digest from being guessed."""
    return (
        Column("seq", Integer, primary_key=True, autoincrement=False),
        Column("batch_seq", Integer, ForeignKey("batch.seq"), nullable=False),
        Column("salt", Blob, nullable=False),
    )


store_facts = Table(
    "store_facts", metadata,
    Column("key", String(40), primary_key=True),
    Column("value", Text, nullable=False),
)  # fmt: skip

batch = Table(
    "batch", metadata,
    Column("seq", Integer, primary_key=True, autoincrement=False),
    Column("id", String(36), nullable=False, unique=True),
    Column("first_seq", Integer, nullable=False, unique=True),
    Column("last_seq", Integer, nullable=False, unique=True),
    Column("prev_hash", String(64), nullable=False, unique=True),
    Column("digest", String(64), nullable=False),
    Column("hash", String(64), nullable=False, unique=True),
    Column("recorded_at", BigInteger, nullable=False),
    Column("skew", BigInteger, nullable=False),
    Column("by", Text, nullable=False),
    Column("operation", Text, nullable=False),
    Column("source_id", Text, nullable=False),
    Column("engine", Text, nullable=False),
    Index("ix_batch_recorded_at", "recorded_at"),
)  # fmt: skip

entry = Table(
    "entry", metadata,
    *_sequence(),
    Column("id", String(36), nullable=False, unique=True),
    Column("episode_id", Text, nullable=False),
    Column("channel", String(60), nullable=False),
    Column("at", BigInteger, nullable=False),
    Column("number", Float),
    Column("words", Text),
    Column("raw", Text, nullable=False),
    Column("raw_unit", Text, nullable=False),
    Column("decimals", Integer),
    Column("zone", Text, nullable=False),
    Column("by", Text, nullable=False),
    Column("note", Text, nullable=False),
    Column("doubt", Text, nullable=False),
    Column("action", String(10), nullable=False),
    Column("replaces", String(36)),
    Column("reason", Text, nullable=False),
    Column("source", Text, nullable=False),
    Column("moved_from", Text),
    Column("source_recorded_at", BigInteger),
    Index("ix_entry_episode_seq", "episode_id", "seq"),
    Index("ix_entry_episode_channel_at", "episode_id", "channel", "at"),
    Index("ix_entry_replaces", "replaces"),
    Index("ix_entry_moved_from", "moved_from"),
    Index("ix_entry_batch", "batch_seq"),
)  # fmt: skip

source = Table(
    "source", metadata,
    *_sequence(),
    Column("id", String(36), nullable=False, unique=True),
    Column("kind", String(40), nullable=False),
    Column("name", Text, nullable=False),
    Column("sha", String(64), nullable=False),
    Column("size", BigInteger, nullable=False),
    Column("facts", Text, nullable=False),
)  # fmt: skip

chunk = Table(
    "chunk", metadata,
    *_sequence(),
    Column("episode_id", Text, nullable=False),
    Column("source_seq", Integer, ForeignKey("source.seq"), nullable=False),
    Column("channel", String(60), nullable=False),
    Column("t0", BigInteger, nullable=False),
    Column("t1", BigInteger, nullable=False),
    Column("n", Integer, nullable=False),
    Column("codec", String(8), nullable=False),
    Column("blob", Blob, nullable=False),
    Column("sha", Blob, nullable=False),
    Index("ix_chunk_episode_channel_t0", "episode_id", "channel", "t0"),
)  # fmt: skip

policy = Table(
    "policy", metadata,
    *_sequence(),
    Column("hash", String(64), nullable=False, index=True),
    Column("text", Text, nullable=False),
)  # fmt: skip

document = Table(
    "document", metadata,
    *_sequence(),
    Column("id", String(36), nullable=False, unique=True),
    Column("kind", String(40), nullable=False),
    Column("name", Text, nullable=False),
    Column("data", Blob, nullable=False),
    Column("sha", Blob, nullable=False),
)  # fmt: skip

person_event = Table(
    "person_event", metadata,
    *_sequence(),
    Column("person", Text, nullable=False),
    Column("event", String(60), nullable=False),
    Column("detail", Text, nullable=False),
)  # fmt: skip

erasure = Table(
    "erasure", metadata,
    *_sequence(),
    Column("removed_table", String(20), nullable=False),
    Column("removed_seq", Integer, nullable=False, unique=True),
    Column("removed_batch", Integer, nullable=False),
    Column("removed_digest", String(64), nullable=False),
    Column("reason", Text, nullable=False),
)  # fmt: skip

LEDGER_ROWS: tuple[Table, ...] = (source, entry, chunk, policy, document, person_event, erasure)
"""Tables whose rows are numbered and chained, in the order in which they may be filled."""
APPEND_ONLY: tuple[Table, ...] = (batch, *LEDGER_ROWS)

episode_now = Table(
    "episode_now", metadata,
    Column("episode_id", Text, primary_key=True),
    Column("first_seq", Integer, nullable=False),
    Column("last_seq", Integer, nullable=False),
    Column("last_at", BigInteger, nullable=False),
    Column("ended_at", BigInteger),
    Index("ix_episode_now_ended_at", "ended_at"),
)  # fmt: skip

cache = Table(
    "cache", metadata,
    Column("key", Text, primary_key=True),
    Column("valid_until", BigInteger),
    Column("data", Blob, nullable=False),
)  # fmt: skip

layout = Table(
    "layout", metadata,
    Column("name", Text, primary_key=True),
    Column("text", Text, nullable=False),
    Column("revision", Integer, nullable=False),
    Column("sha", String(64), nullable=False),
)  # fmt: skip

draft = Table(
    "draft", metadata,
    Column("name", Text, primary_key=True),
    Column("text", Text, nullable=False),
    Column("saved_at", BigInteger, nullable=False),
    Column("sha", String(64), nullable=False),
)  # fmt: skip
