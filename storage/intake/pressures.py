"""IPAP above EPAP, judged after all values of one moment over the settings in force."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import groupby

from core.record.entries import Entry
from core.record.instant import Instant
from core.record.knowledge import VALUE_ACTIONS, standing

ONE_PRESSURE_MODES = frozenset({"CPAP", "high-flow nasal", "off"})
_PRESSURES = ("ipap", "epap")


@dataclass(frozen=True, slots=True)
class Contradiction:
    """IPAP not above EPAP from a moment on. `seq` is the new entry to blame.

    `refused` where a new entry of that very moment makes it; otherwise a late entry contradicts what was
    already logged for later, which is worth a warning and no more.
    """

    at: Instant
    seq: int
    ipap: float
    epap: float
    refused: bool


def contradictions(entries: Sequence[Entry], first_new: int) -> list[Contradiction]:
    """The contradictions that entries with a sequence of `first_new` or more bring into an episode's record."""
    stated = [
        s.entry
        for s in standing(entries)
        if s.entry.action in VALUE_ACTIONS and s.entry.channel in (*_PRESSURES, "mode")
    ]
    stated.sort(key=lambda e: (e.at, e.seq))
    force: dict[str, Entry] = {}
    found: list[Contradiction] = []
    wrong_before = False
    for at, moment in groupby(stated, key=lambda e: e.at):
        now = list(moment)
        force.update({e.channel: e for e in now})
        wrong = _is_wrong(force)
        if wrong and (not wrong_before or _newest_pressure(now, first_new)):
            found += _blamed(at, now, force, first_new)
        wrong_before = wrong
    return found


def _is_wrong(force: dict[str, Entry]) -> bool:
    mode = force.get("mode")
    if mode is not None and mode.words in ONE_PRESSURE_MODES:
        return False
    ipap, epap = (force[k].number if k in force else None for k in _PRESSURES)
    return ipap is not None and epap is not None and ipap <= epap


def _newest_pressure(now: Sequence[Entry], first_new: int) -> Entry | None:
    new = [e for e in now if e.channel in _PRESSURES and e.seq >= first_new]
    return new[-1] if new else None


def _blamed(at: Instant, now: Sequence[Entry], force: dict[str, Entry], first_new: int) -> list[Contradiction]:
    ipap, epap = (force[k] for k in _PRESSURES)
    here = _newest_pressure(now, first_new)
    late = here or next((e for e in (*now, epap, ipap) if e.seq >= first_new), None)
    if late is None:
        return []  # the store had it before
    refused = here is not None and not _contradicted_later(here, ipap, epap)
    return [Contradiction(at, late.seq, ipap.number or 0.0, epap.number or 0.0, refused)]


def _contradicted_later(here: Entry, ipap: Entry, epap: Entry) -> bool:
    """Whether the other pressure was recorded after this one: then that was the late entry, and not this."""
    other = epap if here.channel == "ipap" else ipap
    return other.at < here.at and other.recorded_at > here.recorded_at
