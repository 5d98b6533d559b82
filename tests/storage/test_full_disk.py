"""A full disk, at each thing a store does: a clear error, nothing half-written, and on it goes with room again.

Where mounting a small disk is not permitted these are left out; `test_hard_times` limits the size of files instead.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator
from pathlib import Path

import numpy as np
import pytest

from core.record.entries import NewEntry
from core.record.instant import DAY, MINUTE
from core.record.samples import DeviceSamples
from storage import archive
from storage.keys import envelope_path
from storage.migrate import upgrade
from storage.salvage import salvage
from storage.store import Store, StoreError
from tests.storage.conftest import CHEAP, NOW, PASSPHRASE
from tests.support.migration_step import scripts_with_a_step
from tests.support.small_disk import fill, small_disk


@pytest.fixture
def disk(tmp_path: Path) -> Iterator[Path]:
    with small_disk(tmp_path / "disk", 12_000) as found:
        if found is None:
            pytest.skip("mounting a small disk is not permitted here")
        yield found


@pytest.fixture(params=[None, PASSPHRASE], ids=["plain", "encrypted"])
def secret(request: pytest.FixtureRequest) -> str | None:
    return request.param


def ward(path: Path, secret: str | None) -> Store:
    store = Store.create(path, passphrase=secret, now=NOW, cost=CHEAP)
    for n in range(60):
        store.append([rr(n)], by="AB", operation="log", now=NOW + n)
    end = NewEntry("E1", "ended_at", NOW, float(NOW))
    store.append([end], by="AB", operation="log", now=NOW + 99)
    return store


def rr(n: int, note: str = "x" * 400) -> NewEntry:
    return NewEntry("E1", "rr", NOW + n, 20.0, None, str(n), "/min", 0, by="AB", note=note)


def failure(work: Callable[[], object]) -> str:
    with pytest.raises(StoreError) as caught:
        work()
    return caught.value.message.key


FULL = ("store.disk_full",)


def names(folder: Path) -> set[str]:
    return {p.name for p in folder.iterdir() if p.name != "ballast"}


def test_entries_are_kept_or_refused_and_go_on_once_there_is_room(disk: Path, secret: str | None) -> None:
    with ward(disk / "ward.luff", secret) as store:
        head = store.head()
        ballast = fill(disk, leave=200_000)
        taken, refused = head, ""
        while not refused:
            try:
                taken = store.append([rr(taken)], by="AB", operation="log", now=NOW + DAY).last_seq
            except StoreError as error:
                refused = error.message.key
        assert refused in FULL
        assert taken > head
        assert store.head() == taken  # reading goes on, and says what was acknowledged
        assert len(store.entries("E1")) == taken
        for work in (  # each larger than the room that one entry may leave: a commit touches some 17 pages
            lambda: store.put_layout("a", "b" * 150_000),
            lambda: store.put_draft("a", "b" * 150_000),
            lambda: store.put_document("handover", "a", b"x" * 200_000, "AB", NOW + DAY),
            lambda: store.append([], by="AB", operation="intake", now=NOW + DAY, samples=[minutes()]),
        ):
            assert failure(work) in FULL
        assert store.head() == taken
        assert store.verify() == ()
        ballast.unlink()
        assert store.append([rr(1)], by="AB", operation="log", now=NOW + DAY).last_seq == taken + 1
    with Store.open(disk / "ward.luff", passphrase=secret) as again:
        assert again.verify() == ()
        assert again.head() == taken + 1


def minutes() -> DeviceSamples:
    t = NOW + MINUTE * np.arange(200_000, dtype=np.int64)
    return DeviceSamples("E1", "leak", "dev", t, np.random.default_rng(1).integers(0, 90, t.size).astype(float))


@pytest.mark.parametrize("room", [0, 30_000, 120_000])
def test_what_makes_another_file_leaves_nothing_of_it(
    disk: Path, tmp_path: Path, secret: str | None, room: int
) -> None:
    """A backup, a restore, an archive, a salvage and a new store onto a full disk: whichever byte it fails at."""
    with ward(tmp_path / "ward.luff", secret) as store:
        head = store.head()
        fill(disk, leave=room)
        for work in (
            lambda: store.backup(disk / "copy.luff"),
            lambda: Store.restore(tmp_path / "ward.luff", disk / "new.luff", passphrase=secret),
            lambda: archive.write(store, ["E1"], disk / "old.luff", by="AB", now=NOW + DAY),
            lambda: salvage(tmp_path / "ward.luff", disk / "saved.luff", secret, by="AB", now=NOW, cost=CHEAP),
            lambda: Store.create(disk / "fresh.luff", passphrase=secret, now=NOW, cost=CHEAP),
        ):
            assert failure(work) in FULL
            assert names(disk) == set()
        assert store.head() == head
        assert store.verify() == ()


def test_a_migration_on_a_full_disk_leaves_the_store_as_it_was(
    disk: Path, tmp_path: Path, secret: str | None, monkeypatch: pytest.MonkeyPatch
) -> None:
    ward(disk / "ward.luff", secret).close()
    before = (disk / "ward.luff").read_bytes()
    ballast = fill(disk, leave=150_000)
    scripts = scripts_with_a_step(tmp_path / "scripts", "op.execute('CREATE TABLE big (x TEXT)')\n"
                                  "    op.execute(\"INSERT INTO big VALUES (hex(zeroblob(900000)))\")")  # fmt: skip
    here, elsewhere = disk / "before.luff", tmp_path / "before.luff"
    for backup_to in (here, elsewhere):  # no room for the backup; room for it and none for the step
        assert failure(lambda to=backup_to: upgrade.bring_up_to_date(disk / "ward.luff", secret, to, scripts)) in FULL
        assert (disk / "ward.luff").read_bytes() == before
    assert not here.exists()
    with Store.open(elsewhere, passphrase=secret) as backup:
        assert backup.verify() == ()
    ballast.unlink()
    with Store.open(disk / "ward.luff", passphrase=secret) as store:
        assert store.verify() == ()


def test_a_new_passphrase_on_a_full_disk_leaves_the_old_one(disk: Path) -> None:
    with ward(disk / "ward.luff", PASSPHRASE) as store:
        before = envelope_path(store.path).read_bytes()
        fill(disk)
        assert failure(lambda: store.change_passphrase(PASSPHRASE, "another ward 8", CHEAP)) == "store.disk_full"
        assert failure(lambda: store.new_recovery_code(PASSPHRASE, CHEAP)) == "store.disk_full"
        assert envelope_path(store.path).read_bytes() == before
        assert store.opens_with(PASSPHRASE)
    assert not (disk / "ward.luff.key.new").exists()
