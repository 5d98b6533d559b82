"""Putting a key file back: where the one beside a store was altered or lost, a backup's opens the store as well."""

from __future__ import annotations

from dataclasses import dataclass, field
from pathlib import Path

from app.operations.outcome import Outcome
from core.record.instant import Instant
from storage.errors import StoreError, store_error

SET_ASIDE = ".set-aside"
PUT_BACK = "key file put back"


@dataclass(frozen=True, slots=True)
class PutBack:
    """A backup or its key file, the store that lacks one, and the passphrase of that time or the recovery code."""

    source: Path
    store: Path
    passphrase: str = field(repr=False)


def put_back(store: object, who: str, now: Instant, request: PutBack) -> Outcome[Path]:
    """Put a backup's key file beside a store, once it has opened the store; where the one there was set aside.

    Nothing is written before the key fits. What the altered file held is kept under another name, and the ledger
    keeps that it was done.

    Raises:
        StoreError: `store.missing`, `key.*`, `key.of_another_store`.
    """
    from storage import keys
    from storage.engine import Database
    from storage.store import Store
    from storage.store_file import check_facts

    if not request.store.is_file():
        raise store_error("store.missing", path=request.store.name)
    text = keys.read_envelope(key_file_of(request.source))
    key = keys.open_envelope(text, request.passphrase)
    database = Database(request.store, key, mode="ro")
    try:
        check_facts(database)
    except StoreError as error:
        if error.message.key in ("store.damaged", "store.not_a_store"):
            raise store_error("key.of_another_store", path=request.store.name) from error
        raise
    finally:
        database.close()
    there = keys.envelope_path(request.store)
    aside = there.with_name(there.name + SET_ASIDE)
    if there.exists():
        there.replace(aside)
    keys.write_envelope(there, text)
    with Store.open(request.store, passphrase=request.passphrase) as opened:
        if opened.takes_writing():
            opened.record_event(PUT_BACK, person=who, now=now, detail=request.source.name)
    return Outcome(aside, 0)


def key_file_of(path: Path) -> Path:
    """The key file of a backup; one that is named itself is taken as it is.

    >>> key_file_of(Path("ward.luff")).name, key_file_of(Path("ward.luff.key")).name
    ('ward.luff.key', 'ward.luff.key')
    """
    from storage import keys

    return path if path.suffix == ".key" else keys.envelope_path(path)
