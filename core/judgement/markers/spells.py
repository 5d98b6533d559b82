"""Spells: from when until when a marker was met, and on what that rests."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass, replace

import numpy as np

from core.record.instant import Instant
from core.record.message import Message
from core.record.samples import Flags, Times

Evidence = tuple[Message, ...]
Told = Evidence | Callable[[], Evidence]
"""Evidence, or what makes it: only the newest of a spell is ever made."""


@dataclass(frozen=True, slots=True)
class Spell:
    """A time in which a marker was met: from `since` to `until`, None while it is met."""

    since: Instant
    until: Instant | None
    evidence: Evidence
    outside_population: bool = False


@dataclass(frozen=True, slots=True)
class Point:
    """What one moment says of a marker: met, not met, or None where it says nothing either way."""

    at: Instant
    met: bool | None
    evidence: Told = ()
    outside_population: bool = False


def from_points(points: Iterable[Point]) -> list[Spell]:
    """Spells of a marker that is judged at moments, in order of time.

    A spell lasts until a moment says that it is not met: silence ends nothing. Its evidence is that of the newest
    moment at which it was met.

    >>> [(s.since, s.until) for s in from_points([Point(1, True), Point(2, None), Point(3, False), Point(4, True)])]
    [(1, 3), (4, None)]
    """
    spells: list[Spell] = []
    since: Instant | None = None
    last: Point | None = None
    for point in points:
        if point.met:
            since = point.at if since is None else since
            last = point
        elif point.met is False and since is not None and last is not None:
            spells.append(_spell(since, point.at, last))
            since = None
    if since is not None and last is not None:
        spells.append(_spell(since, None, last))
    return spells


def _spell(since: Instant, until: Instant | None, last: Point) -> Spell:
    evidence = last.evidence() if callable(last.evidence) else last.evidence
    return Spell(since, until, evidence, last.outside_population)


def from_runs(t: Times, met: Flags, evidence: Callable[[int, int], Evidence]) -> list[Spell]:
    """Spells of a marker judged at every sample, shapes (n,). `evidence(first, last)` gets the run's indices.

    >>> found = from_runs(np.array([1, 2, 3, 4]), np.array([False, True, True, False]), lambda a, b: ())
    >>> [(s.since, s.until) for s in found]
    [(2, 4)]
    """
    edges = np.flatnonzero(np.diff(np.concatenate(([False], met, [False])).astype(np.int8)))
    return [
        Spell(int(t[a]), int(t[b]) if b < t.size else None, evidence(a, b - 1))
        for a, b in edges.reshape(-1, 2).tolist()
    ]


def held(on: Flags, off: Flags) -> Flags:
    """True from a sample that switches on until one that switches off, shapes (n,): hysteresis.

    >>> held(np.array([False, True, False, False]), np.array([False, False, False, True])).tolist()
    [False, True, True, False]
    """
    events = np.where(on, 1, np.where(off, 0, -1))
    last = np.maximum.accumulate(np.where(events >= 0, np.arange(events.size), -1))
    return np.asarray((last >= 0) & (events[np.maximum(last, 0)] == 1))


def united(spells: Iterable[Spell]) -> list[Spell]:
    """Spells from several sources as one sequence: overlapping ones are one, with the evidence of the newest."""
    out: list[Spell] = []
    for spell in sorted(spells, key=lambda s: s.since):
        if out and (out[-1].until is None or spell.since <= out[-1].until):
            before = out.pop()
            open_ended = before.until is None or spell.until is None
            until = None if open_ended else max(before.until or 0, spell.until or 0)
            evidence = spell.evidence if before.evidence == () or spell.until is None else before.evidence
            out.append(Spell(before.since, until, evidence, before.outside_population and spell.outside_population))
        else:
            out.append(spell)
    return out


def without_flicker(spells: Iterable[Spell], gap: int, as_of: Instant) -> list[Spell]:
    """Spells less than `gap` microseconds apart are one; one that ended less than that ago is still open.

    >>> [(s.since, s.until) for s in without_flicker([Spell(0, 5, ()), Spell(8, 20, ())], 5, 40)]
    [(0, 20)]
    >>> without_flicker([Spell(0, 5, ())], 5, 8)[0].until is None
    True
    """
    out: list[Spell] = []
    for spell in sorted(spells, key=lambda s: s.since):
        last = out[-1] if out else None
        if last is not None and (last.until is None or spell.since - last.until < gap):
            out[-1] = replace(spell, since=last.since)
        else:
            out.append(spell)
    if out and out[-1].until is not None and as_of - out[-1].until < gap:
        out[-1] = replace(out[-1], until=None)
    return out


def clipped(spells: Iterable[Spell], start: Instant | None, end: Instant | None) -> list[Spell]:
    """The part of the spells between two moments; nothing where there is no start."""
    if start is None:
        return []
    out: list[Spell] = []
    for spell in spells:
        since = max(spell.since, start)
        until = spell.until if end is None else end if spell.until is None else min(spell.until, end)
        if until is None or since < until:
            out.append(replace(spell, since=since, until=until))
    return out


def within_any(spells: Sequence[Spell], at: Instant) -> bool:
    """Whether a moment lies in one of the spells."""
    return any(s.since <= at and (s.until is None or at < s.until) for s in spells)
