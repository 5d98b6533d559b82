"""What a replay comes to: the flags of each past episode under one or two policies, counted over its hours.

The hours of an episode run from its first entry to the end of support, else to the last thing recorded, so that
flags of long and short episodes can be compared.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable, Iterator, Sequence
from dataclasses import dataclass, replace

from core.figures.replay import MarkerCount, PastEpisode, ReplayedFlag, counts, outcome_of, replay_episode
from core.judgement.markers.registry import MARKERS
from core.judgement.policy import Policy
from core.record.entries import Action
from core.record.episode import build_episode
from core.record.instant import DAY, HOUR, Instant
from core.record.knowledge import standing
from core.record.samples import DeviceSamples
from core.record.settings import SettingsInForce
from core.record.support import support_time

NOT_RECORDED = "not recorded"
Alive = Callable[[], bool]
"""Asked at every moment; False stops the replay."""


class ReplayStoppedError(Exception):
    """The replay was stopped before it had looked at every moment."""


@dataclass(frozen=True, slots=True)
class Span:
    """From `start` up to `end`; None is open. Flags raised inside it count, and hours inside it."""

    start: Instant | None = None
    end: Instant | None = None

    def holds(self, at: Instant) -> bool:
        """Whether a moment lies inside."""
        return (self.start is None or at >= self.start) and (self.end is None or at < self.end)

    def clip(self, start: Instant, end: Instant) -> tuple[Instant, Instant]:
        """The part of a stretch that lies inside; of no length where none does."""
        low = start if self.start is None else max(start, self.start)
        high = end if self.end is None else min(end, self.end)
        return low, max(low, high)


@dataclass(frozen=True, slots=True)
class ReplayedEpisode:
    """A past episode with the flags of each policy. `ended_at` and `outcome`: as they are known now, if logged.

    `late`: the share of its entries that were recorded more than a day after they happened. Where that is most of
    them nothing was known in time, and the replay can say little.
    """

    episode: str
    label: str
    begun: Instant
    until: Instant
    ended_at: Instant | None
    outcome: str | None
    late: float
    flags: tuple[tuple[ReplayedFlag, ...], ...]

    @property
    def hours(self) -> float:
        """Episode-hours that were looked at."""
        return (self.until - self.begun) / HOUR


def replayed(
    past: PastEpisode, policies: Sequence[Policy], span: Span = Span(), alive: Alive | None = None
) -> ReplayedEpisode | None:
    """Replay one episode under each policy. None where nothing of it lies inside the span.

    The replay begins with the episode whatever the span, so that a flag keeps its name; it ends with the span,
    so that nothing recorded later is known.

    Raises:
        ReplayStoppedError: `alive` said no.
    """
    whole = build_episode(past.key, standing([e for e in past.entries if e.action is not Action.FLAG]), past.samples)
    if whole.first_at is None:
        return None
    ended = support_time(whole, SettingsInForce(whole)).end
    last = max([e.at for e in past.entries] + [int(b.t[-1]) for b in past.samples if b.t.size])
    begun, until = span.clip(whole.first_at, last if ended is None else max(ended, whole.first_at))
    if until <= begun:
        return None
    outcome, known = outcome_of(whole), _until(past, span.end)
    made = tuple(tuple(_flags(known, policy, span, outcome, alive)) for policy in policies)
    late = sum(e.recorded_at - e.at > DAY for e in past.entries) / len(past.entries)
    label = whole.latest_text("label") or past.key
    return ReplayedEpisode(past.key, label, begun, until, ended, outcome, late, made)


def _flags(
    past: PastEpisode, policy: Policy, span: Span, outcome: str | None, alive: Alive | None
) -> Iterator[ReplayedFlag]:
    stopped = False

    def progress(_done: int, _total: int) -> bool:
        nonlocal stopped
        stopped = alive is not None and not alive()
        return not stopped

    found = list(replay_episode(past, policy, progress))
    if stopped:
        raise ReplayStoppedError
    yield from (replace(f, outcome=outcome) for f in found if span.holds(f.raised_at))


def _until(past: PastEpisode, end: Instant | None) -> PastEpisode:
    """What had been recorded before the end of the span."""
    if end is None:
        return past
    blocks = []
    for block in past.samples:
        n = int(block.t.searchsorted(end))
        blocks.append(DeviceSamples(block.episode, block.channel, block.source, block.t[:n], block.v[:n],
                                    block.decimals))  # fmt: skip
    return PastEpisode(past.key, tuple(e for e in past.entries if e.recorded_at < end), tuple(blocks))


def known_at_once(past: PastEpisode) -> PastEpisode:
    """The episode as if everything had been recorded when it happened, for records whose recording times are lost.

    A correction counts from its own moment, or from that of what it corrects where that is later.
    """
    known: dict[str, Instant] = {}
    for entry in past.entries:
        known[entry.id] = max(entry.at, known.get(entry.replaces, entry.at))
    order = sorted(past.entries, key=lambda e: (known[e.id], e.seq))
    entries = tuple(replace(e, seq=n, recorded_at=known[e.id]) for n, e in enumerate(order, 1))
    return PastEpisode(past.key, entries, past.samples)


@dataclass(frozen=True, slots=True)
class MarkerRow:
    """One marker under each policy; None where that policy would never have raised it."""

    marker: str
    counts: tuple[MarkerCount | None, ...]


def by_marker(episodes: Sequence[ReplayedEpisode], policies: int) -> tuple[MarkerRow, ...]:
    """Every marker that any policy raised, in the registry's order, the policies side by side."""
    found = [{c.marker: c for c in counts(_all(episodes, n))} for n in range(policies)]
    keys = [k for k in MARKERS if any(k in f for f in found)]
    return tuple(MarkerRow(k, tuple(f.get(k) for f in found)) for k in keys)


@dataclass(frozen=True, slots=True)
class Load:
    """How many flags a policy would have raised over how many episode-hours; `per_hour` None without hours."""

    hours: float
    raised: int
    by_tier: tuple[tuple[str, int], ...]
    undone: int

    @property
    def per_hour(self) -> float | None:
        """Flags per episode-hour."""
        return self.raised / self.hours if self.hours > 0 else None


def load_of(episodes: Sequence[ReplayedEpisode], policy: int) -> Load:
    """The load of one policy on some episodes."""
    flags = list(_all(episodes, policy))
    tiers = tuple((t, sum(f.tier == t for f in flags)) for t in ("escalate", "concern", "remark"))
    return Load(sum(e.hours for e in episodes), len(flags), tiers, sum(f.undone for f in flags))


@dataclass(frozen=True, slots=True)
class OutcomeRow:
    """Episodes of one outcome: how many, and under each policy in how many an escalation was raised before the end,
    and the median hours from its first to the end (None where no end or no escalation is known)."""

    outcome: str
    episodes: int
    hours: float
    escalated: tuple[int, ...]
    lead_h: tuple[float | None, ...]
    raised: tuple[int, ...]


def by_outcome(episodes: Sequence[ReplayedEpisode], policies: int) -> tuple[OutcomeRow, ...]:
    """How escalation stands against what was logged as the outcome; episodes without one stand by themselves."""
    rows = []
    for outcome in sorted({e.outcome or NOT_RECORDED for e in episodes}):
        of = [e for e in episodes if (e.outcome or NOT_RECORDED) == outcome]
        firsts = [[first_escalation(e, n) for e in of] for n in range(policies)]
        leads = [
            [(e.ended_at - at) / HOUR for e, at in zip(of, first, strict=True) if at is not None and e.ended_at]
            for first in firsts
        ]
        rows.append(OutcomeRow(
            outcome, len(of), sum(e.hours for e in of), tuple(sum(at is not None for at in f) for f in firsts),
            tuple(_median(lead) for lead in leads), tuple(sum(len(e.flags[n]) for e in of) for n in range(policies)),
        ))  # fmt: skip
    return tuple(rows)


def first_escalation(episode: ReplayedEpisode, policy: int) -> Instant | None:
    """When the first escalation was raised that no correction took back, before the end of support."""
    raised = [f.raised_at for f in episode.flags[policy] if f.tier == "escalate" and not f.undone]
    end = episode.ended_at
    return min((at for at in raised if end is None or at <= end), default=None)


def _median(values: list[float]) -> float | None:
    if not values:
        return None
    ordered, middle = sorted(values), len(values) // 2
    return ordered[middle] if len(values) % 2 else (ordered[middle - 1] + ordered[middle]) / 2


def _all(episodes: Iterable[ReplayedEpisode], policy: int) -> Iterator[ReplayedFlag]:
    for episode in episodes:
        yield from episode.flags[policy]
