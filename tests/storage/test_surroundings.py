"""What happens around a store: its file taken away, a clock stepping back, another window that always writes."""

from __future__ import annotations

import shutil
import sys
import threading
from collections.abc import Callable
from pathlib import Path
from time import monotonic

import pytest

from core.record.entries import NewEntry
from core.record.instant import DAY, HOUR, MINUTE
from storage import archive, people
from storage.store import Store, StoreError
from tests.storage.conftest import NOW, PASSPHRASE

posix = pytest.mark.skipif(sys.platform == "win32", reason="an open file cannot be removed on Windows")


def rr(n: int, episode: str = "E1") -> NewEntry:
    return NewEntry(episode, "rr", NOW + n, 20.0, None, str(n), "/min", 0, by="AB")


def failure(work: Callable[[], object]) -> str:
    with pytest.raises(StoreError) as caught:
        work()
    return caught.value.message.key


@posix
@pytest.mark.parametrize("how", ["removed", "removed with its journal", "moved", "replaced", "its folder removed"])
def test_a_file_taken_away_is_said_and_nothing_is_acknowledged_into_nowhere(
    make_store: Callable[..., Store], tmp_path: Path, how: str
) -> None:
    folder = tmp_path / "here"
    folder.mkdir()
    store = make_store("here/ward.luff")
    store.append([rr(1)], by="AB", operation="log", now=NOW)
    if how == "its folder removed":
        shutil.rmtree(folder)
    elif how == "moved":
        store.path.rename(tmp_path / "elsewhere.luff")
    elif how == "replaced":
        make_store("other.luff").close()
        shutil.copy(tmp_path / "other.luff", tmp_path / "copy.luff")
        (tmp_path / "copy.luff").replace(store.path)
    else:
        for end in ("", "-wal", "-shm") if "journal" in how else ("",):
            store.path.with_name(store.path.name + end).unlink()
    told = "store.file_gone"
    for work in (
        lambda: store.append([rr(2)], by="AB", operation="log", now=NOW),
        lambda: store.put_draft("strip", "16/6"),
        lambda: store.put_layout("night", "[]"),
        lambda: store.record_event("signed in", person="AB", now=NOW),
        lambda: store.erase_episode("E1", reason="x", by="AB", now=NOW),
    ):
        assert failure(work) == told
    if how != "replaced":
        assert failure(lambda: Store.open(store.path)) == "store.missing"


def test_a_clock_that_steps_back_an_hour_loses_nothing_and_orders_nothing_anew(
    make_store: Callable[..., Store],
) -> None:
    store = make_store(encrypted=True)
    people.add(store, "AB", "2580", people.LEAD, by="AB", now=NOW)
    first = store.append([rr(1)], by="AB", operation="log", now=NOW + 2 * HOUR)
    known_then = NOW + 2 * HOUR
    later = [store.append([rr(n)], by="AB", operation="log", now=NOW + HOUR + n * MINUTE) for n in range(2, 6)]
    assert {r.recorded_at for r in later} == {first.recorded_at}  # held, never before what stands
    assert [r.skew for r in later] == [HOUR - n * MINUTE for n in range(2, 6)]
    assert [e.raw for e in store.entries("E1")] == ["1", "2", "3", "4", "5"]
    assert store.head_known_at(known_then) == store.head()
    assert store.head_known_at(known_then - 1) == 1
    assert people.sign_in(store, "AB", "2580", NOW + HOUR).initials == "AB"
    archive.set_retention(store, 30, by="AB", now=NOW + HOUR)
    assert store.append([rr(9)], by="AB", operation="log", now=NOW + 3 * HOUR).skew == 0
    assert store.verify() == ()
    path = store.path
    store.backup(path.with_name("copy.luff"))
    store.close()
    with Store.open(path.with_name("copy.luff"), passphrase=PASSPHRASE) as copy:
        assert copy.verify() == ()
        assert copy.append([rr(10)], by="AB", operation="log", now=NOW - DAY).skew == 3 * HOUR + DAY


def test_two_windows_that_write_all_the_time_see_each_other_and_are_never_refused(
    make_store: Callable[..., Store],
) -> None:
    """With the waiting time that a window has: nobody is told that the store is locked, reading never waits."""
    store = make_store()
    with Store.open(store.path) as other:
        seen: dict[str, list[float]] = {"E0": [], "E1": []}
        refused: list[str] = []

        def work(mine: Store, foreign: Store, episode: str) -> None:
            try:
                for n in range(60):
                    seq = mine.append([rr(n, episode)], by="AB", operation="log", now=NOW).last_seq
                    begun = monotonic()
                    assert episode in foreign.changes_since(seq - 1).episodes
                    seen[episode].append(monotonic() - begun)
            except (StoreError, AssertionError) as error:
                refused.append(str(error))

        threads = [threading.Thread(target=work, args=pair) for pair in ((store, other, "E0"), (other, store, "E1"))]
        for thread in threads:
            thread.start()
        for thread in threads:
            thread.join()
        assert refused == []
        assert {k: len(v) for k, v in seen.items()} == {"E0": 60, "E1": 60}
        assert store.verify() == ()
        assert store.entries("E1") == other.entries("E1")


def test_a_long_read_keeps_no_writer_waiting_and_a_long_write_no_reader(make_store: Callable[..., Store]) -> None:
    store = make_store()
    store.append([rr(1)], by="AB", operation="log", now=NOW)
    with Store.open(store.path, busy_seconds=0.2) as other:
        with store._opened.database.read() as connection:
            connection.exec_driver_sql("SELECT count(*) FROM entry").scalar()
            assert other.append([rr(2)], by="AB", operation="log", now=NOW).last_seq == 2
            assert connection.exec_driver_sql("SELECT count(*) FROM entry").scalar() == 1  # one consistent state
        with store._opened.database.write() as connection:
            connection.exec_driver_sql("DELETE FROM cache")
            assert other.head() == 2
            assert failure(lambda: other.append([rr(3)], by="AB", operation="log", now=NOW)) == "store.busy"
        assert other.append([rr(3)], by="AB", operation="log", now=NOW).last_seq == 3
