"""Taking a backup: one step of the driver's own copying, never a copy of the live file."""

from __future__ import annotations

import os
from contextlib import closing
from pathlib import Path

from storage import keys
from storage.engine import driver_errors, raw_connection
from storage.errors import os_failure, store_error, translated
from storage.store_file import remove_store


def backup(store: Path, key: bytes | None, target: Path) -> None:
    """Write a consistent copy of an open store to `target`, with its envelope; whole or not at all.

    Raises:
        StoreError: `store.exists`, `store.no_folder`, `store.disk_full`, `store.damaged`.
    """
    check_free(target)
    unfinished = target.with_name(target.name + ".unfinished")
    unfinished.unlink(missing_ok=True)
    try:
        copy_in_one_step(store, key, unfinished)
        check_opens(unfinished, key)
        sync_file(unfinished)
        if key is not None:
            keys.write_envelope(keys.envelope_path(target), keys.read_envelope(keys.envelope_path(store)))
        os.replace(unfinished, target)
        keys.sync_folder(target.parent)
    except driver_errors() as error:
        raise translated(error, target) from error
    except OSError as error:
        raise os_failure(error, "store.backup_failed", target) from error
    finally:
        remove_store(unfinished)
        if not target.exists():
            keys.envelope_path(target).unlink(missing_ok=True)


def check_free(target: Path) -> None:
    """Refuse a place that is taken, or that has no folder.

    Raises:
        StoreError: `store.exists`, `store.no_folder`.
    """
    if target.exists() or keys.envelope_path(target).exists():
        raise store_error("store.exists", path=target.name)
    if not target.parent.is_dir():
        raise store_error("store.no_folder", path=str(target.parent))


def copy_in_one_step(store: Path, key: bytes | None, target: Path, mode: str = "rw") -> None:
    """Copy a store as it stands at one moment, whatever is being written, into one file with nothing beside it."""
    target.touch(mode=0o600)  # for its owner's eyes alone
    with (
        closing(raw_connection(store, key, mode=mode)) as live,
        closing(raw_connection(target, key, mode="rwc")) as copy,
    ):
        live.backup(copy, pages=-1)
        copy.execute("PRAGMA journal_mode = DELETE")


def check_opens(path: Path, key: bytes | None) -> None:
    """Refuse a copy that cannot be read: it is no backup.

    Raises:
        StoreError: `store.damaged`; or the driver's own error.
    """
    with closing(raw_connection(path, key, mode="ro")) as copy:
        if copy.execute("PRAGMA quick_check(1)").fetchone()[0] != "ok":
            raise store_error("store.damaged", path=path.name, detail="backup")


def sync_file(path: Path) -> None:
    """Ask the disk to keep a file that was written."""
    descriptor = os.open(path, os.O_RDWR)
    try:
        os.fsync(descriptor)
    finally:
        os.close(descriptor)
