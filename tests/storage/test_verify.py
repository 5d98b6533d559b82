"""Verify names what was done to a store behind its back; triggers stop what happens by accident."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest
from sqlcipher3 import dbapi2

from core.record.entries import NewEntry
from core.record.samples import DeviceSamples
from storage.engine import raw_connection
from storage.store import Store, StoreError
from tests.storage.conftest import NOW
from tests.support.tampered import tamper


@pytest.fixture
def filled(store: Store) -> Path:
    """A closed plain store with three batches of entries, one of samples, a document and a policy."""
    for i in range(3):
        entry = NewEntry("E1", "rr", NOW + i, 20.0 + i, None, f"{20 + i}", "/min", 0, by="AB")
        store.append([entry], by="AB", operation="log", now=NOW + i)
    t = NOW + np.arange(5, dtype=np.int64)
    leak = DeviceSamples("E1", "leak", "dev", t, np.arange(5.0))
    store.append([], by="AB", operation="log", now=NOW, samples=[leak])
    store.put_document("handover", "a.pdf", b"%PDF", "AB", NOW)
    store.put_policy("a = 1", "h", "AB", NOW)
    store.record_event("printed", person="AB", now=NOW)
    store.close()
    return store.path


def findings(path: Path) -> list[tuple[str, object]]:
    with Store.open(path) as store:
        return [(m.key, m.values.get("what", m.values.get("batch", m.values.get("seq")))) for m in store.verify()]


def test_a_sound_store_has_no_findings(filled: Path) -> None:
    assert findings(filled) == []


@pytest.mark.parametrize(
    ("statement", "expected"),
    [
        ("UPDATE entry SET number = 99 WHERE seq = 2", ("verify.chain", "rows_changed")),
        ("UPDATE entry SET note = 'later' WHERE seq = 1", ("verify.chain", "rows_changed")),
        ("UPDATE entry SET salt = zeroblob(16) WHERE seq = 1", ("verify.chain", "rows_changed")),
        ("DELETE FROM entry WHERE seq = 2", ("verify.chain", "missing_rows")),
        ("UPDATE entry SET batch_seq = 1 WHERE seq = 2", ("verify.chain", "rows_of_another_batch")),
        ("UPDATE batch SET recorded_at = recorded_at - 1 WHERE seq = 2", ("verify.chain", "batch_facts")),
        ("UPDATE batch SET \"by\" = 'XX' WHERE seq = 2", ("verify.chain", "batch_facts")),
        ("UPDATE batch SET hash = lower(hex(randomblob(32))) WHERE seq = 2", ("verify.chain", "batch_facts")),
        ("UPDATE batch SET prev_hash = 'x' WHERE seq = 2", ("verify.chain", "previous_hash")),
        ("DELETE FROM batch WHERE seq = 2", ("verify.chain", "missing_batch")),
        ("UPDATE policy SET text = 'a = 2'", ("verify.chain", "rows_changed")),
        ("UPDATE source SET name = 'other'", ("verify.chain", "rows_changed")),
        ("UPDATE chunk SET channel = 'mv'", ("verify.chain", "rows_changed")),
        ("UPDATE document SET name = 'b.pdf'", ("verify.chain", "rows_changed")),
    ],
)
def test_the_first_broken_link_is_named(filled: Path, statement: str, expected: tuple[str, str]) -> None:
    tamper(filled, statement)
    assert expected in findings(filled)


def test_changed_blobs_are_found(filled: Path) -> None:
    tamper(filled, "UPDATE chunk SET blob = zeroblob(20)", "UPDATE document SET data = x'00'")
    assert {"verify.chunk", "verify.document"} <= {key for key, _ in findings(filled)}


def test_a_row_that_no_batch_owns_is_found(filled: Path) -> None:
    tamper(filled, "INSERT INTO policy (seq, batch_seq, salt, hash, text) VALUES (99, 99, x'00', 'h', 't')")
    keys = [key for key, _ in findings(filled)]
    assert "verify.orphan" in keys
    assert "verify.pages" in keys  # its batch does not exist


def test_an_entry_past_its_limits_is_found(filled: Path) -> None:
    tamper(filled, "UPDATE entry SET number = 9999, channel = 'rr' WHERE seq = 1")
    assert ("verify.entry", "value.past_hard_limit") in findings(filled)


def test_a_derived_table_that_went_stale_is_found(filled: Path) -> None:
    tamper(filled, "UPDATE episode_now SET last_at = 0")
    assert findings(filled) == [("verify.derived", None)]


def test_a_damaged_layout_or_draft_is_left_out_and_named(filled: Path) -> None:
    with Store.open(filled) as store:
        store.put_layout("night", "mine")
        store.put_layout("day", "mine")
        store.put_draft("strip", "ipap 1", NOW)
    tamper(filled, "UPDATE layout SET text = 'other' WHERE name = 'night'", "UPDATE draft SET text = 'ipap 2'")
    with Store.open(filled) as store:
        assert dict(store.layouts()) == {"day": "mine"}
        assert store.draft("strip") is None
        assert [(m.key, m.values["name"]) for m in store.verify()] == [
            ("verify.kept", "night"),
            ("verify.kept", "strip"),
        ]


def test_the_tail_cut_off_is_told_by_a_printed_head(filled: Path) -> None:
    with Store.open(filled) as store:
        printed = store.printed_head()
    tamper(filled, "DELETE FROM person_event", "DELETE FROM batch WHERE seq = 7")
    with Store.open(filled) as store:
        assert [m.key for m in store.verify()] == ["verify.derived"]  # the proofs of rows reach beyond the cut
    tamper(filled, "DELETE FROM cache")
    with Store.open(filled) as store:
        assert store.verify() == ()  # the rest is a sound prefix: only the printed head shows the loss
        assert store.printed_head() != printed
        assert not store.proves(printed)


@pytest.mark.parametrize(
    "statement",
    [
        "UPDATE entry SET number = 1", "DELETE FROM entry", "UPDATE batch SET hash = 'x'", "DELETE FROM batch",
        "INSERT OR REPLACE INTO entry SELECT * FROM entry WHERE seq = 1", "DELETE FROM chunk",
        "UPDATE chunk SET blob = x'00'", "REPLACE INTO policy SELECT * FROM policy", "DELETE FROM document",
        "DELETE FROM source", "DELETE FROM person_event WHERE 1 = 1 OR seq", "UPDATE erasure SET reason = ''",
    ],
)  # fmt: skip
def test_triggers_stop_accidents(filled: Path, statement: str) -> None:
    c = raw_connection(filled, None)
    c.execute("PRAGMA foreign_keys = OFF")  # so that nothing but a trigger can object
    c.execute("INSERT INTO erasure VALUES (90, 1, x'00', 'entry', 91, 1, 'd', 'r')")
    with pytest.raises(dbapi2.Error, match="append-only"):
        c.execute(statement)
    c.close()


@pytest.mark.parametrize(
    ("statement", "what"),
    [
        ("DROP TRIGGER no_update_entry", "missing"),
        ("CREATE TRIGGER sly AFTER INSERT ON entry BEGIN UPDATE layout SET text = 'x'; END", "unknown"),
    ],
)
def test_changed_triggers_open_a_store_for_reading_only(filled: Path, statement: str, what: str) -> None:
    c = raw_connection(filled, None)
    c.execute(statement)
    c.close()
    with Store.open(filled) as store:
        assert store.read_only
        assert [(n.key, n.values["what"]) for n in store.notices] == [("store.trigger", what)]
        assert ("verify.trigger", what) in [(m.key, m.values.get("what")) for m in store.verify()]
        with pytest.raises(StoreError, match=r"store.read_only"):
            store.put_layout("a", "b")


def test_derived_tables_can_be_made_anew(filled: Path, make_store: Callable[..., Store]) -> None:
    from storage import episode_index

    with Store.open(filled) as store:
        database = store._opened.database
        with database.read() as c:
            before = episode_index.kept(c)
        with database.write() as c:
            episode_index.rebuild(c)
        with database.read() as c:
            assert episode_index.kept(c) == before != []


@pytest.mark.parametrize(
    "statement",
    [
        "UPDATE store_facts SET value = 'yes' WHERE key = 'imported'",
        "UPDATE store_facts SET value = 'another' WHERE key = 'store_id'",
        "UPDATE store_facts SET key = 'archivf' WHERE key = 'created_by'",
        "UPDATE store_facts SET key = 'digesu' WHERE key = 'digest'",
        "INSERT INTO store_facts VALUES ('archive', 'yes')",
        "DELETE FROM store_facts WHERE key = 'created_at'",
    ],
)
def test_changed_facts_are_found_and_open_a_store_for_reading_only(filled: Path, statement: str) -> None:
    tamper(filled, statement)
    with Store.open(filled) as store:
        assert store.read_only
        assert "store.facts" in [n.key for n in store.notices]
        assert "verify.facts" in [m.key for m in store.verify()]


def test_facts_stay_sound_through_all_that_changes_them(filled: Path) -> None:
    with Store.open(filled) as store:
        store.put_layout("a", "b")
        store.put_fact("archive_of", "x")
        assert store.verify() == ()
        assert store.fact("archive_of") == "x"
    tamper(filled, "DELETE FROM store_facts WHERE key = 'digest'")  # as a store was before facts had digests
    assert findings(filled) == []


@pytest.mark.parametrize("error", [TypeError("no text"), KeyError("x"), IndexError("tuple index out of range")])
def test_what_a_row_can_only_be_by_damage_is_refused_in_words(store: Store, error: Exception) -> None:
    """A damaged page may give a row of other kinds than were written, or one without its columns."""
    with pytest.raises(StoreError, match=r"store\.damaged"), store._opened.database.read():
        raise error


def test_a_proof_of_rows_that_cannot_be_read_is_a_finding_and_no_crash(filled: Path) -> None:
    tamper(filled, "UPDATE cache SET data = x'' WHERE key LIKE 'episode/%'")
    with Store.open(filled) as store:
        assert {m.key for m in store.verify()} <= {"verify.derived", "verify.unreadable"}
        assert store.verify()
