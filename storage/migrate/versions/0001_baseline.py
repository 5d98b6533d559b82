"""The tables of format 1. Frozen: later changes are revisions of their own."""

from __future__ import annotations

import sqlalchemy as sa
from alembic import op

revision = "0001"
down_revision = None
branch_labels = None
depends_on = None

FORMAT = 1


def upgrade() -> None:
    """Make the tables of format 1."""
    for make in _TABLES:
        make()


def downgrade() -> None:
    """A ledger is never taken back."""
    raise NotImplementedError("a store is never migrated downwards")


def _store_facts() -> None:
    op.create_table(
        "store_facts",
        sa.Column("key", sa.String(40), primary_key=True),
        sa.Column("value", sa.Text(), nullable=False),
    )


def _batch() -> None:
    op.create_table(
        "batch",
        sa.Column("seq", sa.Integer(), primary_key=True, autoincrement=False),
        sa.Column("id", sa.String(36), nullable=False, unique=True),
        sa.Column("first_seq", sa.Integer(), nullable=False, unique=True),
        sa.Column("last_seq", sa.Integer(), nullable=False, unique=True),
        sa.Column("prev_hash", sa.String(64), nullable=False, unique=True),
        sa.Column("digest", sa.String(64), nullable=False),
        sa.Column("hash", sa.String(64), nullable=False, unique=True),
        sa.Column("recorded_at", sa.BigInteger(), nullable=False),
        sa.Column("skew", sa.BigInteger(), nullable=False),
        sa.Column("by", sa.Text(), nullable=False),
        sa.Column("operation", sa.Text(), nullable=False),
        sa.Column("source_id", sa.Text(), nullable=False),
        sa.Column("engine", sa.Text(), nullable=False),
    )
    op.create_index("ix_batch_recorded_at", "batch", ["recorded_at"])


def _source() -> None:
    op.create_table(
        "source",
        sa.Column("seq", sa.Integer(), primary_key=True, autoincrement=False),
        sa.Column("batch_seq", sa.Integer(), sa.ForeignKey("batch.seq"), nullable=False),
        sa.Column("salt", sa.LargeBinary(), nullable=False),
        sa.Column("id", sa.String(36), nullable=False, unique=True),
        sa.Column("kind", sa.String(40), nullable=False),
        sa.Column("name", sa.Text(), nullable=False),
        sa.Column("sha", sa.String(64), nullable=False),
        sa.Column("size", sa.BigInteger(), nullable=False),
        sa.Column("facts", sa.Text(), nullable=False),
    )


def _entry() -> None:
    op.create_table(
        "entry",
        sa.Column("seq", sa.Integer(), primary_key=True, autoincrement=False),
        sa.Column("batch_seq", sa.Integer(), sa.ForeignKey("batch.seq"), nullable=False),
        sa.Column("salt", sa.LargeBinary(), nullable=False),
        sa.Column("id", sa.String(36), nullable=False, unique=True),
        sa.Column("episode_id", sa.Text(), nullable=False),
        sa.Column("channel", sa.String(60), nullable=False),
        sa.Column("at", sa.BigInteger(), nullable=False),
        sa.Column("number", sa.Float()),
        sa.Column("words", sa.Text()),
        sa.Column("raw", sa.Text(), nullable=False),
        sa.Column("raw_unit", sa.Text(), nullable=False),
        sa.Column("decimals", sa.Integer()),
        sa.Column("zone", sa.Text(), nullable=False),
        sa.Column("by", sa.Text(), nullable=False),
        sa.Column("note", sa.Text(), nullable=False),
        sa.Column("doubt", sa.Text(), nullable=False),
        sa.Column("action", sa.String(10), nullable=False),
        sa.Column("replaces", sa.String(36)),
        sa.Column("reason", sa.Text(), nullable=False),
        sa.Column("source", sa.Text(), nullable=False),
        sa.Column("moved_from", sa.Text()),
        sa.Column("source_recorded_at", sa.BigInteger()),
    )
    op.create_index("ix_entry_batch", "entry", ["batch_seq"])
    op.create_index("ix_entry_episode_channel_at", "entry", ["episode_id", "channel", "at"])
    op.create_index("ix_entry_episode_seq", "entry", ["episode_id", "seq"])
    op.create_index("ix_entry_moved_from", "entry", ["moved_from"])
    op.create_index("ix_entry_replaces", "entry", ["replaces"])


def _chunk() -> None:
    op.create_table(
        "chunk",
        sa.Column("seq", sa.Integer(), primary_key=True, autoincrement=False),
        sa.Column("batch_seq", sa.Integer(), sa.ForeignKey("batch.seq"), nullable=False),
        sa.Column("salt", sa.LargeBinary(), nullable=False),
        sa.Column("episode_id", sa.Text(), nullable=False),
        sa.Column("source_seq", sa.Integer(), sa.ForeignKey("source.seq"), nullable=False),
        sa.Column("channel", sa.String(60), nullable=False),
        sa.Column("t0", sa.BigInteger(), nullable=False),
        sa.Column("t1", sa.BigInteger(), nullable=False),
        sa.Column("n", sa.Integer(), nullable=False),
        sa.Column("codec", sa.String(8), nullable=False),
        sa.Column("blob", sa.LargeBinary(), nullable=False),
        sa.Column("sha", sa.LargeBinary(), nullable=False),
    )
    op.create_index("ix_chunk_episode_channel_t0", "chunk", ["episode_id", "channel", "t0"])


def _policy() -> None:
    op.create_table(
        "policy",
        sa.Column("seq", sa.Integer(), primary_key=True, autoincrement=False),
        sa.Column("batch_seq", sa.Integer(), sa.ForeignKey("batch.seq"), nullable=False),
        sa.Column("salt", sa.LargeBinary(), nullable=False),
        sa.Column("hash", sa.String(64), nullable=False),
        sa.Column("text", sa.Text(), nullable=False),
    )
    op.create_index("ix_policy_hash", "policy", ["hash"])


def _document() -> None:
    op.create_table(
        "document",
        sa.Column("seq", sa.Integer(), primary_key=True, autoincrement=False),
        sa.Column("batch_seq", sa.Integer(), sa.ForeignKey("batch.seq"), nullable=False),
        sa.Column("salt", sa.LargeBinary(), nullable=False),
        sa.Column("id", sa.String(36), nullable=False, unique=True),
        sa.Column("kind", sa.String(40), nullable=False),
        sa.Column("name", sa.Text(), nullable=False),
        sa.Column("data", sa.LargeBinary(), nullable=False),
        sa.Column("sha", sa.LargeBinary(), nullable=False),
    )


def _person_event() -> None:
    op.create_table(
        "person_event",
        sa.Column("seq", sa.Integer(), primary_key=True, autoincrement=False),
        sa.Column("batch_seq", sa.Integer(), sa.ForeignKey("batch.seq"), nullable=False),
        sa.Column("salt", sa.LargeBinary(), nullable=False),
        sa.Column("person", sa.Text(), nullable=False),
        sa.Column("event", sa.String(60), nullable=False),
        sa.Column("detail", sa.Text(), nullable=False),
    )


def _erasure() -> None:
    op.create_table(
        "erasure",
        sa.Column("seq", sa.Integer(), primary_key=True, autoincrement=False),
        sa.Column("batch_seq", sa.Integer(), sa.ForeignKey("batch.seq"), nullable=False),
        sa.Column("salt", sa.LargeBinary(), nullable=False),
        sa.Column("removed_table", sa.String(20), nullable=False),
        sa.Column("removed_seq", sa.Integer(), nullable=False, unique=True),
        sa.Column("removed_batch", sa.Integer(), nullable=False),
        sa.Column("removed_digest", sa.String(64), nullable=False),
        sa.Column("reason", sa.Text(), nullable=False),
    )


def _episode_now() -> None:
    op.create_table(
        "episode_now",
        sa.Column("episode_id", sa.Text(), primary_key=True),
        sa.Column("first_seq", sa.Integer(), nullable=False),
        sa.Column("last_seq", sa.Integer(), nullable=False),
        sa.Column("last_at", sa.BigInteger(), nullable=False),
        sa.Column("ended_at", sa.BigInteger()),
    )
    op.create_index("ix_episode_now_ended_at", "episode_now", ["ended_at"])


def _cache() -> None:
    op.create_table(
        "cache",
        sa.Column("key", sa.Text(), primary_key=True),
        sa.Column("valid_until", sa.BigInteger()),
        sa.Column("data", sa.LargeBinary(), nullable=False),
    )


def _layout() -> None:
    op.create_table(
        "layout",
        sa.Column("name", sa.Text(), primary_key=True),
        sa.Column("text", sa.Text(), nullable=False),
        sa.Column("revision", sa.Integer(), nullable=False),
        sa.Column("sha", sa.String(64), nullable=False),
    )


def _draft() -> None:
    op.create_table(
        "draft",
        sa.Column("name", sa.Text(), primary_key=True),
        sa.Column("text", sa.Text(), nullable=False),
        sa.Column("saved_at", sa.BigInteger(), nullable=False),
        sa.Column("sha", sa.String(64), nullable=False),
    )


_TABLES = (
    _store_facts,
    _batch,
    _source,
    _entry,
    _chunk,
    _policy,
    _document,
    _person_event,
    _erasure,
    _episode_now,
    _cache,
    _layout,
    _draft,
)
