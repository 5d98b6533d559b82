"""A program that logs entries one by one and says of each that it was taken, for tests that end it early.

`python -m tests.support.logging_child STORE EPISODE COUNT [LARGEST_FILE]`; a passphrase stands in LUFF_SECRET.
With LUFF_CARELESS it logs without asking the disk to keep anything.
Each acknowledged entry is one line `sequence number` on standard output; an error is one line `error key`.
"""

from __future__ import annotations

import os
import sys
from pathlib import Path
from typing import Any

from core.record.entries import NewEntry
from core.record.instant import parse
from storage.store import Store, StoreError

NOW = parse("2026-03-28T02:00:00+00:00")


def main() -> None:
    """Log until done, ended, or refused."""
    path, episode, count = Path(sys.argv[1]), sys.argv[2], int(sys.argv[3])
    if len(sys.argv) > 4:
        limit_files(int(sys.argv[4]))
    if os.environ.get("LUFF_CARELESS"):
        sync_nothing()
    with Store.open(path, passphrase=os.environ.get("LUFF_SECRET")) as store:
        print("ready", flush=True)
        for i in range(count):
            new = NewEntry(
                episode, "rr", NOW + i, float(i % 60), None, str(i), "/min", 0, by="AB", note="x" * (i % 300)
            )
            try:
                receipt = store.append([new], by="AB", operation="log", now=NOW + i)
            except StoreError as error:
                print("error", error.message.key, flush=True)
                return
            sys.stdout.write(f"{receipt.last_seq} {i}\n")
            sys.stdout.flush()


def sync_nothing() -> None:
    """Make every connection one that asks the disk to keep nothing: what the proof of power cuts must find."""
    from storage import engine

    careful = engine.raw_connection

    def careless(*args: Any, **more: Any) -> Any:
        connection = careful(*args, **more)
        connection.execute("PRAGMA synchronous = OFF")
        return connection

    engine.raw_connection = careless


def limit_files(size: int) -> None:
    """No file may grow past a size: what a full disk does, without filling one."""
    import resource
    import signal

    signal.signal(signal.SIGXFSZ, signal.SIG_IGN)
    resource.setrlimit(resource.RLIMIT_FSIZE, (size, size))


if __name__ == "__main__":
    main()
