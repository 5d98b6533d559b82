"""Domain rules of the ledger: what an entry must satisfy whatever door it comes through."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from math import isfinite

from core.record.channels import CHANNELS, Channel, Group, Kind, channel
from core.record.entries import Action, NewEntry
from core.record.knowledge import REPLACING_ACTIONS, VALUE_ACTIONS
from core.record.message import RecordError, refuse
from core.record.reading import MAX_TEXT as MAX_WORDS
from core.record.reading import check_hard

EARLIEST = -2_208_988_800_000_000  # 1900-01-01
LATEST = 7_258_118_400_000_000  # 2200-01-01
MAX_TEXT = 8_000
"""Letters in one text: a row of such texts still fits a line of the log file."""
WITHDRAWN_WHOLE = "withdrawn with its whole file"
"""The reason on each entry of a file that was withdrawn whole."""
DEVICE_GROUPS = (Group.DEVICE, Group.VITAL)


@dataclass(frozen=True, slots=True)
class Replaced:
    """What a rule needs to know of the entry that another one replaces."""

    episode: str
    channel: str
    action: str = Action.ASSERT


Lookup = Callable[[str], Replaced | None]


def is_device_channel(key: str) -> bool:
    """Whether device samples may be kept for a channel: a numeric device or vital channel."""
    found = CHANNELS.get(key)
    return found is not None and found.kind is Kind.NUMBER and found.group in DEVICE_GROUPS


def check_entry(new: NewEntry, lookup: Lookup) -> None:
    """Refuse an entry that no ledger may hold.

    Raises:
        RecordError: `entry.*`, `channel.unknown`, `value.past_hard_limit`.
    """
    if not new.episode.strip():
        raise refuse("entry.no_episode", channel=new.channel, accepted="an episode's key")
    if not EARLIEST <= new.at < LATEST:
        raise refuse("entry.time_out_of_range", value=new.at, accepted="1900 to 2199")
    _check_texts(new)
    if new.number is not None and not isfinite(new.number):
        raise refuse("entry.not_finite", channel=new.channel, value=str(new.number), accepted="a finite number")
    if new.action in (Action.FLAG, Action.DUE):
        return
    known = channel(new.channel)
    if new.action in VALUE_ACTIONS:
        _check_value(known, new)
    if new.action in (Action.MASK, Action.SHIFT):
        _check_span(new)
    if new.action in REPLACING_ACTIONS:
        _check_replaced(new, lookup)


def _check_texts(new: NewEntry) -> None:
    for name in ("episode", "words", "raw", "raw_unit", "zone", "by", "note", "doubt", "reason", "source"):
        text = getattr(new, name)
        if not text:
            continue
        if len(text) > MAX_TEXT:
            raise refuse("entry.text_too_long", field=name, length=len(text), accepted=MAX_TEXT)
        if "\x00" in text or not (text.isascii() or _encodable(text)):
            raise refuse("entry.text_unreadable", field=name, accepted="Unicode text without NUL")


def _encodable(text: str) -> bool:
    try:
        text.encode("utf-8")
    except UnicodeEncodeError:
        return False
    return True


def _check_value(known: Channel, new: NewEntry) -> None:
    if new.words is not None and len(new.words) > MAX_WORDS:
        raise refuse("entry.text_too_long", field="words", length=len(new.words), accepted=MAX_WORDS)
    if known.kind is Kind.NUMBER:
        if new.number is None:
            raise refuse("entry.no_number", channel=known.key, accepted="a number")
        check_hard(known, new.number, f"{new.raw or new.number} {new.raw_unit}".strip())
    elif known.kind is Kind.INSTANT and new.number is None:
        raise refuse("entry.no_number", channel=known.key, accepted="an instant")
    elif known.kind in (Kind.CHOICE, Kind.TEXT) and not new.words:
        raise refuse("entry.no_words", channel=known.key, accepted="a text")
    elif known.kind is Kind.CHOICE and not known.open_choice and new.words not in known.choices:
        raise refuse("value.not_a_choice", channel=known.key, value=new.words, accepted=" | ".join(known.choices))


def _check_span(new: NewEntry) -> None:
    """A mask ends at `number`, a shift moves by `number`: both microseconds, exact in a float64."""
    if new.number is None or new.number != int(new.number):
        raise refuse("entry.no_span", action=new.action, accepted="whole microseconds in number")
    if not is_device_channel(new.channel):
        raise refuse("entry.not_a_device_channel", channel=new.channel, accepted="a numeric device or vital channel")
    if new.action is Action.MASK and new.number < new.at:
        raise refuse("entry.span_backwards", accepted="an end at or after the start")


def _check_replaced(new: NewEntry, lookup: Lookup) -> None:
    found = lookup(new.replaces) if new.replaces else None
    if found is None:
        raise refuse("entry.replaces_unknown", value=new.replaces, accepted="the id of an entry in the store")
    if found.channel != new.channel:
        raise refuse("entry.replaces_other_channel", channel=new.channel, value=found.channel,
                     accepted=found.channel)  # fmt: skip
    if found.action in (Action.MASK, Action.SHIFT) and new.action is not Action.WITHDRAW:
        raise refuse("entry.span_only_withdrawn", value=str(new.action), accepted=str(Action.WITHDRAW))
    if new.action is not Action.MOVE and found.episode != new.episode:
        raise refuse("entry.replaces_other_episode", value=new.episode, accepted=found.episode)


def problem(new: NewEntry, lookup: Lookup) -> RecordError | None:
    """The rule an entry breaks, or None."""
    try:
        check_entry(new, lookup)
    except RecordError as error:
        return error
    return None
