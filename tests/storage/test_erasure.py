"""Removal of an episode: nothing of it is left in the file, and the chain still holds."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest

from core.record.entries import Action, NewEntry
from core.record.message import RecordError
from core.record.samples import DeviceSamples
from storage.draft_batch import SourceFacts
from storage.engine import raw_connection
from storage.store import Store
from storage.triggers import expected_triggers
from tests.storage.conftest import NOW


@pytest.fixture
def ward(make_store: Callable[..., Store]) -> Store:
    """A plain store with an episode to remove among others."""
    store = make_store()
    for i in range(30):
        for key in ("Zanzibar", "E2"):
            new = NewEntry(key, "note", NOW + i, words=f"quinquereme of {key} {i}", raw="x", by="AB")
            store.append([new], by="AB", operation="log", now=NOW + i)
    t = NOW + np.arange(50, dtype=np.int64)
    blocks = [DeviceSamples(key, "leak", "dev", t, np.arange(50.0)) for key in ("Zanzibar", "E2")]
    store.append([], by="AB", operation="log", now=NOW + 40, samples=blocks)
    return store


def test_an_episode_is_removed_and_the_chain_still_holds(ward: Store) -> None:
    printed, others = ward.printed_head(), ward.entries("E2")
    head = ward.head()
    ward.erase_episode("Zanzibar", reason="retention time is over", by="WL", now=NOW + 50)
    assert ward.verify() == ()
    assert ward.proves(printed)
    assert ward.entries("Zanzibar") == ()
    assert ward.samples("Zanzibar") == ()
    assert ward.episode_keys() == ("E2",)
    assert ward.entries("E2") == others
    assert ward.changes_since(head).erased
    ward.close()
    with Store.open(ward.path) as again:
        assert again.verify() == ()


def test_nothing_of_it_is_left_in_the_file(ward: Store, tmp_path: Path) -> None:
    before = b"".join(p.read_bytes() for p in tmp_path.iterdir())
    assert b"Zanzibar" in before
    ward.erase_episode("Zanzibar", reason="retention time is over", by="WL", now=NOW + 50)
    for path in tmp_path.iterdir():
        assert b"Zanzibar" not in path.read_bytes(), path.name


def test_what_another_episode_moved_away_stays_readable(ward: Store) -> None:
    first = ward.entries("Zanzibar")[0]
    moved = NewEntry("E2", "note", NOW, words="belongs here", action=Action.MOVE, replaces=first.id)
    ward.append([moved], by="AB", operation="move", now=NOW + 45)
    before = ward.episode("E2").text("note").v
    ward.erase_episode("Zanzibar", reason="retention time is over", by="WL", now=NOW + 50)
    assert ward.verify() == ()
    assert ward.episode("E2").text("note").v == before
    assert "belongs here" in before


MARK = "quinquereme"


def anywhere(folder: Path, *marks: str) -> list[str]:
    """The files of a folder that hold any of the marks, in any of the forms in which text is kept."""
    forms = [f for m in marks for f in (m.encode(), m.encode("utf-16-le"), m.encode().hex().encode())]
    return sorted(p.name for p in folder.rglob("*") if p.is_file() and any(f in p.read_bytes() for f in forms))


@pytest.fixture
def traced(make_store: Callable[..., Store]) -> Store:
    """A store that names a patient wherever one can be named."""
    store = make_store("ward.luff")
    for key, said in (("Zanzibar", MARK), ("E2", "another")):
        store.append([NewEntry(key, "label", NOW, words=said, note=said)], by="AB", operation="log", now=NOW)
    t = NOW + np.arange(400, dtype=np.int64) * 60_000_000
    for key, name in (("Zanzibar", f"{MARK}.csv"), ("E2", "of the ward.csv")):
        source = SourceFacts("table", name, facts={"columns": name})
        rows = [NewEntry(key, "rr", NOW + 1, 20.0, None, "20", note=name)]
        block = DeviceSamples(key, "leak", source.id, t, np.arange(400.0))
        store.append(rows, by="AB", operation="intake", now=NOW + 2, samples=[block], source=source)
    misplaced = NewEntry("Zanzibar", "note", NOW, words="of the second")
    (first,) = store.append([misplaced], by="AB", operation="log", now=NOW + 3).ids
    moved = NewEntry("E2", "note", NOW, words="of the second", action=Action.MOVE, replaces=first)
    (second,) = store.append([moved], by="AB", operation="move", now=NOW + 4).ids
    fixed = NewEntry("E2", "note", NOW, words="of the second, fixed", action=Action.CORRECT, replaces=second)
    store.append([fixed], by="AB", operation="fix", now=NOW + 5)
    store.put_document("handover", f"night, {MARK}", b"%PDF " + MARK.encode() * 900, "AB", NOW + 6)
    store.put_document("handover", "later", b"%PDF later", "AB", NOW + 900)
    store.put_draft("strip Zanzibar", f"16/6 {MARK}", NOW + 7)
    store.put_draft("strip E2", "16/6", NOW + 900)
    return store


def test_no_trace_of_it_is_left_wherever_it_was_named(traced: Store, tmp_path: Path) -> None:
    before = traced.episode("E2").text("note").v
    assert anywhere(tmp_path, MARK, "Zanzibar")
    traced.erase_episode("Zanzibar", reason="retention time is over", by="WL", now=NOW + 999, documents_until=NOW + 9)
    assert anywhere(tmp_path, MARK, "Zanzibar") == []
    assert traced.verify() == ()
    assert traced.episode("E2").text("note").v == before == ("of the second, fixed",)
    assert [s.name for s in traced.sources()] == ["of the ward.csv"]
    assert [d.name for d in traced.documents()] == ["later"]
    assert traced.drafts() == {"strip E2": "16/6"}
    traced.backup(tmp_path / "copy.luff")
    traced.close()
    with Store.open(traced.path) as again:
        assert again.verify() == ()
        assert again.episode_keys() == ("E2",)
    assert anywhere(tmp_path, MARK, "Zanzibar") == []


def test_a_second_window_that_reads_holds_no_trace_back_for_good(traced: Store, tmp_path: Path) -> None:
    with Store.open(traced.path) as other:
        other.entries("Zanzibar")
        traced.erase_episode("Zanzibar", reason="over", by="WL", now=NOW + 999, documents_until=NOW + 9)
        assert other.entries("Zanzibar") == ()
    traced.close()
    assert anywhere(tmp_path, MARK, "Zanzibar") == []


def test_documents_alone_go_when_their_time_is_over(traced: Store) -> None:
    head = traced.head()
    assert traced.erase_documents(NOW, reason="over", by="WL", now=NOW + 999) == 0
    assert traced.head() == head
    assert traced.erase_documents(NOW + 9, reason="over", by="WL", now=NOW + 999) == 1
    assert [d.name for d in traced.documents()] == ["later"]
    assert traced.verify() == ()


def test_a_file_that_brought_other_patients_too_stays_known(make_store: Callable[..., Store]) -> None:
    store = make_store()
    source = SourceFacts("log_csv", "night.csv")
    rows = [NewEntry(key, "rr", NOW, 20.0, None, "20") for key in ("Zanzibar", "E2")]
    store.append(rows, by="AB", operation="intake", now=NOW, source=source)
    store.erase_episode("Zanzibar", reason="over", by="WL", now=NOW + 1)
    assert [s.name for s in store.sources()] == ["night.csv"]
    assert store.verify() == ()


def test_removal_needs_a_reason_and_an_episode(ward: Store) -> None:
    head = ward.head()
    for key, reason, message in (
        ("Zanzibar", " ", "erasure.no_reason"),
        ("E9", "old", "erasure.unknown_episode"),
    ):
        with pytest.raises(RecordError) as caught:
            ward.erase_episode(key, reason=reason, by="WL", now=NOW)
        assert caught.value.message.key == message
    assert ward.head() == head


def test_a_row_removed_with_a_false_digest_is_found(ward: Store) -> None:
    ward.erase_episode("Zanzibar", reason="old", by="WL", now=NOW + 50)
    ward.close()
    c = raw_connection(ward.path, None)
    c.execute("DROP TRIGGER no_update_erasure")
    c.execute("UPDATE erasure SET removed_digest = ? WHERE removed_seq = 3", ("0" * 64,))
    c.execute(expected_triggers()["no_update_erasure"])
    c.close()
    with Store.open(ward.path) as again:
        assert "verify.chain" in [m.key for m in again.verify()]
