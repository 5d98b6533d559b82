"""The ledger in memory, as plainly as it can be said: the oracle that the store is held against.

It knows lists and dictionaries alone. A batch is a list of things with the time at which it was recorded; what
is known at a moment is what the batches recorded by then say, and nothing else.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, field, replace

from core.record.entries import Action, NewEntry
from core.record.instant import DAY, MINUTE, Instant

Value = tuple[Instant, str, float | None, str | None, bool, bool]
"""At, channel, number, words, corrected, disputed."""


@dataclass(frozen=True)
class Laid:
    """One device sample: its value, where it is from, and which block laid it."""

    value: float
    source: str
    block: int


@dataclass(frozen=True)
class SampleBlock:
    """Device samples of one episode and channel: time to value."""

    episode: str
    channel: str
    source: str
    samples: dict[Instant, float]


@dataclass(frozen=True)
class Batch:
    """What was recorded at once. Ids of entries are given, so that the store's can be compared."""

    recorded_at: Instant
    entries: tuple[tuple[str, NewEntry], ...]
    blocks: tuple[SampleBlock, ...] = ()


@dataclass
class LedgerModel:
    """All batches, in order."""

    batches: list[Batch] = field(default_factory=list)

    def append(
        self, now: Instant, entries: Iterable[tuple[str, NewEntry]], blocks: Iterable[SampleBlock] = ()
    ) -> Batch:
        """Take a batch; the clock may step back, the recording time does not."""
        last = self.batches[-1].recorded_at if self.batches else now
        made = Batch(max(now, last), tuple(entries), tuple(blocks))
        self.batches.append(made)
        return made

    def known_at(self, moment: Instant) -> LedgerModel:
        """The ledger that never saw what was recorded after a moment."""
        return LedgerModel([b for b in self.batches if b.recorded_at <= moment])

    def values(self, episode: str) -> list[Value]:
        """What stands in an episode, by time, then in order of recording."""
        order: dict[str, int] = {}
        entries: dict[str, NewEntry] = {}
        after: dict[str, list[str]] = {}
        for b in self.batches:
            for key, e in b.entries:
                order[key] = len(order)
                entries[key] = e
                if e.action in (Action.CORRECT, Action.WITHDRAW, Action.MOVE):
                    after.setdefault(e.replaces, []).append(key)
        found: list[tuple[int, Value]] = []
        for key, e in entries.items():
            if e.action is Action.ASSERT:
                end, disputed = _follow(key, after)
                last = entries[end]
                if last.action is not Action.WITHDRAW and last.episode == episode:
                    value = (last.at, last.channel, last.number, last.words, end != key, disputed)
                    found.append((order[end], value))
        found.sort(key=lambda pair: (pair[1][0], pair[0]))
        return [value for _order, value in found]

    def samples(self, episode: str, channel: str) -> list[tuple[Instant, float]]:
        """The device samples that count, by time."""
        withdrawn = {e.replaces for b in self.batches for _k, e in b.entries if e.action is Action.WITHDRAW}
        laid: dict[Instant, Laid] = {}
        blocks = 0
        for b in self.batches:
            for key, e in b.entries:
                here = e.episode == episode and e.channel == channel and key not in withdrawn
                if here and e.action is Action.MASK:
                    laid = _masked(laid, e)
                if here and e.action is Action.SHIFT:
                    laid = _shifted(laid, e)
            for block in b.blocks:
                if (block.episode, block.channel) == (episode, channel):
                    for run in _without_pause(block.samples):
                        blocks += 1
                        lay(laid, {t: Laid(v, block.source, blocks) for t, v in run.items()})
        return [(t, laid[t].value) for t in sorted(laid)]


def _follow(key: str, after: dict[str, list[str]]) -> tuple[str, bool]:
    """The end of a chain of replacements: the latest successor each time; whether any had more than one."""
    disputed = False
    while key in after:
        disputed = disputed or len(after[key]) > 1
        key = after[key][-1]
    return key, disputed


def lay(laid: dict[Instant, Laid], fresh: dict[Instant, Laid]) -> None:
    """Lay samples over what is there: nothing older remains between their first and last."""
    if not fresh:
        return
    for t in [t for t in laid if min(fresh) <= t <= max(fresh)]:
        del laid[t]
    laid.update(fresh)


def _without_pause(samples: dict[Instant, float]) -> list[dict[Instant, float]]:
    """Samples that lie over older ones as one: until a pause of more than a quarter of an hour, or midnight UTC."""
    runs: list[dict[Instant, float]] = []
    before: Instant | None = None
    for t in sorted(samples):
        if before is None or t - before > 15 * MINUTE or t // DAY != before // DAY:
            runs.append({})
        runs[-1][t] = samples[t]
        before = t
    return runs


def _matches(sample: Laid, e: NewEntry) -> bool:
    return not e.source or sample.source == e.source


def _masked(laid: dict[Instant, Laid], e: NewEntry) -> dict[Instant, Laid]:
    return {t: s for t, s in laid.items() if not (_matches(s, e) and e.at <= t <= (e.number or 0))}


def _shifted(laid: dict[Instant, Laid], e: NewEntry) -> dict[Instant, Laid]:
    """Move what matches, run by run of one block, each laid over the rest in order of time."""
    moving = {t: s for t, s in laid.items() if _matches(s, e) and t >= e.at}
    rest = {t: s for t, s in laid.items() if t not in moving}
    for run in _runs(laid, moving):
        lay(rest, {t + int(e.number or 0): s for t, s in run.items()})
    return rest


def _runs(laid: dict[Instant, Laid], moving: dict[Instant, Laid]) -> list[dict[Instant, Laid]]:
    """Samples of one block that no other block's samples part."""
    runs: list[dict[Instant, Laid]] = []
    before: Laid | None = None
    for t in sorted(laid):
        s = laid[t]
        if before is None or s.block != before.block:
            runs.append({})
        runs[-1][t] = s
        before = s
    kept = ({t: s for t, s in run.items() if t in moving} for run in runs)
    return [run for run in kept if run]


def renamed(entries: Iterable[tuple[str, NewEntry]], ids: dict[str, str]) -> list[NewEntry]:
    """The entries with what they replace named as a store named it."""
    return [replace(e, replaces=ids.get(e.replaces, e.replaces)) for _key, e in entries]
