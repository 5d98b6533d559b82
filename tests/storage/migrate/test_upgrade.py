"""Migrations: the baseline makes the schema, a step is whole or not at all, a newer store is refused in words."""

from __future__ import annotations

import subprocess
import sys
from collections.abc import Callable
from pathlib import Path

import pytest

from storage import opening, schema
from storage.engine import Database, make_durable
from storage.migrate import upgrade
from storage.store import Store, StoreError
from tests.storage.conftest import NOW, PASSPHRASE
from tests.support.migration_step import scripts_with_a_step


@pytest.fixture
def scripts(tmp_path: Path) -> Callable[[str], Path]:
    """A folder of migrations with one step more than the shipped ones."""
    return lambda more="": scripts_with_a_step(tmp_path / "scripts", more)


def _schema(database: Database) -> set[tuple[str, str]]:
    with database.read() as c:
        rows = c.exec_driver_sql("SELECT name, type FROM sqlite_master WHERE name NOT LIKE 'sqlite_%'")
        return {(str(r[0]), str(r[1])) for r in rows}


def test_the_baseline_makes_the_same_schema_as_a_new_store(tmp_path: Path, store: Store) -> None:
    from alembic.autogenerate import compare_metadata
    from alembic.migration import MigrationContext

    path = tmp_path / "built.luff"
    make_durable(path, None)
    database = Database(path, None)
    directory = upgrade._directory(upgrade.SCRIPTS)
    upgrade._step(database, directory, "0001")
    with database.read() as c:
        assert compare_metadata(MigrationContext.configure(c, opts={"compare_type": True}), schema.metadata) == []
    assert _schema(database) == _schema(store._opened.database)
    database.close()


def test_a_new_store_stands_at_the_newest_migration(store: Store) -> None:
    directory = upgrade._directory(upgrade.SCRIPTS)
    assert directory.get_current_head() == opening.REVISION
    assert upgrade._waiting(store._opened.database, directory) == []


@pytest.mark.parametrize("encrypted", [False, True])
def test_an_older_store_is_backed_up_and_brought_up_to_date(
    make_store: Callable[..., Store], scripts: Callable[[str], Path], tmp_path: Path,
    monkeypatch: pytest.MonkeyPatch, encrypted: bool,
) -> None:  # fmt: skip
    store = make_store(encrypted=encrypted)
    store.put_policy("a", "h", "AB", NOW)
    store.close()
    secret = PASSPHRASE if encrypted else None
    monkeypatch.setattr(schema, "FORMAT", 2)
    with pytest.raises(StoreError, match=r"store.older"):
        Store.open(store.path, passphrase=secret)
    ran = upgrade.bring_up_to_date(store.path, secret, tmp_path / "before.luff", scripts(""))
    assert ran == ("0002",)
    with Store.open(store.path, passphrase=secret) as again:
        assert again.policy() == ("h", "a")
        assert again.notices == ()
    monkeypatch.setattr(schema, "FORMAT", 1)
    with pytest.raises(StoreError, match=r"store.newer"):
        Store.open(store.path, passphrase=secret)
    with Store.open(tmp_path / "before.luff", passphrase=secret) as kept:
        assert kept.policy() == ("h", "a")


def test_a_step_that_fails_leaves_the_store_as_it_was(
    store: Store, scripts: Callable[[str], Path], tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    store.put_policy("a", "h", "AB", NOW)
    store.close()
    monkeypatch.setattr(schema, "FORMAT", 2)
    with pytest.raises(ZeroDivisionError):
        upgrade.bring_up_to_date(store.path, None, tmp_path / "before.luff", scripts("1 / 0"))
    monkeypatch.setattr(schema, "FORMAT", 1)
    with Store.open(store.path) as again:
        assert again.policy() == ("h", "a")
        assert again.verify() == ()


def test_opening_a_store_imports_neither_migrations_nor_tables(store: Store) -> None:
    code = (
        "import sys; from storage.store import Store; s = Store.open(sys.argv[1]); s.head(); s.episode_keys(); "
        "print([m for m in ('alembic', 'pandas', 'scipy', 'cryptography', 'PySide6') if m in sys.modules])"
    )
    root = Path(__file__).parents[3]
    done = subprocess.run(
        [sys.executable, "-c", code, str(store.path)], capture_output=True, text=True, cwd=root, check=True
    )
    assert done.stdout.strip() == "[]"
