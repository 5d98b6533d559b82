"""The early stages, and the spells of markers that no clock moves, kept while nothing that they read has changed.

Gases, anchors, responses and scores depend on the record up to a moment, and on the moment itself only where a
window opens or closes. So what they found for one moment stands for later ones until something new has happened
in the record, or the clock passes such an edge: `valid_until`. Trends and due items move with the clock and are
computed anew, and so is every marker that read what moves (`core.judgement.watched_context`).
"""

from __future__ import annotations

from collections import OrderedDict
from collections.abc import Callable
from dataclasses import dataclass, replace

from core.judgement.context import Context
from core.judgement.course import MINUTES
from core.judgement.markers.observed import Observed
from core.judgement.policy import Policy
from core.record.episode import Episode
from core.record.instant import MINUTE, Instant

NEVER: Instant = 2**62
Compute = Callable[[Episode, Instant, Policy], Context]


@dataclass(frozen=True, slots=True)
class _Kept:
    episode: Episode
    policy: str
    lengths: tuple[int, ...]
    valid_from: Instant
    valid_until: Instant
    context: Context


class StageCache:
    """Contexts by episode, the least recently used dropped first. One thread uses one cache."""

    def __init__(self, most: int = 128) -> None:
        self._most = most
        self._kept: OrderedDict[str, _Kept] = OrderedDict()
        self._seen: dict[str, Observed] = {}

    def __len__(self) -> int:
        return len(self._kept)

    def observed(self, ctx: Context) -> Observed:
        """What markers look at; what they found at an earlier moment is kept where no clock moves it."""
        earlier = self._seen.get(ctx.episode.key)
        seen = Observed(ctx) if earlier is None else earlier.later(ctx)
        self._seen[ctx.episode.key] = seen
        return seen

    def early_stages(self, episode: Episode, as_of: Instant, policy: Policy, compute: Compute) -> Context:
        """The context of the early stages, taken from the cache where it still stands.

        An episode is recognised by being the same object: a record that changed is a new one.
        """
        kept = self._kept.get(episode.key)
        lengths = _lengths(episode, as_of)
        if kept is not None and _stands(kept, episode, as_of, policy, lengths):
            self._kept.move_to_end(episode.key)
            return replace(kept.context, as_of=as_of)
        context = compute(episode, as_of, policy)
        edge = valid_until(context)
        self._kept[episode.key] = _Kept(episode, policy.hash, lengths, as_of, edge, context)
        self._kept.move_to_end(episode.key)
        if len(self._kept) > self._most:
            gone, _ = self._kept.popitem(last=False)
            self._seen.pop(gone, None)
        return context


def _stands(kept: _Kept, episode: Episode, as_of: Instant, policy: Policy, lengths: tuple[int, ...]) -> bool:
    same = kept.episode is episode and kept.policy == policy.hash and kept.lengths == lengths
    return same and kept.valid_from <= as_of < kept.valid_until


def _lengths(episode: Episode, as_of: Instant) -> tuple[int, ...]:
    """How much of each channel had happened: two moments with the same lengths cut the same record."""
    series = (s.last_at_or_before(as_of) for s in episode.series.values())
    words = (w.count_until(as_of) for w in episode.words.values())
    return (*series, *words, sum(e.at <= as_of for e in episode.transitions))


def valid_until(context: Context) -> Instant:
    """The first later moment at which the early stages could find something else in the same record.

    It is the next edge of a response window, the next of the fixed minutes after an anchor, half an hour after
    a gas (until then a vital taken later may belong to it), or the end of support when it is stated ahead.
    """
    rules = context.policy.response
    minutes = {*MINUTES, int(rules.window_from_min.value), int(rules.window_to_min.value)}
    edges = [a.at + m * MINUTE for a in context.anchors for m in minutes]
    edges += [g.at + 30 * MINUTE + 1 for g in context.gases]
    edges += [context.support.end] if context.support.end is not None else []
    return min((e for e in edges if e > context.as_of), default=NEVER)
