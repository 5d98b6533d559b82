"""Connections to the store's file: the one driver, its settings, transactions, and its errors in our words.

Everything that only SQLite understands stands here and in `triggers`.
"""

from __future__ import annotations

from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path
from threading import RLock
from typing import Any
from urllib.parse import quote

import sqlalchemy as sa
from sqlalchemy import event
from sqlalchemy.exc import DBAPIError
from sqlcipher3 import dbapi2

from core.record.message import RecordError
from storage.errors import DRIVER_ERRORS, StoreError, store_error, translated

APPLICATION_ID = 0x4C556666
BUSY_SECONDS = 10.0
PAGE_BYTES = 4096
"""A page of a store's file, plain or encrypted: the driver's own size, which no store changes."""
_READERS = 3


def driver_errors() -> tuple[type[BaseException], ...]:
    """The errors of the driver and of SQLAlchemy's wrapping of them."""
    return (dbapi2.Error, DBAPIError, *DRIVER_ERRORS)


def raw_connection(path: Path, key: bytes | None, *, mode: str = "rw", busy: float = BUSY_SECONDS) -> Any:
    """A bare driver connection. `mode` is rwc, rw, ro or immutable; `key` the 32-byte raw key or None.

    Writers begin explicitly (isolation_level None): the driver's own default neither rolls back DDL nor
    takes the write lock at the start.
    """
    query = "mode=ro&immutable=1" if mode == "immutable" else f"mode={mode}"
    uri = f"file:{quote(str(path.absolute()))}?{query}"
    connection = dbapi2.connect(
        uri, uri=True, isolation_level=None, check_same_thread=False, timeout=busy, cached_statements=256
    )
    try:
        connection.execute("PRAGMA cipher_log_level = NONE")
        if key is not None:
            connection.execute(f"PRAGMA key = \"x'{key.hex()}'\"")
        for setting in ("foreign_keys = ON", "recursive_triggers = ON", "synchronous = FULL",
                        "secure_delete = ON", "temp_store = MEMORY", "trusted_schema = OFF",
                        "cell_size_check = ON"):  # fmt: skip
            connection.execute(f"PRAGMA {setting}")
    except BaseException:
        connection.close()
        raise
    return connection


class Database:
    """The engine of one store: short readers, one writer at a time, errors as `StoreError`."""

    def __init__(self, path: Path, key: bytes | None, *, mode: str = "rw", busy: float = BUSY_SECONDS) -> None:
        self.path = path
        self.read_only = mode in ("ro", "immutable")
        self._key, self._busy = key, busy
        self.is_keyed = key is not None
        self._write_lock = RLock()
        self._file = _identity(path)
        self.engine = sa.create_engine(
            "sqlite://",
            hide_parameters=True,  # an error's text must not carry what was to be recorded
            module=dbapi2,
            creator=lambda: raw_connection(path, key, mode=mode, busy=busy),
            poolclass=sa.QueuePool,
            pool_size=_READERS,
            max_overflow=8,
        )
        event.listen(self.engine, "begin", _begin)

    @contextmanager
    def read(self) -> Iterator[sa.Connection]:
        """A short read of one consistent state.

        Raises:
            StoreError: `store.damaged` also where a value is of a kind that is never written.
        """
        try:
            with self._translating(), self.engine.connect() as connection, connection.begin():
                yield connection
        except RecordError:
            raise
        except (
            TypeError,
            ValueError,
            LookupError,
            OverflowError,
        ) as error:  # a row may even come without its columns
            raise store_error("store.damaged", path=self.path.name, detail=str(error)[:200]) from error

    @contextmanager
    def write(self) -> Iterator[sa.Connection]:
        """A transaction that holds the write lock from its start; all of it is kept, or none.

        Raises:
            StoreError: `store.busy` when another writer holds the lock beyond the busy timeout;
                `store.file_gone` when the file was moved or replaced, so that nobody would find the entry.
        """
        if self.read_only:
            raise store_error("store.read_only", path=self.path.name)
        if not self._write_lock.acquire(timeout=self._busy):
            raise store_error("store.busy", path=self.path.name, detail="another thread writes")
        try:
            if _identity(self.path) != self._file:
                raise store_error("store.file_gone", path=self.path.name)
            with self._translating(), self.engine.connect() as plain:
                connection = plain.execution_options(luff_write=True)
                with connection.begin():
                    yield connection
        finally:
            self._write_lock.release()

    def takes_writing(self, seconds: float) -> bool:
        """Whether the write lock can be had within a time; it is given back at once."""
        connection = raw_connection(self.path, self._key, busy=seconds)
        try:
            connection.execute("BEGIN IMMEDIATE")
            connection.execute("ROLLBACK")
        except dbapi2.OperationalError as error:
            if translated(error, self.path).message.key == "store.busy":
                return False
            raise translated(error, self.path) from error
        finally:
            connection.close()
        return True

    @contextmanager
    def _translating(self) -> Iterator[None]:
        try:
            yield
        except StoreError:
            raise
        except DBAPIError as error:
            raise translated(error.orig or error, self.path) from error
        except driver_errors() as error:
            raise translated(error, self.path) from error

    def close(self) -> None:
        """Close every connection; the last one out folds the journal into the file."""
        self.engine.dispose()


def _identity(path: Path) -> tuple[int, int] | None:
    """Which file lies at a path, or None."""
    try:
        facts = path.stat()
    except OSError:
        return None
    return facts.st_dev, facts.st_ino


def _begin(connection: sa.Connection) -> None:
    write = connection.get_execution_options().get("luff_write")
    connection.exec_driver_sql("BEGIN IMMEDIATE" if write else "BEGIN")


def make_durable(path: Path, key: bytes | None) -> None:
    """Create the file with its lasting settings: write-ahead journal and the application's mark."""
    connection = raw_connection(path, key, mode="rwc")
    try:
        connection.execute(f"PRAGMA application_id = {APPLICATION_ID}")
        connection.execute("PRAGMA journal_mode = WAL")
    finally:
        connection.close()


def application_id(connection: sa.Connection) -> int:
    """The mark in the file's header that says whose file it is."""
    return int(connection.exec_driver_sql("PRAGMA application_id").scalar_one())


def integrity_findings(connection: sa.Connection, *, encrypted: bool) -> list[str]:
    """What the driver finds wrong with pages, indexes and references; empty when all is well."""
    found: list[str] = []
    if encrypted:
        found += [str(row[0]) for row in connection.exec_driver_sql("PRAGMA cipher_integrity_check")]
    found += [str(r[0]) for r in connection.exec_driver_sql("PRAGMA integrity_check(50)") if r[0] != "ok"]
    for row in connection.exec_driver_sql("PRAGMA foreign_key_check"):
        found.append(f"row {row[1]} of {row[0]} points to a missing row of {row[2]}")
    return found


def page_findings(connection: sa.Connection, *, encrypted: bool) -> list[str]:
    """Pages that fail their proof or their form; empty when all is well."""
    if encrypted:
        return [str(row[0]) for row in connection.exec_driver_sql("PRAGMA cipher_integrity_check")]
    return [str(r[0]) for r in connection.exec_driver_sql("PRAGMA quick_check(1)") if r[0] != "ok"]


def fold_journal(database: Database) -> None:
    """Fold the journal into the file and empty it, so that it keeps nothing that was removed.

    Another program that reads may hold part of it back; it is folded when that one closes.
    """
    with database.engine.connect() as connection:
        connection.connection.cursor().execute("PRAGMA wal_checkpoint(TRUNCATE)")


def limit_pages(database: Database, pages: int) -> None:
    """Keep the file from growing past a number of pages (for a quota, and to prove what a full disk does)."""

    def limit(connection: Any, _record: Any) -> None:
        connection.execute(f"PRAGMA max_page_count = {int(pages)}")

    event.listen(database.engine, "connect", limit)
    database.engine.dispose()
