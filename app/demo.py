"""The sample shift in a throw-away store, at a pretended moment late in the night."""

from __future__ import annotations

from pathlib import Path

from core.record.instant import HOUR, Instant, parse
from core.record.message import Message
from storage.errors import StoreError
from storage.store import Store

STORE_NAME = "sample-shift.luffmark"
BY = "DEMO"
ZONE = "Europe/London"
"""The wall clock of the invented ward; in this night it stands at UTC."""


def demo_now() -> Instant:
    """The moment the demonstration pretends it is."""
    import sample_data

    return parse(sample_data.DEMO_CLOCK)


def make_demo_store(folder: Path) -> Path:
    """Take the sample shift's files into a new store in `folder`; its path.

    Raises:
        StoreError: the folder cannot hold a store, or a sample file is not what it was.
    """
    import sample_data
    from storage.intake.batch import take_in
    from storage.intake.log_csv import read_log_csv

    path, now = folder / STORE_NAME, demo_now()
    with Store.create(path, now=now - 12 * HOUR, by=BY, imported=True) as store:
        for file in sample_data.files():
            intake = read_log_csv(file, now=now, existing=store)
            if intake.refusals:
                found = intake.refusals[0]
                detail = f"{file.name}, line {found.line}: {found.message.key}"
                raise StoreError(Message("demo.sample_refused", {"detail": detail}))
            take_in(store, intake, by=BY, now=now)
    return path
