"""What can go wrong with the store's surroundings, as messages and never as a driver's words."""

from __future__ import annotations

import errno
import shutil
import sqlite3
from pathlib import Path

from core.record.message import Message, Value


class StoreError(RuntimeError):
    """The store cannot do it. Carries the message that says what failed and what to do."""

    def __init__(self, message: Message) -> None:
        super().__init__(f"{message.key} {dict(message.values)}")
        self.message = message


def store_error(key: str, **values: Value) -> StoreError:
    """The error to raise for a store that cannot do what was asked.

    >>> store_error("store.busy", seconds=5).message.key
    'store.busy'
    """
    return StoreError(Message(key, values))


_NO_ROOM = 100_000
"""Bytes below which a disk counts as full when it fails."""
_BY_WORDS = (
    ("database is locked", "store.busy"),
    ("database table is locked", "store.busy"),
    ("database or disk is full", "store.disk_full"),
    ("attempt to write a readonly database", "store.read_only"),
    ("unable to open database file", "store.cannot_open"),
    ("disk i/o error", "store.disk_error"),
    ("file is not a database", "store.damaged"),
    ("malformed", "store.damaged"),
    ("can't decode", "store.damaged"),
    ("out of memory", "store.damaged"),
)


def translated(error: BaseException, path: Path) -> StoreError:
    """A driver's error as a message. A page that fails its check is damage, whatever the driver calls it."""
    words = str(error).lower()
    key = next((key for part, key in _BY_WORDS if part in words), "store.failed")
    if key in ("store.disk_error", "store.cannot_open") and not path.exists():
        key = "store.file_gone"
    elif key == "store.disk_error" and _is_full(path.parent):
        key = "store.disk_full"  # the driver tells a full disk so where its shared memory could not grow
    return store_error(key, path=path.name, detail=str(error).splitlines()[0][:200])


def _is_full(folder: Path) -> bool:
    try:
        return shutil.disk_usage(folder).free < _NO_ROOM
    except OSError:
        return False


def os_failure(error: OSError, key: str, path: Path) -> StoreError:
    """A failure of the disk or folder as a message: `store.disk_full` where there is no room, else under `key`."""
    if error.errno in (errno.ENOSPC, errno.EDQUOT, errno.EFBIG):
        return store_error("store.disk_full", path=path.name)
    return store_error(key, path=path.name, detail=error.strerror or "")


DRIVER_ERRORS: tuple[type[BaseException], ...] = (sqlite3.Error, UnicodeDecodeError)
"""Beside the driver's own: what it raises when a text in the file, or in its own message, is no text."""
