"""Salvage: of a damaged file what can be read is saved, what was lost is counted, nothing false is trusted."""

from __future__ import annotations

import random
from functools import cache
from pathlib import Path
from tempfile import TemporaryDirectory

import numpy as np
import pytest

from core.record.entries import Action, NewEntry
from core.record.instant import MINUTE
from core.record.samples import DeviceSamples
from storage import people
from storage.engine import raw_connection
from storage.keys import Cost, envelope_path
from storage.salvage import DOUBT, Salvaged, salvage
from storage.store import Store, StoreError
from storage.triggers import expected_triggers
from tests.storage.conftest import CHEAP, NOW, PASSPHRASE

EPISODES, ENTRIES = 8, 24
PAGE = 4096
Told = tuple[str, float | None, str]


def rr(episode: str, i: int, action: Action = Action.ASSERT, replaces: str = "") -> NewEntry:
    return NewEntry(episode, "rr", NOW + i * MINUTE, 20.0 + i % 9, None, "20", "/min", 0, action=action,
                    replaces=replaces, reason="misread" if replaces else "", note="x" * 60)  # fmt: skip


def ward(path: Path, passphrase: str | None) -> dict[str, list[Told]]:
    """A store with entries, corrections, samples, a document and a layout; what it holds of each episode.

    It is filled once in a run, and copied.
    """
    store, envelope, truth = _ward(passphrase)
    path.write_bytes(store)
    if envelope is not None:
        envelope_path(path).write_bytes(envelope)
    return dict(truth)


@cache
def _ward(passphrase: str | None) -> tuple[bytes, bytes | None, dict[str, list[Told]]]:
    with TemporaryDirectory() as folder:
        path = Path(folder) / "a.luff"
        truth = _filled(path, passphrase)
        return path.read_bytes(), envelope_path(path).read_bytes() if passphrase else None, truth


def _filled(path: Path, passphrase: str | None) -> dict[str, list[Told]]:
    t = NOW + np.arange(120, dtype=np.int64) * MINUTE
    with Store.create(path, passphrase=passphrase, now=NOW, cost=CHEAP) as store:
        store.put_policy("text of a policy", "00" * 32, "AB", NOW)
        for n in range(EPISODES):
            key = f"E{n}"
            for i in range(ENTRIES):
                store.append([rr(key, i)], by="AB", operation="log", now=NOW + n * MINUTE)
            first = store.entries(key)[0].id
            store.append([rr(key, 99, Action.CORRECT, first)], by="AB", operation="fix", now=NOW + n * MINUTE)
            samples = DeviceSamples(key, "leak", "dev", t, np.arange(120, dtype=np.float64), 0)
            store.append([], by="dev", operation="take", now=NOW + n * MINUTE, samples=[samples])
        store.put_document("handover", "night", b"%PDF printed" * 2000, "AB", NOW + 99 * MINUTE)
        store.put_layout("panels", "a layout")
        store.put_draft("strip 1", "half typed")
        return {key: told(store, key) for key in store.episode_keys()}


def told(store: Store, key: str) -> list[Told]:
    return [(e.id, e.number, e.doubt) for e in store.entries(key)]


def open_new(found: Salvaged, passphrase: str | None) -> Store:
    return Store.open(found.new, passphrase=passphrase)


@pytest.mark.parametrize("passphrase", [None, PASSPHRASE])
def test_a_sound_store_comes_over_whole(tmp_path: Path, passphrase: str | None) -> None:
    truth = ward(tmp_path / "a.luff", passphrase)
    found = salvage(tmp_path / "a.luff", tmp_path / "b.luff", passphrase, by="AB", now=NOW, cost=CHEAP)
    assert (found.lost_rows, found.lost_batches, found.doubtful, found.unlinked) == (0, 0, 0, 0)
    assert (found.episodes, found.entries) == (EPISODES, EPISODES * (ENTRIES + 1))
    assert found.samples == EPISODES * 120
    with open_new(found, passphrase) as new, Store.open(tmp_path / "a.luff", passphrase=passphrase) as old:
        assert {k: told(new, k) for k in new.episode_keys()} == truth
        assert [e.recorded_at for e in new.entries("E3")] == [e.recorded_at for e in old.entries("E3")]
        for before, after in zip(old.samples("E3"), new.samples("E3"), strict=True):
            assert (before.t == after.t).all()
            assert (before.v == after.v).all()
        assert new.policy() == old.policy()
        assert [d.name for d in new.documents()] == ["night"]
        assert new.layouts() == {"panels": "a layout"}
        assert new.draft("strip 1") == "half typed"
        assert new.verify() == ()
    if passphrase:
        assert found.recovery_code
        assert found.recovery_code not in repr(found)


def destroyed(path: Path, sound: bytes, page: int, chance: random.Random) -> None:
    """Put noise in place of a page, the first being 1."""
    start = (page - 1) * PAGE
    path.write_bytes(sound[:start] + chance.randbytes(PAGE) + sound[start + PAGE :])


def nothing_is_made_up(found: Salvaged, passphrase: str | None, truth: dict[str, list[Told]]) -> None:
    """What is not marked doubtful is what was recorded, and the new store is sound."""
    with open_new(found, passphrase) as new:
        assert new.verify() == ()
        for key in new.episode_keys():
            for entry_id, number, doubt in told(new, key):
                assert doubt or (entry_id, number, doubt) in truth[key]


@pytest.mark.parametrize("passphrase", [None, PASSPHRASE])
def test_of_damaged_pages_the_rest_is_saved_and_nothing_is_made_up(tmp_path: Path, passphrase: str | None) -> None:
    path = tmp_path / "a.luff"
    truth = ward(path, passphrase)
    sound, chance = path.read_bytes(), random.Random(7)
    total = EPISODES * (ENTRIES + 1)
    for n, page in enumerate([1, *chance.sample(range(2, len(sound) // PAGE + 1), 4)]):
        destroyed(path, sound, page, chance)
        found = salvage(path, tmp_path / f"b{n}.luff", passphrase, by="AB", now=NOW, cost=CHEAP)
        nothing_is_made_up(found, passphrase, truth)
        told_of = found.tail_unknown + found.lost_rows + found.lost_batches + found.lost_kept + found.doubtful
        assert found.entries == total or told_of, found
        assert found.entries > 0.9 * total, page  # a page holds a few rows, whichever it is


@pytest.mark.parametrize("passphrase", [None, PASSPHRASE])
def test_the_page_that_names_the_tables_may_be_lost(tmp_path: Path, passphrase: str | None) -> None:
    """The first page, with the salt that proves the others: rows are found by their shape, the chain proves them."""
    path = tmp_path / "a.luff"
    truth = ward(path, passphrase)
    destroyed(path, path.read_bytes(), 1, random.Random(3))
    with pytest.raises(StoreError):
        Store.open(path, passphrase=passphrase)
    found = salvage(path, tmp_path / "b.luff", passphrase, by="AB", now=NOW, cost=CHEAP)
    assert (found.entries, found.episodes) == (EPISODES * (ENTRIES + 1), EPISODES)
    assert (found.lost_rows, found.lost_batches, found.doubtful) == (0, 0, 0)
    assert found.tail_unknown
    with open_new(found, passphrase) as new:
        assert {k: told(new, k) for k in new.episode_keys()} == truth
        assert new.samples("E3")[0].v.tolist() == list(range(120))
        assert new.policy() == ("00" * 32, "text of a policy")
        assert new.document(new.documents()[0].id) == b"%PDF printed" * 2000
        assert (new.layouts(), new.draft("strip 1")) == ({"panels": "a layout"}, "half typed")


@pytest.mark.parametrize("passphrase", [None, PASSPHRASE])
def test_what_only_the_journal_holds_is_saved_too(tmp_path: Path, passphrase: str | None) -> None:
    path, copy = tmp_path / "a.luff", tmp_path / "c.luff"
    truth = ward(path, passphrase)
    with Store.open(path, passphrase=passphrase) as store:
        store.append([rr("E5", 7)], by="AB", operation="log", now=NOW + 120 * MINUTE)
        truth["E5"] = told(store, "E5")
        for end in ("", "-wal", ".key"):  # as a power cut leaves it
            if (source := path.with_name(path.name + end)).exists():
                copy.with_name(copy.name + end).write_bytes(source.read_bytes())
    destroyed(copy, copy.read_bytes(), 1, random.Random(5))
    journal = copy.with_name(copy.name + "-wal")
    assert journal.stat().st_size > PAGE
    found = salvage(copy, tmp_path / "b.luff", passphrase, by="AB", now=NOW, cost=CHEAP)
    with open_new(found, passphrase) as new:
        assert {k: told(new, k) for k in new.episode_keys()} == truth
    journal.write_bytes(journal.read_bytes()[:-100])  # its last frame cut off: the commit is not whole
    found = salvage(copy, tmp_path / "d.luff", passphrase, by="AB", now=NOW, cost=CHEAP)
    with open_new(found, passphrase) as new:
        assert told(new, "E5") == truth["E5"][:-1]


def test_a_changed_value_of_an_encrypted_store_without_its_salt_is_doubtful(tmp_path: Path) -> None:
    """Without the salt no page proves itself, so that only a whole batch counts as what was written."""
    path = tmp_path / "a.luff"
    ward(path, PASSPHRASE)
    data = bytearray(path.read_bytes())
    data[:16] = bytes(16)
    for page in range(20, len(data) // PAGE, 5):
        data[page * PAGE + 2000] ^= 1
    path.write_bytes(data)
    found = salvage(path, tmp_path / "b.luff", PASSPHRASE, by="AB", now=NOW, cost=CHEAP)
    assert found.doubtful + found.lost_rows > 0
    with Store.open(found.new, passphrase=PASSPHRASE) as new:
        assert new.verify() == ()


def test_what_was_removed_does_not_come_back_from_a_damaged_file(tmp_path: Path) -> None:
    path = tmp_path / "a.luff"
    ward(path, None)
    with Store.open(path) as store:
        store.erase_episode("E1", reason="retention time over", by="AB", now=NOW + 200 * MINUTE)
    destroyed(path, path.read_bytes(), 1, random.Random(2))
    found = salvage(path, tmp_path / "b.luff", None, by="AB", now=NOW)
    assert (found.lost_rows, found.doubtful, found.removed > 0) == (0, 0, True)
    with open_new(found, None) as new:
        assert "E1" not in new.episode_keys()


def altered(path: Path, *statements: str) -> None:
    """Change a plain store behind its own back."""
    c = raw_connection(path, None)
    for name in expected_triggers():
        c.execute(f"DROP TRIGGER {name}")
    for statement in statements:
        c.execute(statement)
    c.close()


def test_a_value_changed_in_a_plain_store_is_marked_doubtful(tmp_path: Path) -> None:
    path = tmp_path / "a.luff"
    truth = ward(path, None)
    entry_id = truth["E5"][7][0]
    altered(path, f"UPDATE entry SET number = 11 WHERE id = '{entry_id}'")
    found = salvage(path, tmp_path / "b.luff", None, by="AB", now=NOW)
    assert (found.doubtful, found.lost_rows) == (1, 0)
    with open_new(found, None) as new:
        assert (entry_id, 11.0, DOUBT) in told(new, "E5")
        assert told(new, "E4") == truth["E4"]


def test_what_was_lost_is_counted_and_its_followers_stand_on_their_own(tmp_path: Path) -> None:
    path = tmp_path / "a.luff"
    truth = ward(path, None)
    first = truth["E2"][0][0]
    altered(path, f"DELETE FROM entry WHERE id = '{first}'")
    found = salvage(path, tmp_path / "b.luff", None, by="AB", now=NOW)
    assert (found.lost_rows, found.unlinked) == (1, 1)
    assert found.lost_at == (NOW + 2 * MINUTE, NOW + 2 * MINUTE)
    with open_new(found, None) as new:
        last = new.entries("E2")[-1]
        assert (last.action, last.replaces) == (Action.ASSERT, "")
        assert "what it replaced was lost" in last.reason
        assert new.verify() == ()


def test_no_right_comes_from_a_row_that_nothing_proves(tmp_path: Path) -> None:
    path = tmp_path / "a.luff"
    ward(path, None)
    with Store.open(path) as store:
        people.add(store, "AB", "2580", people.LEAD, by="AB", now=NOW)
        people.add(store, "CD", "7391", people.STAFF, by="AB", now=NOW)
    altered(path, "UPDATE person_event SET detail = replace(detail, 'staff', 'ward lead') WHERE person = 'CD'")
    found = salvage(path, tmp_path / "b.luff", None, by="AB", now=NOW)
    with open_new(found, None) as new:
        assert list(people.of_store(new)) == ["AB"]


def test_an_episode_removed_on_purpose_stays_removed(tmp_path: Path) -> None:
    path = tmp_path / "a.luff"
    ward(path, None)
    with Store.open(path) as store:
        store.erase_episode("E1", reason="retention time over", by="AB", now=NOW + 200 * MINUTE)
    found = salvage(path, tmp_path / "b.luff", None, by="AB", now=NOW)
    assert (found.lost_rows, found.removed > 0, found.doubtful) == (0, True, 0)
    with open_new(found, None) as new:
        assert "E1" not in new.episode_keys()


def test_what_cannot_be_salvaged_is_said_and_leaves_nothing(tmp_path: Path) -> None:
    path = tmp_path / "a.luff"
    ward(path, PASSPHRASE)
    new = tmp_path / "b.luff"

    def key_of(source: Path, passphrase: str | None) -> str:
        with pytest.raises(StoreError) as caught:
            salvage(source, new, passphrase, by="AB", now=NOW, cost=CHEAP)
        assert not new.exists()
        assert not envelope_path(new).exists()
        return caught.value.message.key

    assert key_of(tmp_path / "none.luff", None) == "store.missing"
    assert key_of(path, "not the passphrase") == "key.wrong_passphrase"
    sound = path.read_bytes()
    path.write_bytes(random.Random(1).randbytes(len(sound)))
    assert key_of(path, PASSPHRASE) == "store.damaged"  # nothing of it is ours: only a backup helps
    (tmp_path / "noise.luff").write_bytes(random.Random(1).randbytes(9000))
    assert key_of(tmp_path / "noise.luff", None) == "key.envelope_missing"
    (tmp_path / "other.luff").touch()
    raw_connection(tmp_path / "plain.luff", None, mode="rwc").execute("CREATE TABLE a (b)").connection.close()
    assert key_of(tmp_path / "plain.luff", None) == "store.not_a_store"
    path.write_bytes(sound)
    new.touch()
    with pytest.raises(StoreError, match=r"store.exists"):
        salvage(path, new, PASSPHRASE, by="AB", now=NOW, cost=Cost(64, 1, 1))
