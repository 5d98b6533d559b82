"""Backup and restore: whole, encrypted as the store is, nothing overwritten, others work on meanwhile."""

from __future__ import annotations

import threading
from collections.abc import Callable
from pathlib import Path

import pytest

from core.record.entries import NewEntry
from storage.engine import raw_connection
from storage.keys import envelope_path
from storage.store import Store, StoreError
from storage.triggers import expected_triggers
from tests.storage.conftest import NOW, PASSPHRASE


def log(store: Store, i: int) -> None:
    store.append([NewEntry("E1", "rr", NOW + i, 20.0, None, "20", "/min", 0)], by="AB", operation="log", now=NOW)


def secret(store: Store) -> str | None:
    return PASSPHRASE if store.is_encrypted else None


def test_a_backup_restores_to_the_same_ledger(either_store: Store, tmp_path: Path) -> None:
    for i in range(5):
        log(either_store, i)
    either_store.backup(tmp_path / "copy.luff")
    log(either_store, 9)
    Store.restore(tmp_path / "copy.luff", tmp_path / "new.luff")
    with Store.open(tmp_path / "new.luff", passphrase=secret(either_store)) as new:
        assert new.head() == 5
        assert new.entries("E1") == either_store.entries("E1", head=5)
        assert new.verify() == ()
        assert new.is_encrypted is either_store.is_encrypted
    names = {p.name for p in tmp_path.iterdir()}
    assert not any("unfinished" in n for n in names)


def test_a_backup_taken_while_others_log_is_a_sound_prefix(either_store: Store, tmp_path: Path) -> None:
    stop = threading.Event()

    def work() -> None:
        i = 0
        while not stop.is_set():
            log(either_store, i)
            i += 1

    writer = threading.Thread(target=work)
    writer.start()
    try:
        for n in range(5):
            either_store.backup(tmp_path / f"{n}.luff")
    finally:
        stop.set()
        writer.join()
    for n in range(5):
        with Store.open(tmp_path / f"{n}.luff", passphrase=secret(either_store)) as copy:
            assert copy.verify() == ()
            assert copy.entries("E1") == either_store.entries("E1", head=copy.head())


def test_nothing_is_overwritten(either_store: Store, tmp_path: Path) -> None:
    log(either_store, 1)
    target = tmp_path / "copy.luff"
    target.write_bytes(b"mine")
    with pytest.raises(StoreError, match=r"store.exists"):
        either_store.backup(target)
    target.unlink()
    either_store.backup(target)
    (tmp_path / "new.luff").write_bytes(b"mine")
    with pytest.raises(StoreError, match=r"store.exists"):
        Store.restore(target, tmp_path / "new.luff")
    assert (tmp_path / "new.luff").read_bytes() == b"mine"
    with pytest.raises(StoreError, match=r"store.no_folder"):
        either_store.backup(tmp_path / "none" / "copy.luff")


def test_what_is_no_backup_restores_to_nothing(make_store: Callable[..., Store], tmp_path: Path) -> None:
    store = make_store(encrypted=True)
    store.backup(tmp_path / "copy.luff")
    envelope_path(tmp_path / "copy.luff").unlink()
    (tmp_path / "text.luff").write_text("SQLite format 3\x00 but no more" * 50)
    for name, key in (
        ("copy.luff", "key.envelope_missing"),
        ("none.luff", "store.missing"),
        ("text.luff", "store"),
    ):
        with pytest.raises(StoreError) as caught:
            Store.restore(tmp_path / name, tmp_path / "new.luff")
        assert caught.value.message.key.startswith(key)
        assert not (tmp_path / "new.luff").exists()
        assert not envelope_path(tmp_path / "new.luff").exists()


def test_a_damaged_backup_of_a_plain_store_is_not_restored(store: Store, tmp_path: Path) -> None:
    for i in range(200):
        log(store, i)
    store.backup(tmp_path / "copy.luff")
    data = bytearray((tmp_path / "copy.luff").read_bytes())
    data[4096 * 5 : 4096 * 9] = b"\xff" * 4096 * 4
    (tmp_path / "copy.luff").write_bytes(data)
    with pytest.raises(StoreError, match=r"store.damaged") as caught:
        Store.restore(tmp_path / "copy.luff", tmp_path / "new.luff")
    assert caught.value.message.values["path"] == "copy.luff"  # the file that was given, not the one to be made
    assert not (tmp_path / "new.luff").exists()


@pytest.mark.parametrize("encrypted", [False, True])
def test_a_backup_that_says_something_else_is_not_restored(
    make_store: Callable[..., Store], tmp_path: Path, encrypted: bool
) -> None:
    store = make_store(encrypted=encrypted)
    log(store, 1)
    store.backup(tmp_path / "copy.luff")
    c = raw_connection(tmp_path / "copy.luff", store._opened.key)
    c.execute("DROP TRIGGER no_update_entry")
    c.execute("UPDATE entry SET number = 99")
    c.execute(expected_triggers()["no_update_entry"])
    c.close()
    with pytest.raises(StoreError) as caught:
        Store.restore(tmp_path / "copy.luff", tmp_path / "new.luff", passphrase=secret(store))
    assert caught.value.message.values["detail"] == "verify.chain"
    assert caught.value.message.values["path"] == "copy.luff"
    assert not (tmp_path / "new.luff").exists()


@pytest.mark.parametrize("encrypted", [False, True])
def test_a_store_copied_with_its_journal_restores_with_what_the_journal_holds(
    make_store: Callable[..., Store], tmp_path: Path, encrypted: bool
) -> None:
    store = make_store(encrypted=encrypted)
    for i in range(3):
        log(store, i)
    folder = tmp_path / "copied"
    folder.mkdir()
    for end in ("", "-wal", ".key"):
        if (part := store.path.with_name(store.path.name + end)).exists():
            (folder / part.name).write_bytes(part.read_bytes())
    before = {p.name: p.read_bytes() for p in folder.iterdir()}
    if encrypted:
        with pytest.raises(StoreError, match=r"store.needs_passphrase"):
            Store.restore(folder / "ward.luff", tmp_path / "new.luff")
    Store.restore(folder / "ward.luff", tmp_path / "new.luff", passphrase=secret(store))
    with Store.open(tmp_path / "new.luff", passphrase=secret(store)) as new:
        assert new.entries("E1") == store.entries("E1")
        assert new.verify() == ()
    assert {n: (folder / n).read_bytes() for n in before} == before
    assert not list(tmp_path.glob("*unfinished*"))


@pytest.mark.parametrize("encrypted", [False, True])
def test_a_refused_restore_leaves_nothing(make_store: Callable[..., Store], tmp_path: Path, encrypted: bool) -> None:
    store = make_store(encrypted=encrypted)
    for i in range(50):
        log(store, i)
    store.close()
    data = bytearray(store.path.read_bytes())
    data[-5000:-3000] = bytes(2000)
    store.path.write_bytes(data)
    before = {p.name for p in tmp_path.iterdir()}
    with pytest.raises(StoreError):
        Store.restore(store.path, tmp_path / "new.luff", passphrase=secret(store))
    assert {p.name for p in tmp_path.iterdir()} == before
