"""A witness of the chain: a small text file, kept elsewhere, to which printed heads are added line by line.

The chain proves that nothing inside it was changed; only something outside can tell that its newest part was cut off.
A line holds the moment, the store's id, and the head as it is printed.
"""

from __future__ import annotations

import os
from pathlib import Path
from typing import TYPE_CHECKING

from core.record.instant import Instant, iso
from core.record.message import Message
from storage.errors import store_error

if TYPE_CHECKING:
    from storage.store import Store

_MOST_BYTES = 50_000_000


def add(path: Path, store: Store, now: Instant) -> str:
    """Add the store's head to a witness file, made where there is none; the line.

    Raises:
        StoreError: `witness.unwritable`.
    """
    line = f"{iso(now)} {store.store_id} {store.printed_head()}"
    try:
        with path.open("a", encoding="ascii") as file:
            file.write(line + "\n")
            file.flush()
            os.fsync(file.fileno())
    except OSError as error:
        raise store_error("witness.unwritable", path=path.name, detail=error.strerror or "") from error
    return line


def findings(path: Path, store: Store) -> tuple[Message, ...]:
    """Every line of a witness file that the store does not bear out; a store that lost its tail lacks the last ones.

    Raises:
        StoreError: `witness.unreadable` where the file is missing, no text, or names no head of this store.
    """
    found: list[Message] = []
    seen = 0
    for number, line in enumerate(_lines(path), start=1):
        at, _, rest = line.strip().partition(" ")
        store_id, _, head = rest.partition(" ")
        if not at:
            continue
        if not head:
            found.append(Message("witness.bad_line", {"path": path.name, "line": number}))
        elif store_id == store.store_id:
            seen += 1
            if head != _NOTHING and not store.proves(head):
                found.append(Message("witness.not_borne_out", {"line": number, "head": head, "at": at}))
    if not seen:
        raise store_error("witness.unreadable", path=path.name, detail="it names no head of this store")
    return tuple(found)


_NOTHING = f"0 {'0' * 16}"
"""The head of an empty store, which every store has had."""


def _lines(path: Path) -> list[str]:
    try:
        if path.stat().st_size > _MOST_BYTES:
            raise store_error("witness.unreadable", path=path.name, detail="it is too large")
        return path.read_text("ascii").splitlines()
    except OSError as error:
        raise store_error("witness.unreadable", path=path.name, detail=error.strerror or "") from error
    except UnicodeDecodeError:
        raise store_error("witness.unreadable", path=path.name, detail="it is no plain text") from None
