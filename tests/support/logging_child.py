"""A program that logs entries one by one and says of each that it was taken, for tests that end it early.

`python -m tests.support.logging_child STORE EPISODE COUNT [LARGEST_FILE]`; a passphrase stands in LUFF_SECRET.
Each acknowledged entry is one line `sequence number` on standard output; an error is one line `error key`.
"""

from __future__ import annotations

import os
import sys
from pathlib import Path

from core.record.entries import NewEntry
from core.record.instant import parse
from storage.store import Store, StoreError

NOW = parse("2026-03-28T02:00:00+00:00")


def main() -> None:
    """Log until done, ended, or refused."""
    path, episode, count = Path(sys.argv[1]), sys.argv[2], int(sys.argv[3])
    if len(sys.argv) > 4:
        limit_files(int(sys.argv[4]))
    with Store.open(path, passphrase=os.environ.get("LUFF_SECRET"), busy_seconds=60) as store:
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


def limit_files(size: int) -> None:
    """No file may grow past a size: what a full disk does, without filling one."""
    import resource
    import signal

    signal.signal(signal.SIGXFSZ, signal.SIG_IGN)
    resource.setrlimit(resource.RLIMIT_FSIZE, (size, size))


if __name__ == "__main__":
    main()
