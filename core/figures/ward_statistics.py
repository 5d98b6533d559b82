"""Shift figures for the ward over any span: starts and their clocks, first gases, windows, hours, verdicts, flags.

A span runs from `start` (not included) to `end` (included), so that spans laid end to end count everything once.
Figures are those as of the span's end: what happened later, also who saw a flag later, does not exist in it.
The clocks are for audit; nothing is judged by them.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass, field
from statistics import median
from typing import Final, TypeVar

from core.figures.episode_figures import episode_figures
from core.judgement.gas_findings import STANDS_FOR_ARTERIAL
from core.judgement.policy import Policy
from core.judgement.policy_sections import Limit
from core.judgement.response_shapes import ResponseFigure
from core.judgement.shapes import EpisodeFigures, GasFigure
from core.record.episode import Episode
from core.record.instant import HOUR, Instant, minutes_between
from core.record.settings import SettingsInForce
from core.record.support import support_time

T = TypeVar("T")


START_CLOCKS: Final[Mapping[str, str]] = {
    "gas_to_start": "deciding_gas_at",
    "decision_to_start": "decided_at",
    "arrival_to_start": "arrived_at",
}
"""The clocks to the start of support, each with the fact of the profile it runs from; the limits are the policy's."""


@dataclass(frozen=True, slots=True)
class Waits:
    """Lengths of time in minutes, in rising order. `limit_min` None: there is no limit to be inside of.

    `not_known` counts where a moment was not recorded or has not come; `backwards` where the record says that the
    end came before the beginning: those are to be checked and are in no other number.
    """

    minutes: tuple[float, ...] = ()
    limit_min: float | None = None
    not_known: int = 0
    backwards: int = 0

    @property
    def known(self) -> int:
        """How many lengths are known."""
        return len(self.minutes)

    @property
    def within(self) -> int | None:
        """How many were inside the limit, the limit itself included; None where there is none."""
        return None if self.limit_min is None else sum(m <= self.limit_min for m in self.minutes)

    @property
    def median(self) -> float | None:
        """The median; None where nothing is known."""
        return median(self.minutes) if self.minutes else None

    def __add__(self, other: Waits) -> Waits:
        return Waits(tuple(sorted(self.minutes + other.minutes)), self.limit_min, self.not_known + other.not_known,
                     self.backwards + other.backwards)  # fmt: skip


@dataclass(frozen=True, slots=True)
class GasTiming:
    """Arterial and capillary gases of the span by when they were taken: in a response window (30 to 120 min after a
    change they judge), early, late, or judging no change. `venous` are beside them."""

    in_window: int = 0
    early: int = 0
    late: int = 0
    judges_none: int = 0
    venous: int = 0

    @property
    def total(self) -> int:
        """All but the venous ones."""
        return self.in_window + self.early + self.late + self.judges_none

    def __add__(self, other: GasTiming) -> GasTiming:
        return GasTiming(self.in_window + other.in_window, self.early + other.early, self.late + other.late,
                         self.judges_none + other.judges_none, self.venous + other.venous)  # fmt: skip


@dataclass(frozen=True, slots=True)
class Windows:
    """Response windows that closed in the span: `answered` by a gas inside them, or not. `replaced` were cut short by
    the next change, or by the end of support, before a gas came: they could not be answered, and count apart."""

    answered: int = 0
    unanswered: int = 0
    replaced: int = 0

    @property
    def closed(self) -> int:
        """Windows that ran to their end."""
        return self.answered + self.unanswered

    def __add__(self, other: Windows) -> Windows:
        return Windows(self.answered + other.answered, self.unanswered + other.unanswered,
                       self.replaced + other.replaced)  # fmt: skip


@dataclass(frozen=True, slots=True)
class FlagCount:
    """The flags of one marker that began in the span. `seen` are minutes from when the marker was met until somebody
    said so; `not_known` of it counts those that nobody had seen by the span's end."""

    tier: str
    group: str
    raised: int = 0
    settled: int = 0
    ended: int = 0
    seen: Waits = field(default_factory=Waits)

    def __add__(self, other: FlagCount) -> FlagCount:
        return FlagCount(self.tier, self.group, self.raised + other.raised, self.settled + other.settled,
                         self.ended + other.ended, self.seen + other.seen)  # fmt: skip


@dataclass(frozen=True, slots=True)
class WardStatistics:
    """The figures of a span. Add those of episodes to get those of a ward.

    `hours_possible` are the hours between start (or the span's) and end of support (or the span's), breaks included.
    """

    start: Instant
    end: Instant
    limits: Mapping[str, Limit]
    """Of the clocks, with source and how sure, by the policy they were counted under."""
    window_min: tuple[float, float]
    """The response window of that policy, in minutes after a change."""
    episodes: int = 0
    starts: int = 0
    ends: Mapping[str, int] = field(default_factory=dict)
    clocks: Mapping[str, Waits] = field(default_factory=dict)
    first_gas: Waits = field(default_factory=Waits)
    gases: GasTiming = field(default_factory=GasTiming)
    windows: Windows = field(default_factory=Windows)
    hours_on_mask: float = 0.0
    hours_possible: float = 0.0
    responses: Mapping[str, int] = field(default_factory=dict)
    flags: Mapping[str, FlagCount] = field(default_factory=dict)

    def __add__(self, other: WardStatistics) -> WardStatistics:
        return WardStatistics(
            self.start, self.end, self.limits, self.window_min,
            self.episodes + other.episodes, self.starts + other.starts,
            dict(Counter(self.ends) + Counter(other.ends)), _merged(self.clocks, other.clocks, Waits.__add__),
            self.first_gas + other.first_gas, self.gases + other.gases, self.windows + other.windows,
            self.hours_on_mask + other.hours_on_mask, self.hours_possible + other.hours_possible,
            dict(Counter(self.responses) + Counter(other.responses)),
            _merged(self.flags, other.flags, FlagCount.__add__),
        )  # fmt: skip


def ward_statistics(episodes: Iterable[Episode], start: Instant, end: Instant, policy: Policy) -> WardStatistics:
    """The figures of all episodes that had begun by the span's end and whose support had not ended before it.

    Raises:
        ValueError: the span does not end after it starts.
    """
    total = nothing(start, end, policy)
    for episode in episodes:
        total += episode_statistics(episode, start, end, policy)
    return total


def nothing(start: Instant, end: Instant, policy: Policy) -> WardStatistics:
    """The figures of a span without episodes.

    Raises:
        ValueError: the span does not end after it starts.
    """
    if end <= start:
        raise ValueError(f"span from {start} to {end}: its end must lie after its start")
    limits = start_limits(policy)
    window = policy.response.window_from_min.value, policy.response.window_to_min.value
    clocks = {key: Waits(limit_min=limit.value) for key, limit in limits.items()}
    return WardStatistics(start, end, limits, window, clocks=clocks)


def start_limits(policy: Policy) -> dict[str, Limit]:
    """The limit of each clock to the start of support, in minutes, with its source.

    >>> from core.judgement.policy import shipped_policy
    >>> {key: limit.value for key, limit in start_limits(shipped_policy()).items()}
    {'gas_to_start': 60.0, 'decision_to_start': 60.0, 'arrival_to_start': 120.0}
    """
    c = policy.start_clocks
    found = (c.gas_to_start_min, c.decision_to_start_min, c.arrival_to_start_min)
    return dict(zip(START_CLOCKS, found, strict=True))


def episode_statistics(episode: Episode, start: Instant, end: Instant, policy: Policy) -> WardStatistics:
    """What one episode adds to the figures of a span; nothing where it did not stand in it.

    Raises:
        ValueError: the span does not end after it starts.
    """
    none = nothing(start, end, policy)
    cut = episode.until(end)
    support = support_time(cut, SettingsInForce(cut))
    if cut.first_at is None or (support.end is not None and support.end <= start):
        return none
    figures = episode_figures(episode, end, policy)
    began = support.start is not None and support.start_recorded and start < support.start <= end
    low = max(start, support.start) if support.start is not None else end
    high = min(support.end, end) if support.end is not None else end
    ended = support.end is not None and start < support.end <= end
    why = figures.support.end_reason or support.ended_by or "not recorded"
    return WardStatistics(
        start, end, none.limits, none.window_min, 1, int(began), {why: 1} if ended else {},
        _clocks(figures, support.start, none.limits) if began else dict(none.clocks),
        _first_gas(figures, support.start, end) if began else Waits(),
        _gas_timing(figures, start, end), _windows(figures, support.end, start, end),
        support.hours_on_mask(start, end), max(high - low, 0) / HOUR,
        dict(Counter(r.headline for r in figures.responses if start < r.anchor_at <= end)),
        _flags(figures, start, end),
    )  # fmt: skip


def _clocks(figures: EpisodeFigures, began: Instant | None, limits: Mapping[str, Limit]) -> dict[str, Waits]:
    return {key: _wait(figures.profile.get(fact), began, limits[key].value) for key, fact in START_CLOCKS.items()}


def _wait(begin: float | str | None, end: Instant | None, limit: float | None = None) -> Waits:
    """One length of time as far as both its ends are known."""
    if not isinstance(begin, (int, float)) or end is None:
        return Waits(limit_min=limit, not_known=1)
    length = minutes_between(int(begin), end)
    return Waits(limit_min=limit, backwards=1) if length < 0 else Waits((length,), limit)


def _first_gas(figures: EpisodeFigures, began: Instant | None, end: Instant) -> Waits:
    """From the start of support to the first gas on it that can judge."""
    after = [g.at for g in figures.gases if began is not None and _judges(g) and began < g.at <= end]
    return _wait(began, min(after, default=None))


def _judges(gas: GasFigure) -> bool:
    return gas.site in STANDS_FOR_ARTERIAL and not gas.off_support


def _gas_timing(figures: EpisodeFigures, start: Instant, end: Instant) -> GasTiming:
    """A gas counts once, by the newest change it is attributed to."""
    timing = {g.at: g.timing for r in figures.responses for g in r.gases if g.attributable}
    own = [g for g in figures.gases if start < g.at <= end]
    counted = Counter(timing.get(g.at, "none") for g in own if g.site in STANDS_FOR_ARTERIAL)
    venous = sum(g.site not in STANDS_FOR_ARTERIAL for g in own)
    return GasTiming(counted["in_window"], counted["early"], counted["late"], counted["none"], venous)


def _windows(figures: EpisodeFigures, stopped: Instant | None, start: Instant, end: Instant) -> Windows:
    total = Windows()
    for r in figures.responses:
        if start < r.window_to <= end:
            total += _window(r, stopped)
    return total


def _window(response: ResponseFigure, stopped: Instant | None) -> Windows:
    if any(g.timing == "in_window" and g.attributable for g in response.gases):
        return Windows(answered=1)
    cuts = [at for at in (response.superseded_at, stopped) if at is not None]
    return Windows(replaced=1) if any(at < response.window_to for at in cuts) else Windows(unanswered=1)


def _flags(figures: EpisodeFigures, start: Instant, end: Instant) -> dict[str, FlagCount]:
    """Flags are the exception to the span's edges: one that begins at its end counts in the next span, for "overdue"
    is met only once its moment has passed."""
    found: dict[str, FlagCount] = {}
    for flag in figures.flags:
        if not start <= flag.since < end or flag.undone_by_correction:
            continue
        seen_at = flag.seen_at if flag.seen_at is not None else flag.settled_at
        seen = _wait(flag.since, seen_at if seen_at is not None and seen_at <= end else None)
        settled, ended = flag.settled_at is not None, flag.ended_at is not None
        one = FlagCount(flag.tier, flag.group, 1, int(settled), int(ended), seen)
        found[flag.marker] = found[flag.marker] + one if flag.marker in found else one
    return found


def _merged(one: Mapping[str, T], other: Mapping[str, T], add: Callable[[T, T], T]) -> dict[str, T]:
    made = dict(one)
    for key, value in other.items():
        made[key] = add(made[key], value) if key in made else value
    return made
