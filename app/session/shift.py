"""Which shift a moment belongs to, by the wall times at which shifts begin."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from datetime import date, time, timedelta
from typing import Final

from core.record.instant import HOUR, Instant
from core.record.local_time import candidates, local

STARTS: Final = ("07:30", "19:30")
"""Two shifts of 12 hours; a ward sets its own."""


@dataclass(frozen=True, slots=True)
class Shift:
    """A shift from `start` to `end`; `night` where it began in the afternoon or evening and ends next day."""

    start: Instant
    end: Instant
    night: bool


MOST_STARTS: Final = 6


def read_starts(text: str) -> tuple[str, ...] | None:
    """The times of day at which shifts begin, in order; None where the text names none, too many or no time.

    >>> read_starts("19:30, 7:30"), read_starts("25:00"), read_starts("")
    (('07:30', '19:30'), None, None)
    """
    found = set()
    for word in text.replace(",", " ").replace(";", " ").split():
        hour, _, minute = word.replace(".", ":").partition(":")
        if not (hour.isdigit() and minute.isdigit() and int(hour) < 24 and int(minute) < 60):
            return None
        found.add(f"{int(hour):02d}:{int(minute):02d}")
    return tuple(sorted(found)) if 1 <= len(found) <= MOST_STARTS else None


def shift_of(moment: Instant, zone: str, starts: Sequence[str] = STARTS) -> Shift:
    """The shift that a moment lies in. A start that the clock skips begins at the next hour it shows.

    >>> from core.record.instant import parse, iso
    >>> iso(shift_of(parse("2026-03-28T05:30:00Z"), "UTC").start)
    '2026-03-27T19:30:00+00:00'
    """
    today = local(moment, zone).date()
    begins = sorted({_begin(today + timedelta(days=d), text, zone) for d in (-1, 0, 1, 2) for text in starts})
    start = max(b for b in begins if b <= moment)
    end = min(b for b in begins if b > moment)
    return Shift(start, end, local(start, zone).date() != local(end, zone).date())


def _begin(day: date, text: str, zone: str) -> Instant:
    hour, minute = (int(part) for part in text.split(":"))
    for later in range(3):
        found = candidates(day, time((hour + later) % 24, minute), zone)
        if found:
            return found[0]
    return candidates(day, time(12, 0), zone)[0] + (hour - 12) * HOUR
