"""What a store holds beyond a backup is told entry by entry, also where it is damaged or its passphrase changed."""

from __future__ import annotations

from functools import cache
from pathlib import Path
from tempfile import TemporaryDirectory

import numpy as np
import pytest

from core.record.entries import Action, NewEntry
from core.record.instant import MINUTE
from core.record.samples import DeviceSamples
from storage.engine import PAGE_BYTES
from storage.keys import envelope_path
from storage.restore_report import MOST_TOLD
from storage.store import Store
from tests.storage.conftest import CHEAP, NOW, PASSPHRASE

OTHER = "five other boats tomorrow"


def log(store: Store, episode: str, value: float, at: int, **more: object) -> str:
    new = NewEntry(episode, "rr", at, value, None, f"{value:g}", "/min", 0, **more)  # type: ignore[arg-type]
    store.append([new], by="AB", operation="log", now=at)
    return store.entries(episode)[-1].id


@pytest.fixture(params=[None, PASSPHRASE], ids=["plain", "encrypted"])
def secret(request: pytest.FixtureRequest) -> str | None:
    return request.param  # type: ignore[no-any-return]


@pytest.fixture
def old(tmp_path: Path, secret: str | None) -> Path:
    """A store with a backup of its first half; the second half holds all kinds of entries. Filled once in a run, and
    copied."""
    for name, data in _filled(secret).items():
        (tmp_path / name).write_bytes(data)
    return tmp_path / "ward.luff"


@cache
def _filled(secret: str | None) -> dict[str, bytes]:
    """Store and backup with their key files, by the file's name."""
    with TemporaryDirectory() as folder:
        _fill(Path(folder) / "ward.luff", secret)
        return {path.name: path.read_bytes() for path in Path(folder).iterdir()}


def _fill(path: Path, secret: str | None) -> None:
    with Store.create(path, now=NOW, passphrase=secret, cost=CHEAP) as store:
        for i in range(300):
            log(store, "E1", 20 + i % 9, NOW + i * MINUTE)
        store.backup(path.with_name("copy.luff"))
        first = log(store, "E1", 31, NOW + 400 * MINUTE)
        log(store, "E1", 32, NOW + 401 * MINUTE, action=Action.CORRECT, replaces=first, reason="misread")
        log(store, "E2", 18, NOW + 402 * MINUTE)
        flag = NewEntry("E2", "flag", NOW + 403 * MINUTE, None, "raised", raw="because", action=Action.FLAG)
        seen = NewEntry("E2", "flag", NOW + 403 * MINUTE, None, "seen", raw="because", action=Action.FLAG)
        for one in (flag, seen):
            store.append([one], by="AB", operation="flag", now=NOW + 403 * MINUTE)
        t = NOW + np.arange(500, 560, dtype=np.int64) * MINUTE
        store.append([], by="dev", operation="take", now=NOW + 600 * MINUTE,
                     samples=[DeviceSamples("E2", "leak", "dev", t, np.arange(60.0), 0)])  # fmt: skip
        store.record_event("signed in", person="AB", now=NOW + 601 * MINUTE)


def compared(old: Path, secret: str | None):  # type: ignore[no-untyped-def]
    new = old.with_name("restored.luff")
    Store.restore(old.with_name("copy.luff"), new, passphrase=secret)
    with Store.open(new, passphrase=secret) as store:
        return store.compare_with(old)


def test_every_entry_beyond_the_backup_is_told_and_what_the_program_makes_is_not(
    old: Path, secret: str | None
) -> None:
    found = compared(old, secret)
    assert found.same
    assert not found.newer.damaged
    told = {e.episode: e for e in found.newer.episodes}
    assert [(t.raw, t.action, t.by) for t in told["E1"].told] == [("31", "assert", "AB"), ("32", "correct", "AB")]
    assert [t.raw for t in told["E2"].told] == ["18", "because"]  # a word on a flag is a person's, its raising is not
    assert told["E2"].samples == 60
    assert [e.episode for e in found.newer.episodes] == ["E2", "E1"]  # the last recorded first
    assert found.newer.others == 1


def test_a_passphrase_changed_since_and_a_lost_key_file_hide_nothing(old: Path) -> None:
    if not envelope_path(old).exists():
        pytest.skip("a plain store has neither")
    with Store.open(old, passphrase=PASSPHRASE) as store:
        store.change_passphrase(PASSPHRASE, OTHER, CHEAP)
    assert sum(e.entries for e in compared(old, PASSPHRASE).newer.episodes) == 4
    envelope_path(old).unlink()
    old.with_name("restored.luff").unlink()
    envelope_path(old.with_name("restored.luff")).unlink()
    assert sum(e.entries for e in compared(old, PASSPHRASE).newer.episodes) == 4


def test_a_damaged_old_store_is_read_as_far_as_it_can_be(old: Path, secret: str | None) -> None:
    data = bytearray(old.read_bytes())
    pages = len(data) // PAGE_BYTES
    for page in range(1, pages, 7):  # each seventh page is gone; the first is not
        data[page * PAGE_BYTES : (page + 1) * PAGE_BYTES] = bytes(PAGE_BYTES)
    old.write_bytes(data)
    found = compared(old, secret)
    assert found.newer.damaged
    assert 0 < sum(e.entries for e in found.newer.episodes) <= 4
    known = {("E1", "31"), ("E1", "32"), ("E2", "18"), ("E2", "because")}
    assert {(e.episode, t.raw) for e in found.newer.episodes for t in e.told} <= known


def test_another_store_is_not_taken_for_the_old_one(old: Path, secret: str | None, tmp_path: Path) -> None:
    if secret is not None:
        pytest.skip("another store's key opens nothing")
    other = tmp_path / "other.luff"
    with Store.create(other, now=NOW) as store:
        for i in range(400):
            log(store, "E1", 20, NOW + i)
    Store.restore(tmp_path / "copy.luff", tmp_path / "restored.luff")
    with Store.open(tmp_path / "restored.luff") as made:
        assert not made.compare_with(other).same


def test_very_many_entries_are_counted_and_the_newest_told(tmp_path: Path) -> None:
    path = tmp_path / "ward.luff"
    with Store.create(path, now=NOW) as store:
        store.backup(path.with_name("copy.luff"))
        new = [NewEntry("E1", "rr", NOW + i, 20.0, None, str(i), "/min", 0) for i in range(MOST_TOLD + 50)]
        store.append(new, by="AB", operation="log", now=NOW)
    Store.restore(tmp_path / "copy.luff", tmp_path / "restored.luff")
    with Store.open(tmp_path / "restored.luff") as made:
        (episode,) = made.compare_with(path).newer.episodes
    assert episode.entries == MOST_TOLD + 50
    assert [t.raw for t in episode.told] == [str(i) for i in range(50, MOST_TOLD + 50)]


def test_without_the_passphrase_what_can_be_checked_is_and_the_rest_is_told(old: Path, secret: str | None) -> None:
    new, copy = old.with_name("restored.luff"), old.with_name("copy.luff")
    unchecked = Store.restore(copy, new)
    if secret is None:
        assert unchecked is None
        return
    assert unchecked is not None
    assert unchecked.key == "restore.not_checked"
    with Store.open(new, passphrase=PASSPHRASE) as store:
        assert store.verify() == ()


@pytest.mark.parametrize("harm", ["cut off", "key file altered", "key file gone"])
def test_harm_that_needs_no_key_to_be_seen_is_refused(old: Path, secret: str | None, harm: str) -> None:
    if secret is None:
        pytest.skip("a plain backup is verified whole")
    from storage.errors import StoreError

    copy, new = old.with_name("copy.luff"), old.with_name("restored.luff")
    envelope = envelope_path(copy)
    if harm == "cut off":
        copy.write_bytes(copy.read_bytes()[:-100])
    elif harm == "key file altered":
        envelope.write_text(envelope.read_text().replace('"passes"', '"passe"', 1))
    else:
        envelope.unlink()
    with pytest.raises(StoreError, match=r"store.damaged|key.envelope"):
        Store.restore(copy, new)
    assert not new.exists()
    assert not envelope_path(new).exists()
