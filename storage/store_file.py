"""A store's file as it lies there: encrypted or plain, what its key is, whether its format is ours, removing it."""

from __future__ import annotations

from collections.abc import Mapping
from pathlib import Path

from core.record.message import Message
from storage import facts_kept, keys, schema
from storage.engine import APPLICATION_ID, Database, application_id
from storage.errors import StoreError, store_error

_PLAIN_HEADER = b"SQLite format 3\x00"


def is_encrypted(path: Path) -> bool:
    """Whether a store's file is encrypted: a plain one begins with the open format's mark."""
    with path.open("rb") as file:
        return file.read(len(_PLAIN_HEADER)) != _PLAIN_HEADER


def data_key(path: Path, passphrase: str | None) -> bytes | None:
    """The key of a store's file, or None for a plain one.

    Raises:
        StoreError: `store.not_a_store`, `store.needs_passphrase`, `key.*`.
    """
    envelope = keys.envelope_path(path)
    if not is_encrypted(path):
        return None
    if not envelope.exists():
        with path.open("rb") as file:
            looks_random = len(set(file.read(4096))) > 200
        if looks_random:
            raise store_error("key.envelope_missing", path=envelope.name)
        raise store_error("store.not_a_store", path=path.name)
    text = keys.read_envelope(envelope)
    keys.check_envelope(text)  # nobody is asked for a passphrase that could open nothing
    if passphrase is None:
        raise store_error("store.needs_passphrase", path=path.name)
    return keys.open_envelope(text, passphrase)


def check_facts(database: Database) -> dict[str, str]:
    """The store's own facts, once its format is known to be ours.

    Raises:
        StoreError: `store.not_a_store`, `store.newer`, `store.older`.
    """
    try:
        with database.read() as connection:
            if application_id(connection) != APPLICATION_ID:
                raise store_error("store.not_a_store", path=database.path.name)
            facts = facts_kept.read(connection)
    except StoreError as error:
        if "no such table" in str(error):
            raise store_error("store.not_a_store", path=database.path.name) from error
        if error.message.key == "store.damaged" and database.is_keyed:
            raise store_error("store.damaged", **{**error.message.values, "first": "page"}) from error
        raise
    _check_format(facts, database.path)
    return facts


def newer_notice(facts: Mapping[str, str], path: Path) -> Message | None:
    """What to say of a store of a newer format that this program may still read; None for one of its own."""
    if int(facts["format"]) <= schema.FORMAT:
        return None
    return Message("store.newer_read_only", {"path": path.name, "format": int(facts["format"])})


def _check_format(facts: Mapping[str, str], path: Path) -> None:
    """A newer format is refused unless the store itself says from which format on it can be read: a program
    must not guess what it does not know."""
    text, least = facts.get("format", ""), facts.get("readable_from", "")
    if not text.isdigit():
        raise store_error("store.not_a_store", path=path.name)
    found = int(text)
    readable = least.isdigit() and int(least) <= schema.FORMAT
    if found > schema.FORMAT and not readable:
        raise store_error("store.newer", path=path.name, format=found, accepted=schema.FORMAT)
    if found < schema.FORMAT:
        raise store_error("store.older", path=path.name, format=found, accepted=schema.FORMAT)


def remove_store(path: Path) -> None:
    """Remove a store that could not be finished, with all that lies beside it."""
    for made in (
        path,
        keys.envelope_path(path),
        *(path.with_name(path.name + end) for end in ("-wal", "-shm", "-journal")),
    ):
        made.unlink(missing_ok=True)
