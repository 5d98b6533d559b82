"""The store against the ledger in memory: the same at every moment it could be asked about.

And as known at a moment it equals a store that never saw what came later.
"""

from __future__ import annotations

import tempfile

import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st

from core.record.entries import Action
from core.record.instant import HOUR, Instant
from core.record.knowledge import standing
from core.record.samples import DeviceSamples
from storage.store import Store
from tests.storage.conftest import NOW
from tests.support.ledger_histories import EPISODES, fill, histories, new_store
from tests.support.ledger_model import LedgerModel, Value


def stored_values(store: Store, episode: str, head: int) -> list[Value]:
    found = standing(store.entries(episode, head))
    return [
        (s.entry.at, s.entry.channel, s.entry.number, s.entry.words, s.corrected, s.disputed)
        for s in found
        if s.entry.episode == episode and s.entry.action not in (Action.MASK, Action.SHIFT)
    ]


def stored_samples(store: Store, episode: str, head: int) -> list[tuple[Instant, float]]:
    blocks = store.samples(episode, head)
    return [(int(t), float(v)) for b in blocks for t, v in zip(b.t, b.v, strict=True)]


def folder() -> tempfile.TemporaryDirectory[str]:
    return tempfile.TemporaryDirectory(ignore_cleanup_errors=True)


@settings(max_examples=60, deadline=None)
@given(histories())
def test_the_store_equals_the_model_as_known_at_every_moment(model: LedgerModel) -> None:
    with folder() as place, new_store(place, "a") as store:
        fill(store, model.batches)
        moments = {b.recorded_at for b in model.batches}
        for moment in sorted({m + d for m in moments for d in (-1, 0)}):
            head, known = store.head_known_at(moment), model.known_at(moment)
            for episode in EPISODES:
                assert stored_values(store, episode, head) == known.values(episode)
                assert stored_samples(store, episode, head) == known.samples(episode, "leak")
        assert store.verify() == ()


@settings(max_examples=25, deadline=None)
@given(histories(), st.data())
def test_as_known_at_equals_a_store_that_never_saw_what_came_later(model: LedgerModel, data: st.DataObject) -> None:
    moment = data.draw(st.sampled_from([b.recorded_at for b in model.batches]))
    with (
        folder() as place,
        new_store(place, "a") as whole,
        new_store(place, "b") as cut,
    ):
        fill(whole, model.batches)
        fill(cut, model.known_at(moment).batches)
        head = whole.head_known_at(moment)
        assert head == cut.head()
        assert whole.episode_keys(head) == cut.episode_keys()
        for key in EPISODES:
            mine, other = whole.episode(key, head), cut.episode(key)
            assert mine.words.keys() == other.words.keys()
            assert mine.series.keys() == other.series.keys()
            for channel in mine.series:
                for part in ("t", "v", "spot", "doubt"):
                    assert np.array_equal(getattr(mine.number(channel), part), getattr(other.number(channel), part))


@settings(max_examples=25, deadline=None)
@given(histories())
def test_changes_since_name_every_episode_whose_answer_differs(model: LedgerModel) -> None:
    with folder() as place, new_store(place, "a") as store:
        fill(store, model.batches)
        heads = [0, *(store.head_known_at(b.recorded_at) for b in model.batches)]
        for seq in heads:
            changed = store.changes_since(seq).episodes
            for episode in EPISODES:
                before = stored_values(store, episode, seq), stored_samples(store, episode, seq)
                now = stored_values(store, episode, 2**62), stored_samples(store, episode, 2**62)
                assert before == now or episode in changed


def test_a_pause_hides_nothing() -> None:
    """A later file that covers two hours with a gap between does not wipe what an earlier one has in the gap."""
    with folder() as place, new_store(place, "a") as store:
        t = NOW + np.arange(5, dtype=np.int64) * HOUR
        store.append(
            [],
            by="A",
            operation="log",
            now=NOW,
            samples=[DeviceSamples("E1", "leak", "a", t, np.arange(5.0))],
        )
        ends = t[[0, 4]]
        store.append(
            [],
            by="A",
            operation="log",
            now=NOW,
            samples=[DeviceSamples("E1", "leak", "b", ends, np.array([9.0, 9.0]))],
        )
        assert store.samples("E1")[0].v.tolist() == [9, 1, 2, 3, 9]
