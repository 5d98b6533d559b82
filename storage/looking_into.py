"""Looking into a backup of whatever released format, before anything is made of it."""

from __future__ import annotations

from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

from storage import keys
from storage.backup import check_free
from storage.errors import StoreError
from storage.migrate.upgrade import migrate
from storage.restore import copy_of_backup
from storage.store import Store
from storage.store_file import data_key, remove_store


@contextmanager
def looked_into(source: Path, passphrase: str | None, beside: Path) -> Iterator[Store]:
    """A backup opened for reading, of whatever released format. Of one of an older format a copy is brought up to
    date and opened, which lies beside the store to be made, encrypted as the backup is, and goes again.

    Raises:
        StoreError: as `Store.open`; `store.exists` where such a copy of another look still lies there.
    """
    try:
        store = Store.open(source, passphrase=passphrase, read_only=True)
    except StoreError as error:
        if error.message.key != "store.older":
            raise
    else:
        with store:
            yield store
        return
    copy = beside.with_name(beside.name + ".looked-into")
    check_free(copy)
    key = data_key(source, passphrase)
    try:
        copy_of_backup(source, copy, key, closed=False)
        if key is not None:
            keys.write_envelope(keys.envelope_path(copy), keys.read_envelope(keys.envelope_path(source)))
        migrate(copy, key, None)
        with Store.open(copy, passphrase=passphrase, read_only=True) as store:
            yield store
    finally:
        remove_store(copy)
