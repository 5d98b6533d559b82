"""While a worker runs, what lies in cycles is collected on the thread of the window alone.

Python collects on whichever thread happens to allocate. A widget that lies in such a cycle would then be destroyed on
the worker; the binding hands it over to the window's thread, for some kinds without its destructor, and the program
ends without a word a moment later. So collecting by itself is off while any worker runs, and a timer does it.
"""

from __future__ import annotations

import gc

EVERY_MS = 500
"""How often the window's thread looks whether there is enough to collect."""

_workers = 0


def worker_begins() -> None:
    """Say on the window's thread, before it starts, that a worker will run."""
    global _workers
    _workers += 1
    gc.disable()


def worker_ended() -> None:
    """Say on the window's thread that a worker is no more; after the last Python collects by itself again."""
    global _workers
    _workers -= 1
    if _workers == 0:
        gc.enable()


def collect() -> int | None:
    """Collect what Python would have collected by now: the oldest generation that is past its threshold, or None."""
    counts, thresholds = gc.get_count(), gc.get_threshold()
    due = [n for n in range(len(counts)) if counts[n] > thresholds[n]]
    if not due:
        return None
    gc.collect(due[-1])
    return due[-1]
