"""Restoring a backup into a new store. The backup itself stays as it was, whatever comes of it."""

from __future__ import annotations

import os
import shutil
from pathlib import Path

from core.record.message import Message
from storage import keys
from storage.backup import check_free, check_opens, copy_in_one_step, sync_file
from storage.engine import PAGE_BYTES, Database, driver_errors
from storage.errors import StoreError, os_failure, store_error, translated
from storage.migrate.upgrade import migrate
from storage.store_file import check_facts, data_key, is_encrypted, remove_store
from storage.verify import findings


def restore(source: Path, new: Path, passphrase: str | None = None) -> Message | None:
    """Make a new store of a backup, with its envelope; whole or not at all, and nothing is overwritten.

    A plain backup is verified before it is taken, an encrypted one when its passphrase is given. Without it only
    what needs no key is looked at, and what was not is told: the answer is None where all was.

    Raises:
        StoreError: `store.missing`, `store.exists`, `store.not_a_store`, `store.damaged`, `key.*`.
    """
    if not source.is_file():
        raise store_error("store.missing", path=source.name)
    check_free(new)
    encrypted = is_encrypted(source)
    if encrypted:
        keys.check_envelope(keys.read_envelope(keys.envelope_path(source)))
        if not _journal_of(source):
            _check_whole_pages(source)
    unfinished = new.with_name(new.name + ".unfinished")
    try:
        key = data_key(source, passphrase) if encrypted and passphrase is not None else None
        copy_of_backup(source, unfinished, key, closed=encrypted and key is None)
        if key is not None or not encrypted:
            _check_sound(unfinished, key)
        sync_file(unfinished)
        if encrypted:
            keys.write_envelope(keys.envelope_path(new), keys.read_envelope(keys.envelope_path(source)))
        os.replace(unfinished, new)
        keys.sync_folder(new.parent)
        return Message("restore.not_checked", {"path": source.name}) if encrypted and passphrase is None else None
    except StoreError as error:
        raise _of_the_backup(error, source, unfinished) from error
    except driver_errors() as error:
        told = translated(error, source)
        raise translated(error, new) if told.message.key == "store.disk_full" else told from error
    except OSError as error:
        raise os_failure(error, "store.restore_failed", new) from error
    finally:
        remove_store(unfinished)
        if not new.exists():
            keys.envelope_path(new).unlink(missing_ok=True)


def _of_the_backup(error: StoreError, source: Path, unfinished: Path) -> StoreError:
    """What is wrong with the copy is wrong with the file that was given: that one is named."""
    named, values = {unfinished.name, unfinished.name.removesuffix(".unfinished")}, dict(error.message.values)
    if error.message.key != "store.exists" and values.get("path") in named:
        values["path"] = source.name
    return StoreError(Message(error.message.key, values))


def _journal_of(store: Path) -> int:
    """The bytes of a journal that lies beside a store: a file that was copied with one is not whole without it."""
    journal = store.with_name(store.name + "-wal")
    return journal.stat().st_size if journal.is_file() else 0


def copy_of_backup(source: Path, target: Path, key: bytes | None, *, closed: bool) -> None:
    """A copy of a backup. A store that was copied with its journal holds its newest entries there: they come along.

    Raises:
        StoreError: `store.needs_passphrase` where a journal could only be read with it.
    """
    if not _journal_of(source):
        target.touch(mode=0o600)
        shutil.copyfile(source, target)
    elif closed:
        raise store_error("store.needs_passphrase", path=source.name)
    else:
        copy_in_one_step(source, key, target, mode="ro")


_DAMAGE = (
    "verify.pages",
    "verify.chain",
    "verify.orphan",
    "verify.chunk",
    "verify.document",
    "verify.unreadable",
)
"""Findings that make a backup unfit: what it says is not what was recorded."""


def _check_whole_pages(path: Path) -> None:
    """What a file without its key can still tell: a copy that was cut off is no whole number of pages."""
    size = path.stat().st_size
    if size < 2 * PAGE_BYTES or size % PAGE_BYTES:
        raise store_error("store.damaged", path=path.name, detail=f"{size} bytes are no whole number of pages")


def _bring_along(path: Path, key: bytes | None) -> None:
    """A copy of a backup of an older format, brought up to date; the backup itself stays as it was."""
    database = Database(path, key, mode="ro")
    try:
        check_facts(database)
    except StoreError as error:
        if error.message.key != "store.older":
            raise
        database.close()
        migrate(path, key, None)
    finally:
        database.close()


def _check_sound(path: Path, key: bytes | None) -> None:
    try:
        check_opens(path, key)
    except driver_errors() as error:
        raise translated(error, path) from error
    _bring_along(path, key)
    database = Database(path, key, mode="ro")
    try:
        check_facts(database)
        wrong = [m for m in findings(database, encrypted=key is not None) if m.key in _DAMAGE]
    finally:
        database.close()
    if wrong:
        raise store_error("store.damaged", path=path.name.removesuffix(".unfinished"), detail=wrong[0].key)
