"""The door: what goes in comes out, as known at any sequence, in a plain and an encrypted store."""

import threading
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from core.record.entries import Action, NewEntry
from core.record.instant import HOUR, MINUTE
from core.record.message import RecordError
from core.record.samples import DeviceSamples
from storage.store import Store, StoreError
from tests.storage.conftest import NOW, PASSPHRASE


def rr(value: float, at: int = NOW, episode: str = "E1", **more: object) -> NewEntry:
    return replace(NewEntry(episode, "rr", at, value, None, f"{value:g}", "/min", 0, by="AB"), **more)  # type: ignore[arg-type]


def log(store: Store, *entries: NewEntry, now: int = NOW, samples: tuple[DeviceSamples, ...] = ()):  # type: ignore[no-untyped-def]
    return store.append(entries, by="AB", operation="log", now=now, samples=samples)


def leak(values: list[float], start: int = NOW, step: int = MINUTE, source: str = "dev") -> DeviceSamples:
    t = start + step * np.arange(len(values), dtype=np.int64)
    return DeviceSamples("E1", "leak", source, t, np.array(values, np.float64), 0)


def numbers(store: Store, channel: str = "rr", head: int | None = None, episode: str = "E1") -> list[float]:
    return store.episode(episode, head).number(channel).v.tolist()


def test_an_entry_comes_back_as_it_was_given(either_store: Store) -> None:
    given = NewEntry("E1", "ph", NOW, 7.4, None, "7,40", "pH", 2, "Europe/Oslo", "AB", "second stab", "doubt.unusual")
    receipt = log(either_store, given)
    (entry,) = either_store.entries("E1")
    assert (entry.seq, entry.id, entry.recorded_at) == (1, receipt.ids[0], NOW)
    assert all(getattr(entry, f) == getattr(given, f) for f in NewEntry.__dataclass_fields__)
    assert either_store.head() == receipt.last_seq == 1
    assert either_store.head_hash() == receipt.head_hash
    assert either_store.printed_head() == f"1 {receipt.head_hash[:16]}"
    assert either_store.verify() == ()


def test_it_is_there_after_closing_and_opening(either_store: Store) -> None:
    log(either_store, rr(20), rr(22, NOW + MINUTE))
    either_store.close()
    with Store.open(either_store.path, passphrase=PASSPHRASE if either_store.is_encrypted else None) as again:
        assert numbers(again) == [20, 22]
        assert again.is_encrypted is either_store.is_encrypted


def test_a_correction_changes_nothing_about_what_was_known_before_it(store: Store) -> None:
    first = log(store, rr(20))
    log(store, rr(26, action=Action.CORRECT, replaces=first.ids[0], reason="misread"), now=NOW + HOUR)
    assert numbers(store) == [26]
    assert numbers(store, head=store.head_known_at(NOW + HOUR - 1)) == [20]
    assert numbers(store, head=store.head_known_at(NOW - 1)) == []


def test_a_withdrawal_takes_a_value_away(store: Store) -> None:
    first = log(store, rr(20))
    log(store, rr(20, action=Action.WITHDRAW, replaces=first.ids[0], number=None))
    assert numbers(store) == []


def test_an_entry_moves_to_the_right_episode_and_on(store: Store) -> None:
    a = log(store, rr(20))
    b = log(store, rr(20, episode="E2", action=Action.MOVE, replaces=a.ids[0]))
    c = log(store, rr(21, episode="E2", action=Action.CORRECT, replaces=b.ids[0]))
    assert (numbers(store), numbers(store, episode="E2")) == ([], [21])
    log(store, rr(21, episode="E3", action=Action.MOVE, replaces=c.ids[0]))
    assert [numbers(store, episode=e) for e in ("E1", "E2", "E3")] == [[], [], [21]]
    assert [numbers(store, episode=e, head=2) for e in ("E1", "E2", "E3")] == [[], [20], []]


def test_a_correction_beside_a_move_is_seen_from_both_episodes(store: Store) -> None:
    a = log(store, rr(20))
    log(store, rr(20, episode="E2", action=Action.MOVE, replaces=a.ids[0]))
    log(store, rr(25, action=Action.CORRECT, replaces=a.ids[0]))
    assert (numbers(store), numbers(store, episode="E2")) == ([25], [])


def test_samples_are_kept_exactly(either_store: Store) -> None:
    block = leak([10, 12, float("nan"), 14])
    log(either_store, samples=(block,))
    (back,) = either_store.samples("E1")
    assert np.array_equal(back.t, block.t)
    assert np.array_equal(back.v, block.v, equal_nan=True)
    assert (back.source, back.decimals) == ("dev", 0)
    assert either_store.head() == 2  # the source of the stream takes a number, then its block


def test_a_later_block_wins_where_it_overlaps(store: Store) -> None:
    log(store, samples=(leak([1, 1, 1, 1, 1]),))
    head = store.head()
    log(store, samples=(leak([9, 9], NOW + MINUTE),))
    assert numbers(store, "leak") == [1, 9, 9, 1, 1]
    assert numbers(store, "leak", head) == [1, 1, 1, 1, 1]


def test_a_mask_acts_on_what_was_recorded_before_it_until_withdrawn(store: Store) -> None:
    log(store, samples=(leak([1, 2, 3, 4]),))
    mask = NewEntry("E1", "leak", NOW + MINUTE, float(NOW + 2 * MINUTE), action=Action.MASK, source="dev")
    receipt = log(store, mask)
    assert numbers(store, "leak") == [1, 4]
    log(store, samples=(leak([7], NOW + MINUTE),))
    assert numbers(store, "leak") == [1, 7, 4]
    log(store, replace(mask, action=Action.WITHDRAW, replaces=receipt.ids[0], number=None))
    assert numbers(store, "leak") == [1, 7, 3, 4]


def test_a_mask_of_another_source_leaves_samples_alone(store: Store) -> None:
    log(store, samples=(leak([1, 2]),))
    log(store, NewEntry("E1", "leak", NOW, float(NOW + HOUR), action=Action.MASK, source="other"))
    assert numbers(store, "leak") == [1, 2]


def test_a_shift_moves_samples_in_time(store: Store) -> None:
    log(store, samples=(leak([1, 2, 3]),))
    log(store, NewEntry("E1", "leak", NOW + MINUTE, float(HOUR), action=Action.SHIFT, source="dev"))
    (back,) = store.samples("E1")
    assert (back.t - NOW).tolist() == [0, HOUR + MINUTE, HOUR + 2 * MINUTE]


def test_the_recording_time_never_steps_back(store: Store) -> None:
    log(store, rr(20), now=NOW)
    receipt = log(store, rr(21), now=NOW - HOUR)
    assert (receipt.recorded_at, receipt.skew) == (NOW, HOUR)
    assert store.head_known_at(NOW) == 2
    assert store.verify() == ()


@pytest.mark.parametrize(
    ("entry", "key"),
    [
        (rr(20, channel="pulse_ox"), "channel.unknown"),
        (rr(500), "value.past_hard_limit"),
        (rr(20, number=None), "entry.no_number"),
        (rr(float("nan")), "entry.not_finite"),
        (rr(20, episode=" "), "entry.no_episode"),
        (rr(20, note="a\x00b"), "entry.text_unreadable"),
        (rr(20, note="\ud800"), "entry.text_unreadable"),
        (rr(20, note="x" * 8_001), "entry.text_too_long"),
        (rr(20, at=2**62), "entry.time_out_of_range"),
        (rr(20, action=Action.CORRECT, replaces="nobody"), "entry.replaces_unknown"),
        (rr(20, action=Action.MASK, number=float(NOW - 1), channel="leak"), "entry.span_backwards"),
        (rr(20, action=Action.MASK, number=float(NOW + 1), channel="ph"), "entry.not_a_device_channel"),
        (NewEntry("E1", "mode", NOW, words="warp"), "value.not_a_choice"),
    ],
)
def test_a_batch_with_one_bad_entry_is_refused_whole(store: Store, entry: NewEntry, key: str) -> None:
    with pytest.raises(RecordError) as caught:
        log(store, rr(20), entry)
    assert caught.value.message.key == key
    assert store.head() == 0
    assert store.entries("E1") == ()


def test_a_correction_stays_with_its_channel_and_episode(store: Store) -> None:
    first = log(store, rr(20)).ids[0]
    for wrong, key in (
        ({"episode": "E2"}, "entry.replaces_other_episode"),
        ({"channel": "hr"}, "entry.replaces_other_channel"),
    ):
        with pytest.raises(RecordError) as caught:
            log(store, rr(30, action=Action.CORRECT, replaces=first, **wrong))
        assert caught.value.message.key == key


def test_samples_out_of_order_are_refused(store: Store) -> None:
    with pytest.raises(RecordError, match=r"samples.not_increasing"):
        log(store, samples=(leak([1, 2], step=0),))


def test_an_empty_batch_is_refused(store: Store) -> None:
    with pytest.raises(RecordError, match=r"batch.empty"):
        log(store)


def test_changes_since_a_sequence_name_episodes_and_channels(store: Store) -> None:
    first = log(store, rr(20))
    log(store, rr(20, episode="E2", action=Action.MOVE, replaces=first.ids[0]), samples=(leak([1]),))
    changes = store.changes_since(1)
    assert (changes.head, changes.episodes) == (4, {"E1", "E2"})
    assert dict(changes.channels) == {"E1": {"rr", "leak"}, "E2": {"rr"}}
    assert store.changes_since(4).episodes == frozenset()


def test_another_window_sees_what_this_one_logs(either_store: Store) -> None:
    secret = PASSPHRASE if either_store.is_encrypted else None
    with Store.open(either_store.path, passphrase=secret) as other:
        log(either_store, rr(20))
        assert other.changes_since(0).episodes == {"E1"}
        log(other, rr(21, NOW + MINUTE))
        assert numbers(either_store) == [20, 21]


def test_episodes_are_listed_as_known_and_as_open(store: Store) -> None:
    log(store, rr(20))
    log(store, rr(20, episode="E2"))
    end = log(store, NewEntry("E1", "ended_at", NOW + HOUR, float(NOW + HOUR)))
    assert store.episode_keys() == ("E1", "E2")
    assert store.episode_keys(head=1) == ("E1",)
    assert store.open_episode_keys() == ("E2",)
    log(store, NewEntry("E1", "ended_at", NOW + HOUR, action=Action.WITHDRAW, replaces=end.ids[0]))
    assert store.open_episode_keys() == ("E1", "E2")
    assert store.verify() == ()


def test_layouts_and_drafts_are_kept_and_forgotten(either_store: Store) -> None:
    store = either_store
    before = store.changes_since(0).layout_revision
    store.put_layout("night", '{"panels": []}')
    store.put_layout("day", "{}")
    assert store.layout("night") == '{"panels": []}'
    assert list(store.layouts()) == ["day", "night"]
    assert store.changes_since(0).layout_revision == before + 2
    store.put_layout("night", None)
    assert store.layout("night") is None
    store.put_draft("log strip", "ipap 1", NOW)
    assert store.draft("log strip") == "ipap 1"
    store.put_draft("log strip", None)
    assert store.drafts() == {}
    assert store.head() == 0


def test_policies_and_documents_are_in_the_chain(store: Store) -> None:
    assert store.policy() is None
    store.put_policy("a = 1", "h1", "AB", NOW)
    store.put_policy("a = 2", "h2", "AB", NOW)
    assert store.policy() == ("h2", "a = 2")
    assert store.policy(head=1) == ("h1", "a = 1")
    key = store.put_document("handover", "night.pdf", b"%PDF-1.7", "AB", NOW)
    (facts,) = store.documents()
    assert (facts.id, facts.kind, facts.name, facts.size, facts.by) == (key, "handover", "night.pdf", 8, "AB")
    assert store.document(key) == b"%PDF-1.7"
    store.record_event("printed", person="AB", now=NOW)
    assert store.head() == 4
    assert store.verify() == ()
    changes = store.changes_since(0)
    assert changes.policy_changed
    assert changes.documents_changed
    with pytest.raises(StoreError, match=r"document.unknown"):
        store.document("nothing")


def test_a_store_is_never_created_over_a_file(tmp_path: Path) -> None:
    path = tmp_path / "a.luff"
    path.write_bytes(b"mine")
    with pytest.raises(StoreError, match=r"store.exists"):
        Store.create(path, now=NOW)
    assert path.read_bytes() == b"mine"


def test_threads_take_turns_and_nothing_is_lost(store: Store) -> None:
    def work(name: str) -> None:
        for i in range(25):
            log(store, rr(20, NOW + i, episode=name))

    threads = [threading.Thread(target=work, args=(f"T{i}",)) for i in range(4)]
    for t in threads:
        t.start()
    for t in threads:
        t.join()
    assert store.head() == 100
    assert all(len(store.entries(f"T{i}")) == 25 for i in range(4))
    assert store.verify() == ()


def test_a_store_opened_for_reading_takes_nothing(store: Store) -> None:
    log(store, rr(20))
    with Store.open(store.path, read_only=True) as reader:
        assert reader.read_only
        assert numbers(reader) == [20]
        with pytest.raises(StoreError, match=r"store.read_only"):
            log(reader, rr(21))


def test_an_end_that_a_later_replacement_voids_elsewhere_opens_that_episode_again(store: Store) -> None:
    def end(episode: str, minute: int, action: Action = Action.ASSERT, replaces: str = "") -> str:
        at = NOW + minute * MINUTE
        new = NewEntry(episode, "ended_at", at, float(at), action=action, replaces=replaces, reason="r")
        return store.append([new], by="AB", operation="log", now=NOW).ids[0]

    first = end("E1", 1)
    end("E2", 1, Action.MOVE, first)
    assert store.open_episode_keys() == ("E1",)
    end("E1", 2, Action.CORRECT, first)  # of two replacements the later wins: E2 has no end any more
    assert store.open_episode_keys() == ("E2",)
    assert store.verify() == ()
