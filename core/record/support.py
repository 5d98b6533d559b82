"""When support ran: its start and end, breaks from it, hours on the mask.

What happened at one instant acts in the order in which it was recorded, so that of two contrary entries the later
wins: a break of no length is no break, and a mask that was on for no time was not on.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass

from core.record.channels import MODES, Group, by_group
from core.record.episode import Episode, Series, Words
from core.record.instant import DAY, HOUR, MINUTE, Instant
from core.record.reading import Reading
from core.record.settings import SETTING_NUMBERS, SETTING_WORDS, SettingsInForce, settings_after

SUPPORT_MODES = frozenset(MODES) - {"off"}
SETTLED = 10 * MINUTE
"""Entries closer together than this say nothing about their order: they were written in one go."""
_ENDING_EVENTS = ("stopped", "intubated", "arrest")
ENDING = frozenset({"ended_at", *_ENDING_EVENTS})
"""Channels by which support ends."""
BEARS_ON_THE_END = ENDING | {"mask_on"} | {c.key for c in by_group(Group.SETTING)}
"""Channels that decide whether it has: settings or the mask after a stop say that it goes on."""
Moment = tuple[Instant, int]
"""An instant, and the place in the order of recording of what happened at it."""


@dataclass(frozen=True, slots=True)
class Break:
    """A time off the mask, from `start` to `end`; `end` is None while it is open."""

    start: Instant
    end: Instant | None

    def covers(self, at: Instant) -> bool:
        """Whether a moment lies in the break."""
        return self.start <= at and (self.end is None or at < self.end)

    def minutes(self, until: Instant) -> float:
        """Its length so far, in minutes."""
        return (min(self.end if self.end is not None else until, until) - self.start) / 60_000_000


@dataclass(frozen=True, slots=True)
class SupportTime:
    """The support of an episode.

    `start` is None before any support; `start_recorded` is False where logging began with support running
    and nobody said since when. `end` is None while it goes on; `ended_by` is the event or `ended_at`.
    """

    start: Instant | None
    start_recorded: bool
    end: Instant | None
    ended_by: str | None
    breaks: tuple[Break, ...]

    def on_support(self, at: Instant) -> bool:
        """Whether support was running on the patient at a moment."""
        if self.start is None or at < self.start or (self.end is not None and at >= self.end):
            return False
        return not any(b.covers(at) for b in self.breaks)

    def break_at(self, at: Instant) -> Break | None:
        """The break a moment lies in."""
        return next((b for b in self.breaks if b.covers(at)), None)

    @property
    def off_times(self) -> tuple[Break, ...]:
        """Every time without support after its start: the breaks, and what comes after the end."""
        return self.breaks if self.end is None else (*self.breaks, Break(self.end, None))

    def drawn_in(self, at: Instant) -> Break | None:
        """The break a gas was drawn in. A gas belongs before what changed in its minute: one of the break's first
        minute was drawn before the mask came off, one of its last before the mask went on again."""
        minute = at // MINUTE
        return next((b for b in self.breaks if b.start // MINUTE < minute
                     and (b.end is None or minute <= b.end // MINUTE)), None)  # fmt: skip

    def hours_on_mask(self, start: Instant, end: Instant) -> float:
        """Hours of support between two moments, breaks taken off."""
        if self.start is None:
            return 0.0
        low = max(start, self.start)
        high = min(end, self.end) if self.end is not None else end
        if high <= low:
            return 0.0
        off = sum(max(0, min(b.end if b.end is not None else high, high) - max(b.start, low)) for b in self.breaks)
        return (high - low - off) / HOUR

    def hours_last_day(self, as_of: Instant) -> float:
        """Hours of support in the last 24 h."""
        return self.hours_on_mask(as_of - DAY, as_of)


def support_time(episode: Episode, settings: SettingsInForce) -> SupportTime:
    """Find start, end and breaks of support.

    The start is the profile's `started_at`; without one, the first moment a support mode, a pressure or
    `mask_on` is logged. A stop followed by settings or the mask again is a break of the same episode.
    """
    first = _first_support(episode, settings)
    stated = episode.latest("started_at")
    start = int(stated) if stated is not None else first
    end, ended_by = _end(episode, settings)
    return SupportTime(start, stated is not None or _seen_to_begin(episode, first), end, ended_by,
                       _breaks(episode, end))  # fmt: skip


def _first_support(episode: Episode, settings: SettingsInForce) -> Instant | None:
    for t in settings.moments:
        now = settings.at(t)
        if now.mode in SUPPORT_MODES or now.is_bilevel or now.is_cpap:
            return t
    on = episode.text("mask_on")
    return int(on.t[0]) if len(on) else None


def _seen_to_begin(episode: Episode, first: Instant | None) -> bool:
    """Whether logging saw support begin, so that its first setting is its start.

    It did where a gas was logged before it, anything a person wrote stands at least `SETTLED` before it, or the
    mask went on around it. Readings of the ventilator itself before its first setting say that it ran already.
    """
    if first is None:
        return False
    machine = [episode.number(c.key) for c in by_group(Group.DEVICE)]
    if any(len(s) and int(s.t[0]) < first for s in machine):
        return False
    mask_on = episode.text("mask_on").t
    if any(first - 3 * SETTLED <= int(t) <= first + SETTLED for t in mask_on):
        return True
    if any(gas.at < first for gas in episode.gases):
        return True
    written = [int(s.spots.t[0]) for c in by_group(Group.VITAL) if len((s := episode.number(c.key)).spots)]
    written += [int(w.t[0]) for g in (Group.VITAL, Group.EVENT) for c in by_group(g) if len(w := episode.text(c.key))]
    return any(t <= first - SETTLED for t in written)


def begins_unseen(episode: Episode, at: Instant, readings: Sequence[Reading]) -> bool:
    """Whether readings begin the support of an episode that has none, and nothing says that it began there.

    Its start is then not recorded: support may have been running when logging began.
    """
    keys = {r.channel.key for r in readings}
    settings = SettingsInForce(episode)
    after = settings_after(settings.at(at), readings)
    begins = after.mode in SUPPORT_MODES or after.is_bilevel or after.is_cpap
    if not begins or keys & {"started_at", "mask_on"} or support_time(episode, settings).start is not None:
        return False
    return not _seen_to_begin(episode, at)


def _end(episode: Episode, settings: SettingsInForce) -> tuple[Instant | None, str | None]:
    stated = episode.latest("ended_at")
    ends = [((int(stated), 0), "ended_at")] if stated is not None else []
    ends += [(max(moments_of(episode, e)), e) for e in _ENDING_EVENTS if len(episode.text(e))]
    if not ends:
        return None, None
    last, by = max(ends)
    goes_on = by != "ended_at" and any(m > last for m in resumptions_of(episode, settings))
    return (None, None) if goes_on else (last[0], by)


def moments_of(episode: Episode, channel: str) -> list[Moment]:
    """When entries of a channel of words happened, each with its place in the order of recording."""
    words = episode.text(channel)
    return [(t, episode.place(i)) for t, i in zip(words.t.tolist(), words.origin.tolist(), strict=True)]


def resumptions_of(episode: Episode, settings: SettingsInForce) -> Iterator[Moment]:
    """Every moment that says support goes on after an end before it: the mask on, a setting that is not `off`."""
    yield from moments_of(episode, "mask_on")
    logged: list[Series | Words] = [episode.number(c) for c in SETTING_NUMBERS]
    logged += [episode.text(c) for c in SETTING_WORDS]
    for values in logged:
        for t, i in zip(values.t.tolist(), values.origin.tolist(), strict=True):
            if not settings.at(t).is_off:
                yield t, episode.place(i)


def _mode_moves(episode: Episode) -> list[tuple[Moment, bool]]:
    """Off is going off, also said again; only a mode after `off` is coming on (one logged in a break is a plan)."""
    moments, modes = moments_of(episode, "mode"), episode.text("mode").v
    return [(m, v == "off") for m, v, was in zip(moments, modes, (None, *modes), strict=False)
            if v == "off" or was == "off"]  # fmt: skip


def _moves(episode: Episode) -> list[tuple[Moment, bool]]:
    """Every going-off (True) and coming-on, in the order in which they act."""
    moves: list[tuple[Moment, bool]] = []
    for channel, off in (("break_start", True), ("mask_off", True), ("stopped", True),
                         ("break_end", False), ("mask_on", False)):  # fmt: skip
        moves += [(m, off) for m in moments_of(episode, channel)]
    return sorted(moves + _mode_moves(episode))


def _breaks(episode: Episode, end: Instant | None) -> tuple[Break, ...]:
    """Pair every going-off with the next coming-on. Off while off changes nothing."""
    breaks: list[Break] = []
    opened: Instant | None = None
    for (at, _), off in _moves(episode):
        if end is not None and at >= end:
            break
        if off and opened is None:
            opened = at
        elif not off and opened is not None:
            breaks.append(Break(opened, at))
            opened = None
    if opened is not None:
        breaks.append(Break(opened, end))
    return _of_some_length(breaks)


def _of_some_length(breaks: list[Break]) -> tuple[Break, ...]:
    """Breaks that touch are one, since the mask was on in between for no time; one of no length is none."""
    joined: list[Break] = []
    for b in (b for b in breaks if b.end is None or b.end > b.start):
        if joined and joined[-1].end == b.start:
            joined[-1] = Break(joined[-1].start, b.end)
        else:
            joined.append(b)
    return tuple(joined)
