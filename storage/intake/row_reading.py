"""Reads one row of the log file: every column that is wrong is reported, nothing is guessed."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace
from functools import lru_cache
from math import isfinite
from typing import TypeVar
from uuid import NAMESPACE_URL, UUID, uuid5

from core.record import instant
from core.record.channels import LEAK_DEFINITIONS, Channel, Kind, channel
from core.record.entries import Action, NewEntry, from_reading
from core.record.instant import Instant
from core.record.knowledge import REPLACING_ACTIONS
from core.record.message import Message, RecordError, refuse
from core.record.reading import read_value
from storage.apostrophe import unguarded
from storage.draft_batch import DraftEntry
from storage.intake.device_rows import read_device_value
from storage.intake.findings import CLOCK_LEAD, Findings
from storage.rules import is_device_channel

ACTIONS = ("assert", "correct", "withdraw", "move", "mask", "shift")
_BY_DEVICE = "device"
_MAX_KEY = 200
_DECIMALS_OF_SHIFT = 6
T = TypeVar("T")


@dataclass(frozen=True, slots=True)
class SampleRow:
    """A row that a machine wrote: one device sample, with its remark as an entry of its own where it has one."""

    line: int
    episode: str
    channel: Channel
    unit: str
    definition: str
    at: Instant
    value: float
    decimals: int
    remark: DraftEntry | None = None


@dataclass(frozen=True, slots=True)
class EntryRow:
    """A row that becomes an entry. `definition` is what a leak row says of its leak."""

    line: int
    draft: DraftEntry
    definition: str = ""
    doubts: tuple[Message, ...] = ()


class RowReader:
    """Reads rows against the clock `now`; what is wrong goes to `findings`."""

    def __init__(self, now: Instant, findings: Findings) -> None:
        self._now, self._findings = now, findings

    def read(self, row: dict[str, str], line: int) -> SampleRow | EntryRow | None:
        """One row, or None where anything in it is refused: all its faults are noted, not the first alone."""
        one = _Row(row, line, self._findings)
        at = one.column("at", lambda: self._instant(row["at"]))
        episode = one.column("episode", lambda: _key(row["episode"]))
        known = one.column("channel", lambda: channel(row["channel"]))
        action = one.column("action", lambda: _action(row["action"]))
        zone = one.column("zone", lambda: _zone(row["zone"]))
        definition = one.column("leak_definition", lambda: _definition(row["leak_definition"]))
        recorded = one.column("recorded_at", lambda: self._recorded(row["recorded_at"]))
        if known is None or action is None:
            return None
        if row["by"] == _BY_DEVICE and is_device_channel(known.key) and action not in (Action.MASK, Action.SHIFT):
            one.column("action", lambda: _plain_device_row(row, action))
            value = one.column("value", lambda: _device_value(known, row["value"], row["unit"]))
            if one.bad or at is None or episode is None or value is None:
                return None
            remark = self._remark(row, episode, at)
            return SampleRow(line, episode, known, row["unit"], definition or "", at, value[0], value[1], remark)
        column = "replaces" if action in REPLACING_ACTIONS and not row["replaces"] else "value"
        made = one.column(column, lambda: _entry(known, action, row, episode or "?", at or 0))
        if one.bad or made is None:
            return None
        new, doubts = made
        entry = replace(new, by=row["by"], zone=zone or "UTC", note=row["note"], action=action,
                        replaces=_entry_id(row["replaces"]), reason=row["reason"])  # fmt: skip
        draft = DraftEntry(entry, _entry_id(row["id"]), recorded or None)
        leak = definition or "" if known.key == "leak" else ""
        return EntryRow(line, draft, leak, doubts)

    def _instant(self, text: str) -> Instant:
        at = instant.parse(text)
        if at > self._now + CLOCK_LEAD:
            raise refuse("instant.in_future", value=text, now=instant.iso_second(self._now),
                         accepted="at most 5 min ahead of the clock")  # fmt: skip
        return at

    def _recorded(self, text: str) -> Instant:
        return self._instant(text) if text else 0

    @staticmethod
    def _remark(row: dict[str, str], episode: str, at: Instant) -> DraftEntry | None:
        """A device sample keeps no remark, so that a remark becomes a note of the same moment."""
        if not row["note"]:
            return None
        return DraftEntry(NewEntry(episode, "note", at, words=row["note"], raw=row["note"], by=row["by"]))


class _Row:
    """One row while it is read."""

    def __init__(self, row: dict[str, str], line: int, findings: Findings) -> None:
        self._row, self._line, self._findings = row, line, findings
        self.bad = False

    def column(self, name: str, make: Callable[[], T]) -> T | None:
        """What a column says, or None with its fault noted."""
        try:
            return make()
        except RecordError as error:
            column = "unit" if error.message.key == "unit.unknown" else name
            self._findings.refuse(self._line, column, self._row[column], error.message)
            self.bad = True
            return None


def _key(text: str) -> str:
    if not text or len(text) > _MAX_KEY:
        raise refuse("entry.no_episode", value=text[:80], accepted=f"an episode's key, 1 to {_MAX_KEY} letters")
    return text


def _action(text: str) -> Action:
    if not text:
        return Action.ASSERT
    if text not in ACTIONS:
        raise refuse("row.unknown_action", value=text[:80], accepted=" | ".join(ACTIONS))
    return Action(text)


@lru_cache(maxsize=64)
def _zone(text: str) -> str:
    if not text:
        return "UTC"
    from zoneinfo import ZoneInfo

    try:
        return ZoneInfo(text).key
    except (OSError, ValueError, KeyError):
        raise refuse("row.unknown_zone", value=text[:80], accepted="a time zone, e.g. Europe/Oslo") from None


def _definition(text: str) -> str:
    if text and text not in LEAK_DEFINITIONS:
        raise refuse("value.not_a_choice", channel="leak_definition", value=text[:80],
                     accepted=" | ".join(LEAK_DEFINITIONS))  # fmt: skip
    return text


def _device_value(known: Channel, text: str, unit: str) -> tuple[float, int]:
    value = read_device_value(known, text, unit)
    if value is None:
        read_value(known, text, unit)  # raises what is wrong
        raise refuse("value.not_a_number", channel=known.key, value=text[:80], accepted="a number")
    return value


def _plain_device_row(row: dict[str, str], action: Action) -> None:
    """Device samples have no ids: a span of them is corrected by mask or shift."""
    if action is not Action.ASSERT or row["id"] or row["replaces"]:
        raise refuse("row.device_entry", value=str(action), accepted="mask or shift")


def _entry(
    known: Channel, action: Action, row: dict[str, str], episode: str, at: Instant
) -> tuple[NewEntry, tuple[Message, ...]]:
    """The entry of a row by what it does, and what is doubtful about its value."""
    if action in REPLACING_ACTIONS and not row["replaces"]:
        raise refuse("entry.replaces_unknown", value="", accepted="the id of an entry")
    if action is Action.WITHDRAW:
        return NewEntry(episode, known.key, at, raw=row["value"]), ()
    if action in (Action.MASK, Action.SHIFT):
        return NewEntry(episode, known.key, at, _span(action, row["value"], at), raw=row["value"]), ()
    text = row["value"] if known.kind in (Kind.NUMBER, Kind.INSTANT) else unguarded(row["value"])
    reading = read_value(known, text, row["unit"])
    return from_reading(episode, at, reading), reading.doubts


def _span(action: Action, text: str, at: Instant) -> float:
    """The end of a mask, as an instant; how far a shift moves, in seconds. Both kept as microseconds."""
    if action is Action.MASK:
        end = instant.parse(text)
        if end < at:
            raise refuse("entry.span_backwards", value=text, accepted="an end at or after the start")
        return float(end)
    try:
        seconds = float(text)
    except ValueError:
        seconds = float("nan")
    if not isfinite(seconds) or abs(seconds) > 400 * 86_400:
        raise refuse("entry.no_span", value=text[:80], accepted="seconds, to 400 days")
    return float(round(seconds * 10**_DECIMALS_OF_SHIFT))


def _entry_id(text: str) -> str:
    """An id as a UUID. One that is none is given the same UUID wherever it stands, so that rows still find it."""
    if not text:
        return ""
    try:
        return str(UUID(text))
    except ValueError:
        return str(uuid5(NAMESPACE_URL, f"luffmark:entry:{text}"))
