"""What changed over a shift: per episode and for the ward, in order of concern. Handover is built from it.

A shift runs from `start` (not included) to `end` (included), so that a moment belongs to one shift alone.
"""

from __future__ import annotations

import math
from collections.abc import Iterable
from dataclasses import dataclass, field
from typing import Final

from core.figures.episode_figures import episode_figures, gas_stage, record_stage
from core.judgement.leak_trend import leak_figure
from core.judgement.policy import Policy
from core.judgement.response_shapes import ResponseFigure, Step
from core.judgement.setting_change import changed
from core.judgement.shapes import DueFigure, EpisodeFigures, FlagFigure, GasFigure, LeakFigure
from core.record.channels import CHANNELS, Group
from core.record.episode import Episode, Words
from core.record.instant import HOUR, Instant
from core.record.settings import SettingsInForce
from core.record.support import Break, support_time

DUE_AHEAD: Final = 4 * HOUR
"""Due items of this long after the shift's end are handed over."""
OPEN_FLAGS: Final = frozenset({"raised", "seen"})
_OPEN_DUE: Final = frozenset({"open", "soon", "overdue", "awaiting result"})
_STRONG: Final = frozenset({"escalate", "concern"})
_TOLD: Final = "told"
_NOT_EVENTS: Final = frozenset({_TOLD, "gas_sent"})


@dataclass(frozen=True, slots=True)
class Event:
    """Something that happened: its channel, and what more was said ("" for a bare event)."""

    at: Instant
    channel: str
    words: str
    by: str = ""


@dataclass(frozen=True, slots=True)
class ShiftFigures:
    """What one episode did in a shift. `now` are its figures as of the shift's end.

    `responses` are the anchors with a step in the shift; `other_changes` steps that are no anchor (undone at
    once, or without effect); `state_before`/`state_after` the state of the last arterial or capillary gas
    before and at the end (None where there is no gas). `due` holds what is overdue or falls due within 4 h.
    """

    episode: str
    start: Instant
    end: Instant
    now: EpisodeFigures
    responses: tuple[ResponseFigure, ...] = ()
    other_changes: tuple[Step, ...] = ()
    gases: tuple[GasFigure, ...] = ()
    gas_before: GasFigure | None = None
    state_before: str | None = None
    state_after: str | None = None
    flags_raised: tuple[FlagFigure, ...] = ()
    flags_ended: tuple[FlagFigure, ...] = ()
    flags_open: tuple[FlagFigure, ...] = ()
    due: tuple[DueFigure, ...] = ()
    breaks: tuple[Break, ...] = ()
    hours_on_mask: float = 0.0
    leak: LeakFigure = field(default_factory=LeakFigure)
    """The leak of the shift itself; that of `now` is of the trend's span, which is another."""
    events: tuple[Event, ...] = ()
    told: tuple[Event, ...] = ()
    told_before: tuple[Event, ...] = ()
    """Calls of earlier shifts about what still stands: who was told then may still be waited for."""
    recorded_late: int = 0
    """Typed entries of the shift that were recorded more than an hour after they happened; a file's are none."""
    began: bool = False
    ended: bool = False
    target: tuple[float, float] = (math.nan, math.nan)
    """The SpO2 range in force, %: the prescribed one, else the one that the patient's risk calls for."""


@dataclass(frozen=True, slots=True)
class WardShift:
    """A ward's shift: its episodes in order of concern, whom to see first foremost."""

    start: Instant
    end: Instant
    episodes: tuple[ShiftFigures, ...] = field(default=())

    @property
    def first(self) -> ShiftFigures | None:
        """Whom to see first: the foremost that gives a reason to be seen."""
        found = next(iter(self.episodes), None)
        return found if found is not None and found.now.concern.why is not None else None


def stands_in_shift(episode: Episode, start: Instant, end: Instant) -> bool:
    """Whether an episode was on the ward in a shift: begun by its end, not ended before its start."""
    first = episode.first_at
    if first is None or first > end:
        return False
    known = episode.until(end)
    ended = support_time(known, SettingsInForce(known)).end
    return ended is None or ended > start


def ward_shift(episodes: Iterable[Episode], start: Instant, end: Instant, policy: Policy) -> WardShift:
    """The shift of all episodes that stood in it, in order of concern.

    Raises:
        ValueError: the shift does not end after it starts.
    """
    made = [episode_shift(e, start, end, policy) for e in episodes if stands_in_shift(e, start, end)]
    made.sort(key=lambda s: (s.now.concern.rank, s.now.concern.order, s.now.label))
    return WardShift(start, end, tuple(made))


def episode_shift(episode: Episode, start: Instant, end: Instant, policy: Policy) -> ShiftFigures:
    """What one episode did in a shift. What happened after its end does not exist in it.

    Raises:
        ValueError: the shift does not end after it starts.
    """
    if end <= start:
        raise ValueError(f"shift from {start} to {end}: its end must lie after its start")
    now = episode_figures(episode, end, policy)
    ctx = gas_stage(record_stage(episode, end, policy))
    cut, settings, support = ctx.episode, ctx.settings, ctx.support
    responses = tuple(r for r in now.responses if any(_inside(s.at, start, end) for s in _steps(r)))
    before = [g for g in now.gases if g.at <= start]
    judged_before = [g for g in before if g.site != "venous"]
    judged = [g for g in now.gases if g.site != "venous"]
    return ShiftFigures(
        episode=episode.key, start=start, end=end, now=now, responses=responses,
        other_changes=_other_changes(settings, now.responses, start, end),
        gases=tuple(g for g in now.gases if _inside(g.at, start, end)),
        gas_before=before[-1] if before else None,
        state_before=judged_before[-1].state if judged_before else None,
        state_after=judged[-1].state if judged else None,
        flags_raised=tuple(f for f in now.flags if _inside(f.since, start, end)),
        flags_ended=tuple(f for f in now.flags if _ended_in(f, start, end)),
        flags_open=tuple(f for f in now.flags if f.state in OPEN_FLAGS),
        due=due_ahead(now, end),
        breaks=tuple(b for b in support.breaks if b.start <= end and (b.end is None or b.end > start)),
        hours_on_mask=support.hours_on_mask(start, end),
        leak=leak_figure(ctx, since=start + 1),
        events=_events(cut, start, end), told=_events_of(cut, _TOLD, start, end),
        told_before=_told_before(cut, now, start),
        recorded_late=_recorded_late(cut, start, end),
        began=support.start is not None and _inside(support.start, start, end),
        ended=support.end is not None and _inside(support.end, start, end),
        target=(ctx.target.low, ctx.target.high),
    )  # fmt: skip


def due_ahead(figures: EpisodeFigures, end: Instant) -> tuple[DueFigure, ...]:
    """What is open and falls due within 4 h of a shift's end, the earliest first."""
    items = (d for d in figures.due if d.state in _OPEN_DUE and d.due_from <= end + DUE_AHEAD)
    return tuple(sorted(items, key=lambda d: (d.due_until, d.what)))


def _inside(at: Instant, start: Instant, end: Instant) -> bool:
    return start < at <= end


def _steps(response: ResponseFigure) -> tuple[Step, ...]:
    return response.steps or (Step(response.anchor_at, response.anchor, None, None),)


def _ended_in(flag: FlagFigure, start: Instant, end: Instant) -> bool:
    """Whether a flag was settled or no longer met in the shift."""
    moments = (flag.ended_at, flag.settled_at)
    return any(at is not None and _inside(at, start, end) for at in moments)


def _other_changes(
    settings: SettingsInForce, responses: tuple[ResponseFigure, ...], start: Instant, end: Instant
) -> tuple[Step, ...]:
    """Changes of settings that no response lists: undone at once, or without any effect."""
    listed = {(s.at, s.channel) for r in responses for s in r.steps}
    moments = (at for at in settings.moments if _inside(at, start, end))
    steps = (s for at in moments for s in changed(at, settings.before(at), settings.at(at)))
    return tuple(s for s in steps if (s.at, s.channel) not in listed)


def _events(episode: Episode, start: Instant, end: Instant) -> tuple[Event, ...]:
    """Every event of the shift but calls and samples sent, by time."""
    keys = [k for k in episode.words if CHANNELS[k].group is Group.EVENT and k not in _NOT_EVENTS]
    found = [e for k in keys for e in _events_of(episode, k, start, end)]
    return tuple(sorted(found, key=lambda e: (e.at, e.channel)))


def _events_of(episode: Episode, channel: str, start: Instant, end: Instant) -> tuple[Event, ...]:
    words: Words = episode.text(channel)
    made = []
    for at, text, origin in zip(words.t, words.v, words.origin, strict=True):
        if _inside(int(at), start, end):
            by = episode.standing[int(origin)].entry.by if 0 <= origin < len(episode.standing) else ""
            made.append(Event(int(at), channel, text, by))
    return tuple(made)


def _told_before(episode: Episode, now: EpisodeFigures, start: Instant) -> tuple[Event, ...]:
    """The calls before a shift, made since the earliest of its open escalations and concerns began; where there is
    none of those, the newest call. Nothing where no such flag is open."""
    standing = [f.since for f in now.flags if f.state in OPEN_FLAGS and f.tier in _STRONG]
    if not standing:
        return ()
    earlier = _events_of(episode, _TOLD, episode.first_at - 1 if episode.first_at is not None else start, start)
    return tuple(e for e in earlier if e.at >= min(standing)) or earlier[-1:]


def _recorded_late(episode: Episode, start: Instant, end: Instant) -> int:
    """A line typed is of one moment: entries of several moments recorded at once came in a file's batch."""
    entries = [s.entry for s in episode.standing]
    moments: dict[Instant, set[Instant]] = {}
    for e in entries:
        moments.setdefault(e.recorded_at, set()).add(e.at)
    typed = (e for e in entries if len(moments[e.recorded_at]) == 1)
    return sum(_inside(e.at, start, end) and e.recorded_at - e.at > HOUR for e in typed)
