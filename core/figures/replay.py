"""Replay: when each flag would have been raised under a policy, as known at each moment of past episodes.

At every moment the record holds what had been recorded by then and had happened by then. The transitions that the
ledger would have taken are kept while the replay goes on, so that a flag keeps its name as it did then. Flags and
words on flags that are in the record are left out: they belong to the policy of their time.

Serial and lazy: a driver may give each episode to another process and stop whenever it likes.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable, Iterator, Sequence
from dataclasses import dataclass, replace
from heapq import heapify, heappop, heappush

from core.figures.episode_figures import judged
from core.judgement.due import due_items
from core.judgement.flag_history import NO_LONGER, RAISED, UNDONE
from core.judgement.flags import evaluate, transitions
from core.judgement.markers.observed import Observed
from core.judgement.markers.registry import MARKERS
from core.judgement.policy import Policy
from core.judgement.shapes import FlagFigure
from core.record.entries import Action, Entry, NewEntry, recorded
from core.record.episode import Episode, build_episode
from core.record.instant import HOUR, MINUTE, Instant
from core.record.knowledge import standing
from core.record.samples import DeviceSamples

DEVICE_EVERY = 5 * MINUTE
"""How often the machine's values are looked at."""
Progress = Callable[[int, int], bool]
"""Called with the moments done and all of them; False stops the replay."""


@dataclass(frozen=True, slots=True)
class PastEpisode:
    """A past episode: its whole ledger in order of sequence, and its device samples."""

    key: str
    entries: tuple[Entry, ...]
    samples: tuple[DeviceSamples, ...] = ()


@dataclass(frozen=True, slots=True)
class ReplayedFlag:
    """A flag as it would have been raised: when it would have been seen first, and how it went on.

    `since` is when its marker was first met, `raised_at` when that was first known. `ended_at` None: it still stood
    at the end of the replay. `undone`: a later entry took away what it rested on. `outcome`: how the episode ended.
    """

    episode: str
    flag_id: str
    marker: str
    group: str
    tier: str
    since: Instant
    raised_at: Instant
    ended_at: Instant | None = None
    undone: bool = False
    outcome: str | None = None


def channels_read(policy: Policy) -> frozenset[str]:
    """The channels that the markers read that a policy has switched on."""
    on = (m.channels for k, m in MARKERS.items() if k in policy.markers and policy.markers[k].on)
    return frozenset().union(*on)


def replay_moments(past: PastEpisode, policy: Policy, every: Instant = DEVICE_EVERY) -> list[Instant]:
    """The moments at which a flag can have changed: something it reads was recorded, or the machine wrote."""
    read = channels_read(policy)
    moments = {
        e.recorded_at
        for e in past.entries
        if e.action is Action.DUE or (e.channel in read and e.action is not Action.FLAG)
    }
    for block in past.samples:
        if block.channel in read and block.t.size:
            first, last = int(block.t[0]), int(block.t[-1])
            moments.update(range(first + every, last + every, every))
    return sorted(moments)


def replay_episode(
    past: PastEpisode, policy: Policy, progress: Progress | None = None, every: Instant = DEVICE_EVERY
) -> Iterator[ReplayedFlag]:
    """Every flag that the policy would have raised, in order of raising. Stops early when `progress` says so."""
    ledger = _Ledger(past)
    queue = replay_moments(past, policy, every)
    end = queue[-1] if queue else 0
    heapify(queue)
    found: dict[str, ReplayedFlag] = {}
    done = 0
    last: Instant | None = None
    while queue:
        at = heappop(queue)
        if at == last:
            continue
        last, done = at, done + 1
        if progress is not None and not progress(done, done + len(queue)):
            break
        for deadline in _step(ledger, policy, at, found):
            if at < deadline < end:
                heappush(queue, deadline)
    outcome = outcome_of(ledger.episode(end)) if queue or last is not None else None
    yield from (replace(flag, outcome=outcome) for flag in found.values())


def _step(ledger: _Ledger, policy: Policy, at: Instant, found: dict[str, ReplayedFlag]) -> Iterator[Instant]:
    """Judge one moment, take its transitions, and name the moments at which something falls due."""
    ctx = judged(ledger.episode(at), at, policy)
    seen = Observed(ctx)
    flags = evaluate(ctx, seen)
    by_id = {f.flag_id: f for f in flags}
    for new in transitions(flags, ledger.taken, ctx.episode.key, policy.hash, at):
        entry = ledger.take(new, at)
        _note(found, entry, by_id)
    yield from (d.due_until + 1 for d in due_items(ctx, flags, seen) if d.state in ("open", "soon"))


def _note(found: dict[str, ReplayedFlag], entry: Entry, by_id: dict[str, FlagFigure]) -> None:
    flag = next(f for f in by_id.values() if f.marker == entry.channel and f'"{f.flag_id}"' in entry.raw)
    known = found.get(flag.flag_id)
    if entry.words == RAISED:
        found[flag.flag_id] = (
            ReplayedFlag(entry.episode, flag.flag_id, flag.marker, flag.group, flag.tier, flag.since, entry.at)
            if known is None
            else replace(known, ended_at=None, undone=False)
        )
    elif known is not None and entry.words == NO_LONGER:
        found[flag.flag_id] = replace(known, ended_at=flag.ended_at)
    elif known is not None and entry.words == UNDONE:
        found[flag.flag_id] = replace(known, ended_at=entry.at, undone=True)


class _Ledger:
    """What had been recorded by a moment, and the transitions that the replay has made."""

    def __init__(self, past: PastEpisode) -> None:
        self._key = past.key
        self._entries = [e for e in past.entries if e.action is not Action.FLAG]
        self._samples = past.samples
        self._seq = max((e.seq for e in past.entries), default=0)
        self._known = -1
        self._episode: Episode | None = None
        self.taken: list[Entry] = []

    def episode(self, at: Instant) -> Episode:
        """The episode as known at a moment; built anew only when something was recorded since."""
        count = sum(1 for e in self._entries if e.recorded_at <= at)
        if self._episode is None or count != self._known:
            known = standing(self._entries[:count])
            self._episode, self._known = build_episode(self._key, known, self._samples), count
        people = tuple(t for t in self._episode.transitions if t.action is not Action.FLAG)
        return replace(self._episode, transitions=(*people, *self.taken))

    def take(self, new: NewEntry, at: Instant) -> Entry:
        """Take a transition as the ledger would have."""
        self._seq += 1
        entry = recorded(new, self._seq, f"replay-{self._seq}", at)
        self.taken.append(entry)
        return entry


def replay(
    episodes: Sequence[PastEpisode], policy: Policy, progress: Progress | None = None
) -> Iterator[ReplayedFlag]:
    """Every flag of several episodes, one after the other. `progress` counts episodes here."""
    for i, past in enumerate(episodes):
        if progress is not None and not progress(i, len(episodes)):
            return
        yield from replay_episode(past, policy)


def outcome_of(episode: Episode) -> str | None:
    """How an episode ended, as logged: its end reason, else the event that ended it; None where neither is."""
    reason = episode.latest_text("end_reason")
    if reason is not None:
        return reason
    return next((e for e in ("arrest", "intubated", "stopped") if len(episode.text(e))), None)


@dataclass(frozen=True, slots=True)
class MarkerCount:
    """How often one marker would have been raised, and in how many episodes of which outcome."""

    marker: str
    tier: str
    raised: int
    episodes: int
    undone: int
    outcomes: tuple[tuple[str, int], ...]


def counts(flags: Iterable[ReplayedFlag]) -> tuple[MarkerCount, ...]:
    """Flags by marker, in the registry's order. Two policies side by side are two of these."""
    by_marker: dict[str, list[ReplayedFlag]] = {}
    for flag in flags:
        by_marker.setdefault(flag.marker, []).append(flag)
    order = {key: i for i, key in enumerate(MARKERS)}
    return tuple(_count(k, by_marker[k]) for k in sorted(by_marker, key=lambda k: order.get(k, len(order))))


def _count(marker: str, flags: list[ReplayedFlag]) -> MarkerCount:
    ends: dict[str, set[str]] = {}
    for flag in flags:
        ends.setdefault(flag.outcome or "not recorded", set()).add(flag.episode)
    outcomes = tuple(sorted((end, len(episodes)) for end, episodes in ends.items()))
    undone = sum(f.undone for f in flags)
    return MarkerCount(marker, flags[0].tier, len(flags), len({f.episode for f in flags}), undone, outcomes)


def per_shift(flags: Iterable[ReplayedFlag], begins: Instant, length: Instant = 12 * HOUR) -> dict[Instant, int]:
    """How many flags would have been raised in each shift, by the shift's beginning."""
    found: dict[Instant, int] = {}
    for flag in flags:
        shift = begins + (flag.raised_at - begins) // length * length
        found[shift] = found.get(shift, 0) + 1
    return dict(sorted(found.items()))
