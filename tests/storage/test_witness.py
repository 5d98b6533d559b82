"""A witness file finds what no chain can: that the newest part of a store was cut off."""

from __future__ import annotations

from pathlib import Path

import pytest

from core.record.entries import NewEntry
from core.record.instant import MINUTE
from storage import witness
from storage.engine import raw_connection
from storage.store import Store, StoreError
from storage.triggers import expected_triggers
from tests.storage.conftest import NOW


def log(store: Store, n: int) -> None:
    new = NewEntry("E1", "rr", NOW + n, 20.0, None, "20", "/min", 0)
    store.append([new], by="AB", operation="log", now=NOW + n * MINUTE)


@pytest.fixture
def watched(store: Store, tmp_path: Path) -> Path:
    """A store of six entries whose head was witnessed when it was empty and after each."""
    path = tmp_path / "witness.txt"
    witness.add(path, store, NOW)
    for n in range(6):
        log(store, n)
        witness.add(path, store, NOW + n * MINUTE)
    return path


def test_a_store_bears_out_its_witness(store: Store, watched: Path) -> None:
    assert witness.findings(watched, store) == ()
    log(store, 9)
    assert witness.findings(watched, store) == ()


def test_the_tail_cut_off_is_found_though_the_chain_is_sound(store: Store, watched: Path) -> None:
    store.close()
    c = raw_connection(store.path, None)
    for name in expected_triggers():
        c.execute(f"DROP TRIGGER {name}")
    c.execute("DELETE FROM entry WHERE seq > 4")
    c.execute("DELETE FROM batch WHERE seq > 4")
    c.execute("UPDATE episode_now SET last_seq = 4, last_at = last_at - 2")
    c.execute("DELETE FROM cache")
    for text in expected_triggers().values():
        c.execute(text)
    c.close()
    with Store.open(store.path) as cut:
        assert cut.verify() == ()
        found = witness.findings(watched, cut)
        assert [f.values["line"] for f in found] == [6, 7]
        assert {f.key for f in found} == {"witness.not_borne_out"}


def test_a_backup_lacks_what_was_witnessed_after_it(store: Store, watched: Path, tmp_path: Path) -> None:
    store.backup(tmp_path / "copy.luff")
    log(store, 9)
    witness.add(watched, store, NOW)
    with Store.open(tmp_path / "copy.luff") as copy:
        assert [f.values["line"] for f in witness.findings(watched, copy)] == [8]


def test_what_is_no_witness_is_said(store: Store, watched: Path, tmp_path: Path) -> None:
    text = watched.read_text("ascii")
    watched.write_text(text + "something else\n\n", "ascii")
    assert [f.key for f in witness.findings(watched, store)] == ["witness.bad_line"]
    for content in (b"\xff\xfe", b"", text.replace(store.store_id, "another").encode()):
        watched.write_bytes(content)
        with pytest.raises(StoreError, match=r"witness.unreadable"):
            witness.findings(watched, store)
    with pytest.raises(StoreError, match=r"witness.unreadable"):
        witness.findings(tmp_path / "none.txt", store)
    with pytest.raises(StoreError, match=r"witness.unwritable"):
        witness.add(tmp_path / "none" / "w.txt", store, NOW)
