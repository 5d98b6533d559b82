"""Creating and opening a store: its schema and triggers, migrating an older one, and what the place allows."""

from __future__ import annotations

from dataclasses import dataclass, field, replace
from datetime import UTC, datetime
from pathlib import Path
from uuid import uuid4

import sqlalchemy as sa

from core.record.message import Message
from storage import facts_kept, keys, place, schema
from storage.engine import BUSY_SECONDS, Database, driver_errors, make_durable
from storage.errors import StoreError, store_error, translated
from storage.migrate.upgrade import bring_up_to_date
from storage.store_file import check_facts, data_key, newer_notice, remove_store
from storage.triggers import create_triggers, trigger_findings


@dataclass(frozen=True, slots=True)
class Opened:
    """An open store's parts. `notices` say why it is read-only, when it is."""

    database: Database
    key: bytes | None = field(repr=False)
    facts: dict[str, str] = field(repr=False)
    notices: tuple[Message, ...] = ()
    recovery_code: str | None = field(default=None, repr=False)


def create(path: Path, passphrase: str | None, facts: dict[str, str], cost: keys.Cost) -> Opened:
    """Make a new store's file, with its envelope when a passphrase is given.

    Raises:
        StoreError: `store.exists`, `store.no_folder`, `store.network_share`.
        RecordError: `passphrase.too_short`.
    """
    _check_free(path)
    facts = _with_format(facts)
    new = keys.new_key(facts["store_id"], passphrase, cost) if passphrase is not None else None
    database = _make(path, new.key if new else None, new.envelope if new else "", facts)
    return Opened(database, new.key if new else None, facts, (), new.recovery_code if new else None)


def create_beside(path: Path, store: Path, key: bytes | None, facts: dict[str, str]) -> Opened:
    """Make a new store that the passphrase and recovery code of another one open: same key, a copy of its envelope.

    Raises:
        StoreError: as `create`.
    """
    _check_free(path)
    facts = _with_format(facts)
    envelope = keys.read_envelope(keys.envelope_path(store)) if key is not None else ""
    return Opened(_make(path, key, envelope, facts), key, facts)


def _with_format(facts: dict[str, str]) -> dict[str, str]:
    return {"format": str(schema.FORMAT), "readable_from": str(schema.FORMAT), "store_id": str(uuid4()), **facts}


def _make(path: Path, key: bytes | None, envelope: str, facts: dict[str, str]) -> Database:
    """The file with its schema and facts; whole, or nothing of it."""
    _claim(path)
    try:
        if envelope:
            keys.write_envelope(keys.envelope_path(path), envelope)
        make_durable(path, key)
        database = Database(path, key)
        try:
            _fill(database, facts)
        except BaseException:
            database.close()
            raise
    except driver_errors() as error:
        failed = translated(error, path)  # told while the file is there
        remove_store(path)
        raise failed from error
    except BaseException:
        remove_store(path)
        raise
    return database


def _claim(path: Path) -> None:
    """Make the file, for its owner's eyes alone; the journal takes its rights from it."""
    try:
        path.touch(mode=0o600, exist_ok=False)
    except FileExistsError:
        raise store_error("store.exists", path=path.name) from None
    except OSError as error:
        raise store_error("store.cannot_open", path=path.name, detail=error.strerror or "") from error


def _fill(database: Database, facts: dict[str, str]) -> None:
    with database.write() as connection:
        schema.metadata.create_all(connection)
        create_triggers(connection)
        facts_kept.put(connection, facts)
        _stamp(connection)


def _check_free(path: Path) -> None:
    if not path.parent.is_dir():
        raise store_error("store.no_folder", path=str(path.parent))
    if path.exists() or keys.envelope_path(path).exists():
        raise store_error("store.exists", path=path.name)
    place.refuse_network_share(path)


def _stamp(connection: sa.Connection) -> None:
    """Say which migration the schema stands at, without importing the migration library."""
    table = sa.Table("alembic_version", sa.MetaData(), sa.Column("version_num", sa.String(32), primary_key=True))
    table.create(connection)
    connection.execute(sa.insert(table), {"version_num": REVISION})


ARCHIVE = "archive"
"""The fact that marks an archive of closed episodes: it is read and never written again."""
PROBE_SECONDS = 1.0
"""How long an opening waits to see whether another program holds the write lock."""
REVISION = "0001"
"""The newest migration; a test holds it equal to the migrations' own head."""


def open_store(path: Path, passphrase: str | None, read_only: bool, busy: float = BUSY_SECONDS) -> Opened:
    """Open a store's file. One of an older format is backed up beside itself and migrated first. Where the place
    takes no writing, or its format is newer and still readable, it opens read-only; where another program is writing
    it opens all the same. Each with its notice.

    Raises:
        StoreError: what stands in the way: missing, newer, damaged, no store, locked, a network share.
    """
    if not path.is_file():
        raise store_error("store.missing", path=path.name)
    place.refuse_network_share(path)
    key = data_key(path, passphrase)
    notices: list[Message] = []
    if not read_only and not place.can_write(path):
        notices.append(Message("store.read_only_place", {"path": path.name}))
    database = Database(path, key, mode=_mode(path, read_only or bool(notices)), busy=busy)
    try:
        try:
            facts = check_facts(database)
        except StoreError as error:
            if error.message.key != "store.older" or database.read_only:
                raise
            database.close()
            return _migrated(path, passphrase, busy, error)
        newer = newer_notice(facts, path)
        with database.read() as connection:
            wrong = [] if newer else trigger_findings(connection)
    except BaseException:
        database.close()
        raise
    closed = [newer] if newer else [Message("store.trigger", {"name": n, "what": what}) for n, what in wrong]
    if not newer and facts_kept.problem(facts):
        closed.append(Message("store.facts", {"path": path.name}))
    if facts.get(ARCHIVE) == "yes":
        closed.append(Message("store.archive", {"path": path.name}))
    if closed and not database.read_only:
        database.close()
        database = Database(path, key, mode="ro", busy=busy)
    if not database.read_only and not database.takes_writing(min(busy, PROBE_SECONDS)):
        notices.append(Message("store.busy_for_now", {"path": path.name}))
    told = closed if newer or not read_only else []  # who asked to read only need not be told that it is so
    return Opened(database, key, facts, (*notices, *told))


def _migrated(path: Path, passphrase: str | None, busy: float, older: StoreError) -> Opened:
    """A store of an older format, brought up to date and opened; its backup lies beside it and is told of."""
    kept = path.with_name(f"{path.stem}.{datetime.now(UTC):%Y%m%dT%H%M%SZ}.luff")
    if not bring_up_to_date(path, passphrase, kept):
        raise older
    opened = open_store(path, passphrase, read_only=False, busy=busy)
    told = Message(
        "store.migrated", {"path": path.name, "format": older.message.values["format"], "backup": kept.name}
    )
    return replace(opened, notices=(told, *opened.notices))


def _mode(path: Path, read_only: bool) -> str:
    if not read_only:
        return "rw"
    journal = path.with_name(path.name + "-wal")
    folder_closed = not place.can_write(path) and not journal.exists()
    return "immutable" if folder_closed else "ro"
