"""Opening: what is no store, what cannot be written, and who holds the lock are said in words."""

from __future__ import annotations

import os
import shutil
import tempfile
from collections.abc import Callable
from pathlib import Path

import pytest

from core.record.entries import NewEntry
from storage import opening, place
from storage.engine import limit_pages, raw_connection
from storage.store import Store, StoreError
from tests.storage.conftest import NOW, PASSPHRASE


def rr(at: int = NOW, note: str = "") -> NewEntry:
    return NewEntry("E1", "rr", at, 20.0, None, "20", "/min", 0, note=note)


def failure(path: Path, passphrase: str | None = None) -> str:
    try:
        Store.open(path, passphrase=passphrase, busy_seconds=0.2).close()
    except StoreError as error:
        return error.message.key
    return "opened"


def test_what_is_no_store_is_refused(tmp_path: Path) -> None:
    assert failure(tmp_path / "nothing.luff") == "store.missing"
    assert failure(tmp_path) == "store.missing"
    (tmp_path / "empty.luff").touch()
    assert failure(tmp_path / "empty.luff") == "store.not_a_store"
    (tmp_path / "text.luff").write_text("episode,at,channel\n" * 500)
    assert failure(tmp_path / "text.luff") == "store.not_a_store"
    (tmp_path / "random.luff").write_bytes(os.urandom(8192))
    assert failure(tmp_path / "random.luff", PASSPHRASE) == "key.envelope_missing"
    raw_connection(tmp_path / "other.luff", None, mode="rwc").execute("CREATE TABLE a (b)").connection.close()
    assert failure(tmp_path / "other.luff") == "store.not_a_store"


def as_newer(path: Path, readable_from: str) -> None:
    c = raw_connection(path, None)
    c.execute("UPDATE store_facts SET value = '99' WHERE key = 'format'")
    c.execute("UPDATE store_facts SET value = ? WHERE key = 'readable_from'", (readable_from,))
    c.execute("ALTER TABLE entry ADD COLUMN of_the_future TEXT")
    c.close()


def test_a_newer_store_that_says_it_can_be_read_opens_for_reading(store: Store) -> None:
    store.append([rr()], by="AB", operation="log", now=NOW)
    store.close()
    as_newer(store.path, "1")
    with Store.open(store.path) as reader:
        assert reader.read_only
        assert [n.key for n in reader.notices] == ["store.newer_read_only"]
        assert len(reader.entries("E1")) == 1
        with pytest.raises(StoreError, match=r"store.newer"):
            reader.verify()  # rows may hold more than this program knows: it does not judge them
    with Store.open(store.path, read_only=True) as reader:
        assert [n.key for n in reader.notices] == ["store.newer_read_only"]


@pytest.mark.parametrize("readable_from", ["2", "99", "", "soon"])
def test_a_newer_store_is_refused(store: Store, readable_from: str) -> None:
    store.close()
    as_newer(store.path, readable_from)
    with pytest.raises(StoreError) as caught:
        Store.open(store.path)
    assert caught.value.message.key == "store.newer"
    assert caught.value.message.values["format"] == 99


def test_a_place_that_takes_no_writing_opens_for_reading_and_says_so(
    store: Store, monkeypatch: pytest.MonkeyPatch
) -> None:
    store.append([rr()], by="AB", operation="log", now=NOW)
    store.close()
    monkeypatch.setattr(place, "can_write", lambda _path: False)
    with Store.open(store.path) as reader:
        assert reader.read_only
        assert [n.key for n in reader.notices] == ["store.read_only_place"]
        assert len(reader.entries("E1")) == 1
        with pytest.raises(StoreError, match=r"store.read_only"):
            reader.append([rr()], by="AB", operation="log", now=NOW)


@pytest.mark.skipif(not hasattr(os, "seteuid"), reason="rights of folders as POSIX has them")
def test_a_read_only_folder(store: Store) -> None:
    store.append([rr()], by="AB", operation="log", now=NOW)
    store.close()
    with tempfile.TemporaryDirectory() as place:
        path = Path(place) / "ward.luff"
        shutil.copyfile(store.path, path)
        path.chmod(0o444)
        Path(place).chmod(0o555)
        root = os.geteuid() == 0
        if root:  # root may write anywhere, so be somebody else
            os.seteuid(65534)
        try:
            with Store.open(path) as reader:
                assert reader.read_only
                assert [n.key for n in reader.notices] == ["store.read_only_place"]
                assert len(reader.entries("E1")) == 1
                assert reader.verify() == ()
        finally:
            if root:
                os.seteuid(0)
            Path(place).chmod(0o755)


@pytest.mark.parametrize("name", ["ward #1 ?mode=ro&x=50%.luff", "B\u00e4nk \u2013 3.luff", "a'b;c.luff", ".luff"])
def test_a_store_may_have_any_name(tmp_path: Path, name: str) -> None:
    with Store.create(tmp_path / name, now=NOW) as made:
        made.append([rr()], by="AB", operation="log", now=NOW)
        made.backup(tmp_path / f"copy {name}")
    with Store.open(tmp_path / name) as again:
        assert again.head() == 1
    assert {p.name for p in tmp_path.iterdir()} == {name, f"copy {name}"}


def test_another_writer_beyond_the_timeout_is_said_in_words(store: Store) -> None:
    other = raw_connection(store.path, None)
    other.execute("BEGIN IMMEDIATE")
    with Store.open(store.path, busy_seconds=0.2) as mine:
        assert [n.key for n in mine.notices] == ["store.busy_for_now"]
        assert not mine.takes_writing()
        with pytest.raises(StoreError) as caught:
            mine.append([rr()], by="AB", operation="log", now=NOW)
        assert caught.value.message.key == "store.busy"
        assert mine.head() == 0  # reading goes on
        other.execute("ROLLBACK")
        other.close()
        assert mine.takes_writing()
        assert mine.append([rr()], by="AB", operation="log", now=NOW).last_seq == 1


@pytest.mark.parametrize("encrypted", [False, True])
def test_a_full_disk_is_an_error_and_nothing_is_half_written(
    make_store: Callable[..., Store], encrypted: bool
) -> None:
    store = make_store(encrypted=encrypted)
    limit_pages(store._opened.database, 80)
    taken = 0
    refused = ""
    while not refused and taken < 2000:
        try:
            store.append([rr(NOW + taken, "x" * 500)], by="AB", operation="log", now=NOW)
            taken += 1
        except StoreError as error:
            refused = error.message.key
    assert refused == "store.disk_full"
    assert taken > 5
    assert len(store.entries("E1")) == taken
    assert store.verify() == ()
    store.close()
    with Store.open(store.path, passphrase=PASSPHRASE if encrypted else None) as again:
        assert again.append([rr()], by="AB", operation="log", now=NOW).last_seq == taken + 1


def test_a_network_share_is_refused_with_its_kind(store: Store, monkeypatch: pytest.MonkeyPatch) -> None:
    store.close()
    monkeypatch.setattr(place, "_share_kind", lambda _path: "cifs")
    with pytest.raises(StoreError) as caught:
        Store.open(store.path)
    assert caught.value.message.values["kind"] == "cifs"
    with pytest.raises(StoreError, match=r"store.network_share"):
        Store.create(store.path.with_name("b.luff"), now=NOW)


def test_mounts_are_told_apart() -> None:
    mounts = "/dev/sda1 / ext4 rw 0 0\nsrv:/w /mnt/my\\040ward nfs4 rw 0 0\n"
    mounts += "//s/x /mnt/my\\040ward/x cifs rw 0 0\nbad\n"
    assert place.share_kind_in(mounts, "/mnt/my ward/a.luff") == "nfs4"
    assert place.share_kind_in(mounts, "/mnt/my ward/x/a.luff") == "cifs"
    assert place.share_kind_in(mounts, "/mnt/my wards/a.luff") == ""
    assert place.share_kind_in(mounts, "/home/a.luff") == ""


def test_a_failed_creation_leaves_nothing(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    def fail(_connection: object) -> None:
        raise OSError("no")

    monkeypatch.setattr(opening, "create_triggers", fail)
    with pytest.raises(OSError, match="no"):
        Store.create(tmp_path / "a.luff", now=NOW)
    assert list(tmp_path.iterdir()) == []
    with pytest.raises(StoreError, match=r"store.no_folder"):
        Store.create(tmp_path / "none" / "a.luff", now=NOW)
