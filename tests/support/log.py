"""Entries and episodes from a few lines of log, for tests: `02:10 ph 7.25 paco2 68`.

Each line is a time of day (of 28 March 2026, UTC, or of the 27th with a leading `-`), then the log strip's grammar.
Lines are recorded when they happen, in order, unless told otherwise.
"""

from __future__ import annotations

from collections.abc import Iterable
from uuid import UUID

import numpy as np

from core.record.entries import Entry, recorded
from core.record.episode import Episode, build_episode
from core.record.instant import DAY, Instant, parse
from core.record.knowledge import standing
from core.record.log_line import read_line
from core.record.samples import DeviceSamples
from core.record.settings import Settings

NAN = float("nan")
NO_SETTINGS = Settings(None, NAN, NAN, NAN, NAN, NAN, NAN, NAN, None)
MIDNIGHT = parse("2026-03-28T00:00:00+00:00")


def moment(text: str) -> Instant:
    """The instant of `HH:MM` on 28 March 2026, or of `-HH:MM` on the 27th, UTC."""
    back = text.startswith("-")
    hours, minutes = text.removeprefix("-").split(":")
    return MIDNIGHT + (int(hours) * 60 + int(minutes)) * 60_000_000 - (DAY if back else 0)


def entries(log: str, key: str = "E1", by: str = "AB") -> list[Entry]:
    """The ledger's entries of a log, one for every value, in order of their lines."""
    out: list[Entry] = []
    for line in log.strip().splitlines():
        clock, _, rest = line.strip().partition(" ")
        if not clock or clock.startswith("#"):
            continue
        at = moment(clock)
        read = read_line(rest, now=at, zone="UTC", in_force=NO_SETTINGS)
        for new in read.entries(key, by=by, zone="UTC", confirmed=True):
            seq = len(out) + 1
            out.append(recorded(new, seq, str(UUID(int=seq)), at))
    return out


def episode(log: str, key: str = "E1", samples: Iterable[DeviceSamples] = ()) -> Episode:
    """The episode that a log makes."""
    return build_episode(key, standing(entries(log, key)), samples)


def device(channel: str, start: str, values: Iterable[float], every_s: int = 60, key: str = "E1") -> DeviceSamples:
    """Device samples from a time of day on, one every `every_s` seconds."""
    v = np.array(list(values), np.float64)
    t = moment(start) + np.arange(v.size, dtype=np.int64) * every_s * 1_000_000
    return DeviceSamples(key, channel, "device", t, v)
