"""Runs the migrations that a store lacks. The migration library is imported only here, never on the way to
opening a store that is up to date.

Ledger tables are migrated by new columns and new tables, and never rebuilt: rebuilding would write them anew.
"""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING, Any

import sqlalchemy as sa

from storage import facts_kept, place, schema
from storage.backup import backup
from storage.engine import Database
from storage.errors import store_error
from storage.store_file import data_key
from storage.triggers import create_triggers, expected_triggers

if TYPE_CHECKING:
    from alembic.script import ScriptDirectory

SCRIPTS = Path(__file__).parent


def bring_up_to_date(path: Path, passphrase: str | None, backup_to: Path, scripts: Path = SCRIPTS) -> tuple[str, ...]:
    """Back the store up, then run every migration it lacks; the revisions that were run.

    Raises:
        StoreError: `store.newer`, `store.missing`, `store.exists` for the backup; a failed step leaves the
            store as it was before that step.
    """
    if not path.is_file():
        raise store_error("store.missing", path=path.name)
    place.refuse_network_share(path)
    return migrate(path, data_key(path, passphrase), backup_to, scripts)


def migrate(path: Path, key: bytes | None, backup_to: Path | None, scripts: Path = SCRIPTS) -> tuple[str, ...]:
    """The same of a store whose key is known. `backup_to` None: it is a copy itself, and its original stays.

    Raises:
        StoreError: as `bring_up_to_date`.
    """
    database = Database(path, key)
    try:
        _refuse_newer(database)
        directory = _directory(scripts)
        waiting = _waiting(database, directory)
        if waiting and backup_to is not None:
            backup(path, key, backup_to)
        for revision in waiting:
            _step(database, directory, revision)
        return tuple(waiting)
    finally:
        database.close()


def _refuse_newer(database: Database) -> None:
    facts = schema.store_facts.c
    with database.read() as connection:
        found = connection.execute(sa.select(facts.value).where(facts.key == "format")).scalar()
    if found is None or not found.isdigit():
        raise store_error("store.not_a_store", path=database.path.name)
    if int(found) > schema.FORMAT:
        raise store_error("store.newer", path=database.path.name, format=int(found), accepted=schema.FORMAT)


def _directory(scripts: Path) -> ScriptDirectory:
    from alembic.config import Config
    from alembic.script import ScriptDirectory

    config = Config()
    config.set_main_option("script_location", str(scripts).replace("%", "%%"))
    config.set_main_option("path_separator", "os")
    return ScriptDirectory.from_config(config)


def _waiting(database: Database, directory: ScriptDirectory) -> list[str]:
    """The revisions a store lacks, oldest first."""
    from alembic.migration import MigrationContext

    with database.read() as connection:
        at = MigrationContext.configure(connection).get_current_revision()
    found = [script.revision for script in directory.walk_revisions("base", "heads")]
    found.reverse()
    return found[found.index(at) + 1 :] if at in found else found


def _step(database: Database, directory: ScriptDirectory, revision: str) -> None:
    """One migration in one transaction, with the triggers that its tables need and the format it reaches."""
    from alembic.config import Config
    from alembic.runtime.environment import EnvironmentContext

    def run(current: Any, _context: Any) -> Any:
        return directory._upgrade_revs(revision, current)

    with database.write() as connection:
        environment = EnvironmentContext(Config(), directory, fn=run)
        environment.configure(connection=connection, fn=run)
        with environment:
            environment.run_migrations()
        _refresh_triggers(connection)
        module = directory.get_revision(revision).module
        reached = getattr(module, "FORMAT", schema.FORMAT)
        _say_format(connection, reached, getattr(module, "READABLE_FROM", reached))


def _say_format(connection: sa.Connection, reached: int, readable_from: int) -> None:
    """An older program may read the store only where the migration says so: unsaid, it is kept from guessing."""
    facts_kept.put(connection, {"format": str(reached), "readable_from": str(readable_from)})


def _refresh_triggers(connection: sa.Connection) -> None:
    """Triggers are made anew from the schema in the same transaction, so that new tables have theirs."""
    present = {row[0] for row in connection.exec_driver_sql("SELECT name FROM sqlite_master WHERE type = 'trigger'")}
    for name in present & expected_triggers().keys():
        connection.exec_driver_sql(f"DROP TRIGGER {name}")
    create_triggers(connection)
