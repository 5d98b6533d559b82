"""Random histories of a ledger, and a store that is given one."""

from __future__ import annotations

from pathlib import Path

import numpy as np
from hypothesis import strategies as st

from core.record.entries import Action, NewEntry
from core.record.instant import MINUTE, parse
from core.record.samples import DeviceSamples
from storage.store import Store
from tests.support.ledger_model import Batch, LedgerModel, SampleBlock, renamed

NOW = parse("2026-03-28T02:00:00+00:00")
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
        action = Action.WITHDRAW if span else draw(st.sampled_from([Action.CORRECT, Action.WITHDRAW, Action.MOVE]))
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
        return NewEntry(episode, "leak", at, by, action=Action.SHIFT, source=draw(st.sampled_from(["", "a", "b"])))
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


def fill(store: Store, batches: list[Batch]) -> None:
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


def new_store(place: Path | str, name: str = "a") -> Store:
    """An empty plain store in a folder."""
    return Store.create(Path(place) / f"{name}.luff", now=NOW)
