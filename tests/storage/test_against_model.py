"""The store against the ledger in memory: the same at every moment it could be asked about.

And as known at a moment it equals a store that never saw what came later.
"""

from __future__ import annotations

import tempfile
from pathlib import Path

import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st

from core.record.entries import Action, NewEntry
from core.record.instant import HOUR, MINUTE, Instant
from core.record.knowledge import standing
from core.record.samples import DeviceSamples
from storage.store import Store
from tests.storage.conftest import NOW
from tests.support.ledger_model import Batch, LedgerModel, SampleBlock, Value, renamed

EPISODES = ("E1", "E2", "E3")
CHANNELS = ("rr", "ended_at", "note")


@st.composite
def histories(draw: st.DrawFn) -> LedgerModel:
    """Entries and samples in any order: late ones, corrections of corrections, moves and moves back, masks."""
    model = LedgerModel()
    known: dict[str, NewEntry] = {}
    for n in range(draw(st.integers(1, 9))):
        now = NOW + draw(st.integers(-3, 20)) * MINUTE * (n + 1)
        entries: list[tuple[str, NewEntry]] = []
        blocks = [draw(sample_blocks(n))] if draw(st.integers(0, 3)) == 0 else []
        for i in range(draw(st.integers(0 if blocks else 1, 3))):
            made = draw(new_entry(known))
            entries.append((f"{n}.{i}", made))
        known.update(dict(entries))
        model.append(now, entries, blocks)
    return model


@st.composite
def new_entry(draw: st.DrawFn, known: dict[str, NewEntry]) -> NewEntry:
    """A first entry, or one that acts on an earlier one."""
    at = NOW - draw(st.integers(0, 600)) * MINUTE
    kind = draw(st.sampled_from(["assert", "assert", "replace", "replace", "mask", "shift"]))
    spans = (Action.MASK, Action.SHIFT)
    values = sorted(k for k, e in known.items() if e.channel != "leak" or e.action in spans)
    if kind == "replace" and values:
        target = draw(st.sampled_from(values))
        old = known[target]
        span = old.action in spans
        action = (
            Action.WITHDRAW if span else draw(st.sampled_from([Action.CORRECT, Action.WITHDRAW, Action.MOVE]))
        )
        episode = draw(st.sampled_from(EPISODES)) if action is Action.MOVE else old.episode
        number = None if action is Action.WITHDRAW else _number(old.channel, draw(st.integers(5, 60)))
        words = "said" if old.channel == "note" and action is not Action.WITHDRAW else None
        return NewEntry(episode, old.channel, at, number, words, action=action, replaces=target)
    episode = draw(st.sampled_from(EPISODES))
    if kind == "mask":
        end = float(at + draw(st.integers(0, 300)) * MINUTE)
        source = draw(st.sampled_from(["", "a", "b"]))
        return NewEntry(episode, "leak", at, end, action=Action.MASK, source=source)
    if kind == "shift":
        by = float(draw(st.integers(-90, 90)) * MINUTE)
        return NewEntry(
            episode, "leak", at, by, action=Action.SHIFT, source=draw(st.sampled_from(["", "a", "b"]))
        )
    channel = draw(st.sampled_from(CHANNELS))
    words = draw(st.sampled_from(["seen", "told"])) if channel == "note" else None
    return NewEntry(episode, channel, at, _number(channel, draw(st.integers(5, 60))), words)


def _number(channel: str, value: int) -> float | None:
    return {"rr": float(value), "ended_at": float(NOW + value * MINUTE)}.get(channel)


@st.composite
def sample_blocks(draw: st.DrawFn, n: int) -> SampleBlock:
    start = NOW - draw(st.integers(0, 600)) * MINUTE
    times = sorted(draw(st.sets(st.integers(0, 150), min_size=1, max_size=12)))
    return SampleBlock(
        draw(st.sampled_from(EPISODES)), "leak", draw(st.sampled_from(["a", "b"])),
        {start + m * MINUTE: float(n * 20 + m % 7) for m in times},
    )  # fmt: skip


def fill(store: Store, batches: list[Batch], clock: list[Instant] | None = None) -> None:
    """Give a store the model's batches; ids are mapped as the store gives them."""
    ids: dict[str, str] = {}
    for batch in batches:
        samples = [
            DeviceSamples(b.episode, b.channel, b.source, np.array(sorted(b.samples), np.int64),
                          np.array([b.samples[t] for t in sorted(b.samples)]), 0)
            for b in batch.blocks
        ]  # fmt: skip
        new = renamed(batch.entries, ids)
        receipt = store.append(new, by="AB", operation="log", now=batch.recorded_at, samples=samples)
        ids.update({key: made for (key, _e), made in zip(batch.entries, receipt.ids, strict=True)})


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
    with folder() as place, Store.create(Path(place) / "a.luff", now=NOW) as store:
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
def test_as_known_at_equals_a_store_that_never_saw_what_came_later(
    model: LedgerModel, data: st.DataObject
) -> None:
    moment = data.draw(st.sampled_from([b.recorded_at for b in model.batches]))
    with (
        folder() as place,
        Store.create(Path(place) / "a.luff", now=NOW) as whole,
        Store.create(Path(place) / "b.luff", now=NOW) as cut,
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
                    assert np.array_equal(
                        getattr(mine.number(channel), part), getattr(other.number(channel), part)
                    )


@settings(max_examples=25, deadline=None)
@given(histories())
def test_changes_since_name_every_episode_whose_answer_differs(model: LedgerModel) -> None:
    with folder() as place, Store.create(Path(place) / "a.luff", now=NOW) as store:
        fill(store, model.batches)
        heads = [0, *(store.head_known_at(b.recorded_at) for b in model.batches)]
        for seq in heads:
            changed = store.changes_since(seq).episodes
            for episode in EPISODES:
                before = stored_values(store, episode, seq), stored_samples(store, episode, seq)
                now = stored_values(store, episode, 2**62), stored_samples(store, episode, 2**62)
                assert before == now or episode in changed


def test_the_hour_is_the_unit_of_overlap() -> None:
    """A later file that covers two hours with a gap between does not wipe what an earlier one has in the gap."""
    with folder() as place, Store.create(Path(place) / "a.luff", now=NOW) as store:
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
