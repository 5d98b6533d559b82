"""A kept file of every released format: it opens, says what it said, and a step to come takes it along.

The files were written by the release that had the format, with `python -m tests.support.kept_store FOLDER`; those of
format 1 by the program before a store's own facts had a digest.
"""

from __future__ import annotations

import gzip
import json
from pathlib import Path

import pytest

from app.operations.backup import RestoreRequest, restore
from core.record.message import RecordError
from storage import schema
from storage.backup_rotation import YEAR, backups_in, rotate
from storage.keys import envelope_path
from storage.migrate import upgrade
from storage.store import Store, StoreError
from tests.support.kept_store import NOW, SECRET, told
from tests.support.migration_step import scripts_with_a_step

KEPT = Path(__file__).parent / "kept"
NAMES = sorted(p.name.removesuffix(".luffmark.gz") for p in KEPT.glob("*.luffmark.gz"))


def unpacked(name: str, folder: Path) -> tuple[Path, dict[str, object]]:
    """A kept store in a folder of its own, and what it said."""
    path = folder / f"{name}.luffmark"
    path.write_bytes(gzip.decompress((KEPT / f"{name}.luffmark.gz").read_bytes()))
    if (KEPT / f"{name}.luffmark.key").exists():
        envelope_path(path).write_bytes((KEPT / f"{name}.luffmark.key").read_bytes())
    return path, json.loads((KEPT / f"{name}.json").read_text("utf-8"))


def test_every_released_format_has_its_files() -> None:
    wanted = {f"format_{n}_{kind}" for n in range(1, schema.FORMAT + 1) for kind in ("plain", "encrypted")}
    assert set(NAMES) == wanted


@pytest.mark.parametrize("name", NAMES)
def test_a_kept_file_opens_and_says_what_it_said(name: str, tmp_path: Path) -> None:
    path, said = unpacked(name, tmp_path)
    with Store.open(path, passphrase=SECRET) as store:
        assert store.verify() == ()
        assert told(store) == said
        store.put_layout("day", "[more]")  # and it is written to as before
        store.record_event("signed in", person="AB", now=NOW + YEAR)
        assert store.verify() == ()


@pytest.mark.parametrize("name", NAMES)
def test_opening_one_of_an_older_format_backs_it_up_and_brings_it_along(
    name: str, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    path, said = unpacked(name, tmp_path)
    monkeypatch.setattr(schema, "FORMAT", schema.FORMAT + 1)
    monkeypatch.setattr(upgrade.bring_up_to_date, "__defaults__", (scripts_with_a_step(tmp_path / "scripts"),))
    with pytest.raises(StoreError, match=r"store.older"):
        Store.open(path, passphrase=SECRET, read_only=True)  # who only reads changes nothing
    with Store.open(path, passphrase=SECRET) as store:
        assert [n.key for n in store.notices] == ["store.migrated"]
        assert told(store) == said
        assert store.proves(str(said["printed_head"]))
        assert store.verify() == ()
        ((at, backup),) = backups_in(tmp_path, path).items()
        assert backup.name == store.notices[0].values["backup"]
        (tmp_path / "backups").mkdir()
        rotate(store, tmp_path / "backups", at + YEAR - 1)
        assert backup.exists()
        rotate(store, tmp_path / "backups", at + YEAR + 1)  # it expires as any other does
        assert not backup.exists()
        assert not envelope_path(backup).exists()
    with Store.open(path, passphrase=SECRET) as again:
        assert again.notices == ()
    monkeypatch.setattr(schema, "FORMAT", schema.FORMAT - 1)
    with pytest.raises(StoreError, match=r"store.newer"):
        Store.open(path, passphrase=SECRET)


@pytest.mark.parametrize("name", NAMES)
def test_a_step_that_fails_leaves_the_kept_file_and_its_backup(
    name: str, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    path, said = unpacked(name, tmp_path)
    monkeypatch.setattr(schema, "FORMAT", schema.FORMAT + 1)
    scripts = scripts_with_a_step(tmp_path / "scripts", "op.execute('CREATE TABLE half (x)')\n    1 / 0")
    monkeypatch.setattr(upgrade.bring_up_to_date, "__defaults__", (scripts,))
    with pytest.raises(ZeroDivisionError):
        Store.open(path, passphrase=SECRET)
    monkeypatch.setattr(schema, "FORMAT", schema.FORMAT - 1)
    for file in (path, *backups_in(tmp_path, path).values()):
        with Store.open(file, passphrase=SECRET) as store:
            assert told(store) == said
            assert store.verify() == ()


@pytest.mark.parametrize("name", NAMES)
def test_a_backup_of_an_older_format_restores_and_stays_as_it_was(
    name: str, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    path, said = unpacked(name, tmp_path)
    before = path.read_bytes()
    monkeypatch.setattr(schema, "FORMAT", schema.FORMAT + 1)
    monkeypatch.setattr(upgrade.migrate, "__defaults__", (scripts_with_a_step(tmp_path / "scripts"),))
    Store.restore(path, tmp_path / "new.luffmark", passphrase=SECRET)
    assert path.read_bytes() == before
    with Store.open(tmp_path / "new.luffmark", passphrase=SECRET) as store:
        assert store.notices == ()
        assert told(store) == said
        assert store.verify() == ()


@pytest.mark.parametrize("name", NAMES)
def test_who_may_restore_a_backup_of_an_older_format_is_asked_of_a_copy(
    name: str, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """By the door of window and command line: its people are known, nobody else restores, nothing is left behind."""
    path, said = unpacked(name, tmp_path)
    before = path.read_bytes()
    monkeypatch.setattr(schema, "FORMAT", schema.FORMAT + 1)
    monkeypatch.setattr(upgrade.migrate, "__defaults__", (scripts_with_a_step(tmp_path / "scripts"),))
    new = tmp_path / "made" / "new.luffmark"
    new.parent.mkdir()
    for who, pin, key in (("AB", "1111", "people.wrong_pin"), ("ZZ", "2580", "people.unknown")):
        with pytest.raises(RecordError) as refused:
            restore(None, who, NOW + YEAR, RestoreRequest(path, new, SECRET, pin=pin))
        assert refused.value.message.key == key
        assert list(new.parent.iterdir()) == []
    found = restore(None, "AB", NOW + YEAR, RestoreRequest(path, new, SECRET, pin="2580")).value
    assert found.unchecked is None
    assert path.read_bytes() == before
    assert {p.name.partition(".luffmark")[2] for p in new.parent.iterdir()} <= {"", ".key", "-wal", "-shm"}
    with Store.open(new, passphrase=SECRET) as store:
        assert store.notices == ()
        kept = told(store)
        assert kept["entries"] == said["entries"]
        assert kept["samples"] == said["samples"]
        assert [e["event"] for e in kept["events"]][-1] == "restored from a backup"
        assert store.verify() == ()
