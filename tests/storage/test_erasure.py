"""Removal of an episode: nothing of it is left in the file, and the chain still holds."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest

from core.record.entries import Action, NewEntry
from core.record.message import RecordError
from core.record.samples import DeviceSamples
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
