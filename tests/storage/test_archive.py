"""Archive: ended episodes say the same in a file of their own; they are removed when their time is over."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest

from core.record.entries import Action, NewEntry
from core.record.instant import DAY, MINUTE
from core.record.message import RecordError
from core.record.samples import DeviceSamples
from storage import archive
from storage.keys import envelope_path
from storage.store import Store, StoreError
from tests.storage.conftest import NOW, PASSPHRASE


def rr(episode: str, i: int, **more: object) -> NewEntry:
    return NewEntry(episode, "rr", NOW + i * MINUTE, 20.0 + i, None, f"{20 + i}", "/min", 0, **more)  # type: ignore[arg-type]


def filled(store: Store) -> Store:
    """Three episodes, two ended; corrections, moves both ways, samples, a mask, a policy."""
    store.put_policy("text of a policy", "00" * 32, "AB", NOW)
    for key in ("E1", "E2", "E3"):
        store.append([NewEntry(key, "label", NOW, None, f"label of {key}")], by="AB", operation="log", now=NOW)
        store.append([rr(key, i) for i in range(4)], by="AB", operation="log", now=NOW + MINUTE)
    e1, e2 = store.entries("E1"), store.entries("E2")
    store.append([rr("E1", 9, action=Action.CORRECT, replaces=e1[1].id, reason="misread")],
                 by="CD", operation="fix", now=NOW + 2 * MINUTE)  # fmt: skip
    for target, moved in (("E3", e1[2]), ("E1", e2[2])):
        new = NewEntry(target, "rr", moved.at, moved.number, None, moved.raw, "/min", 0, action=Action.MOVE,
                       replaces=moved.id, reason="wrong patient")  # fmt: skip
        store.append([new], by="CD", operation="move", now=NOW + 3 * MINUTE)
    t = NOW + np.arange(90, dtype=np.int64) * MINUTE
    store.append([], by="dev", operation="take", now=NOW + 4 * MINUTE,
                 samples=[DeviceSamples("E1", "leak", "dev", t, np.arange(90.0) % 7, 0)])  # fmt: skip
    mask = NewEntry("E1", "leak", int(t[10]), float(t[20]), action=Action.MASK, reason="off", source="dev")
    store.append([mask], by="CD", operation="mask", now=NOW + 5 * MINUTE)
    for key in ("E1", "E2"):
        end = NewEntry(key, "ended_at", NOW + 60 * MINUTE, float(NOW + 60 * MINUTE))
        store.append([end], by="AB", operation="log", now=NOW + 61 * MINUTE)
    return store


@pytest.fixture
def ward(store: Store) -> Store:
    return filled(store)


def refused(work: Callable[[], object]) -> str:
    with pytest.raises(RecordError) as caught:
        work()
    return caught.value.message.key


def test_ended_episodes_say_the_same_in_a_file_that_opens_for_reading(
    make_store: Callable[..., Store], tmp_path: Path
) -> None:
    store = filled(make_store(encrypted=True))
    made = archive.write(store, ["E1", "E2"], tmp_path / "old.luffmark", by="AB", now=NOW + DAY)
    assert made.episodes == ("E1", "E2")
    assert envelope_path(made.path).exists()
    for secret in (PASSPHRASE, store.recovery_code):
        with Store.open(made.path, passphrase=secret) as old:
            assert old.read_only
            assert [n.key for n in old.notices] == ["store.archive"]
            assert old.episode_keys() == ("E1", "E2")
            assert old.verify() == ()
    with Store.open(made.path, passphrase=PASSPHRASE) as old:
        for key in ("E1", "E2"):
            one, other = store.episode(key), old.episode(key)
            assert [(x.entry.channel, x.entry.number, x.entry.recorded_at) for x in one.standing] == [
                (x.entry.channel, x.entry.number, x.entry.recorded_at) for x in other.standing
            ]
            for channel in one.series:
                assert (one.series[channel].v == other.series[channel].v).all()
        assert old.policy() == store.policy()
        texts = b"".join(p.read_bytes() for p in tmp_path.glob("old.luffmark*"))
        assert b"label of" not in texts
        assert old.head_known_at(NOW + MINUTE) < old.head()
    assert [e.event for e in store.person_events(("archived",))] == ["archived"]


def test_nothing_of_another_patient_goes_along(ward: Store, tmp_path: Path) -> None:
    archive.write(ward, ["E1"], tmp_path / "old.luffmark", by="AB", now=NOW + DAY)
    text = (tmp_path / "old.luffmark").read_bytes()
    assert b"label of E1" in text
    assert b"label of E2" not in text
    assert b"label of E3" not in text
    with Store.open(tmp_path / "old.luffmark") as old:
        assert old.episode_keys() == ("E1",)
        assert old.verify() == ()


def test_an_open_episode_is_not_archived_and_nothing_is_left_of_a_failure(
    ward: Store, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    path = tmp_path / "old.luffmark"
    assert refused(lambda: archive.write(ward, ["E1", "E3"], path, by="AB", now=NOW)) == "archive.not_ended"
    assert refused(lambda: archive.write(ward, [], path, by="AB", now=NOW)) == "archive.nothing"
    monkeypatch.setattr(archive, "_same", lambda *_: False)
    with pytest.raises(StoreError, match=r"archive.differs"):
        archive.write(ward, ["E1"], path, by="AB", now=NOW)
    assert not list(tmp_path.glob("old.luffmark*"))


def test_an_episode_stays_until_its_time_is_over(ward: Store) -> None:
    ended_at = NOW + 60 * MINUTE
    ward.put_document("handover", "of its time", b"%PDF", "AB", ended_at)
    assert refused(lambda: archive.remove(ward, "E1", by="AB", now=NOW + 999 * DAY)) == "archive.no_retention"
    assert refused(lambda: archive.set_retention(ward, 0, by="AB", now=NOW)) == "archive.bad_retention"
    assert refused(lambda: archive.set_retention(ward, 40_000, by="AB", now=NOW)) == "archive.bad_retention"
    archive.set_retention(ward, 30, by="AB", now=ended_at + DAY)
    assert {e.episode: e.removable_from for e in archive.ended(ward)} == {
        "E1": ended_at + 30 * DAY, "E2": ended_at + 30 * DAY}  # fmt: skip
    assert refused(lambda: archive.remove(ward, "E1", by="AB", now=ended_at + 30 * DAY - 1)) == "archive.too_early"
    assert refused(lambda: archive.remove(ward, "E3", by="AB", now=NOW + 999 * DAY)) == "archive.not_ended"
    for name, at in (("after its end", ended_at + DAY), ("much later", ended_at + 20 * DAY)):
        ward.put_document("handover", name, b"%PDF", "AB", at)
    removed = archive.remove(ward, "E1", by="AB", now=ended_at + 30 * DAY + MINUTE)
    assert removed == archive.Removed("E1", 1, 1, ended_at + 31 * DAY)
    assert [d.name for d in ward.documents()] == ["after its end", "much later"]
    assert archive.remove_documents(ward, by="AB", now=ended_at + 31 * DAY) == 1
    assert [d.name for d in ward.documents()] == ["much later"]
    assert ward.episode_keys() == ("E2", "E3")
    assert ward.verify() == ()
    assert b"label of E1" not in ward.path.read_bytes()
