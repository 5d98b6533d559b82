"""The course of support as stretches of unchanged settings, ready to be drawn. It judges nothing.

Ribbon and lanes draw from the same stretches, so that the two can never tell different stories.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from math import isnan

from core.record.episode import Episode
from core.record.instant import MINUTE, Instant
from core.record.settings import Settings, SettingsInForce
from core.record.support import Break, SupportTime, support_time

SHOWN = ("mode", "ipap", "epap", "cpap", "fio2", "o2_flow", "rate_set", "ti", "interface")


@dataclass(frozen=True, slots=True)
class Stretch:
    """Settings in force from `start` to `end`; `changed` names what differs from the stretch before, with
    its value before. A change of this very moment lasts a minute, so that it is seen."""

    start: Instant
    end: Instant
    settings: Settings
    changed: Mapping[str, float | str | None]
    doubtful: bool = False


@dataclass(frozen=True, slots=True)
class Course:
    """Support from its first moment to `until`: stretches, and the breaks cut at `until`."""

    stretches: tuple[Stretch, ...]
    breaks: tuple[Break, ...]
    support: SupportTime
    in_force: SettingsInForce
    until: Instant

    def at(self, moment: Instant) -> Stretch | None:
        """The stretch in force at a moment, its own start included; None before the first and after the end."""
        found = next((s for s in reversed(self.stretches) if s.start <= moment), None)
        return found if found is not None and moment <= found.end else None


def course_of(episode: Episode, until: Instant) -> Course:
    """The course of an episode as of `until`."""
    cut = episode.until(until)
    in_force = SettingsInForce(cut)
    support = support_time(cut, in_force)
    end = until if support.end is None else min(support.end, until)
    return Course(_stretches(cut, in_force, end), support.breaks, support, in_force, until)


def _stretches(episode: Episode, in_force: SettingsInForce, end: Instant) -> tuple[Stretch, ...]:
    moments = [t for t in in_force.moments if t <= end]
    doubts = _doubtful_moments(episode)
    made: list[Stretch] = []
    before: Settings | None = None
    for i, t in enumerate(moments):
        now = in_force.at(t)
        changed = _changes(before, now)
        until = moments[i + 1] if i + 1 < len(moments) else max(end, t + MINUTE)
        if made and not changed:
            last = made[-1]
            made[-1] = Stretch(last.start, until, last.settings, last.changed, last.doubtful)
        else:
            made.append(Stretch(t, until, now, changed, t in doubts))
        before = now
    return tuple(made)


def _doubtful_moments(episode: Episode) -> set[Instant]:
    return {s.entry.at for s in episode.standing if s.entry.doubt and s.entry.channel in SHOWN}


def _changes(before: Settings | None, now: Settings) -> dict[str, float | str | None]:
    """What differs, with its value before (None: nothing was in force)."""
    found: dict[str, float | str | None] = {}
    for name in SHOWN:
        new = getattr(now, name)
        old = None if before is None else getattr(before, name)
        if not _same(old, new):
            found[name] = None if _absent(old) else old
    return found


def _absent(value: float | str | None) -> bool:
    return value is None or (isinstance(value, float) and isnan(value))


def _same(a: float | str | None, b: float | str | None) -> bool:
    return (_absent(a) and _absent(b)) or a == b
