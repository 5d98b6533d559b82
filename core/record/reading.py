"""A typed text becomes a value: number, unit, decimals, limits. Nothing is guessed in silence."""

from __future__ import annotations

import re
from dataclasses import dataclass
from math import isfinite

from core.record import instant
from core.record.channels import Channel, Kind
from core.record.message import Message, Value, refuse
from core.record.units import written

Scalar = float | str | None
MAX_TEXT = 4000

_NUMBER = re.compile(r"[+-]?\d+(?:[.,]\d+)?|[+-]?[.,]\d+")


@dataclass(frozen=True, slots=True)
class Reading:
    """A value as it will be kept.

    `number` is in the channel's canonical unit (an instant in microseconds for an instant channel);
    `words` holds a choice or a text. `raw`, `raw_unit` and `decimals` are what was typed.
    `doubts` are soft limits passed: to be confirmed by a person, else the entry is marked doubtful.
    """

    channel: Channel
    number: float | None
    words: str | None
    raw: str
    raw_unit: str
    decimals: int | None
    doubts: tuple[Message, ...] = ()

    @property
    def value(self) -> Scalar:
        """The value itself: a float, a text, or None for a bare event."""
        return self.number if self.number is not None else self.words


def read_value(channel: Channel, text: str, unit: str = "") -> Reading:
    """Read the text of a value for a channel.

    A decimal comma or point is taken. `fio2 35` with no unit is 35 %, `fio2 1` is 1.0.

    Raises:
        RecordError: `value.*` or `unit.*`, naming the value and what is accepted.

    >>> from core.record.channels import channel
    >>> read_value(channel("ph"), "7,40").decimals
    2
    >>> round(read_value(channel("paco2"), "8.0", "kPa").number, 1)
    60.0
    >>> read_value(channel("fio2"), "35").number
    0.35
    """
    text = text.strip()
    if len(text) > MAX_TEXT:
        raise refuse("value.too_long", channel=channel.key, length=len(text), accepted=MAX_TEXT)
    if channel.kind is Kind.NUMBER:
        return _read_number(channel, text, unit.strip())
    if unit.strip():
        raise refuse("unit.unknown", channel=channel.key, unit=unit, accepted="no unit")
    if channel.kind is Kind.MARK:
        return Reading(channel, None, text or None, text, "", None)
    if not text:
        raise refuse("value.missing", channel=channel.key, accepted=_accepted(channel))
    if channel.kind is Kind.INSTANT:
        return Reading(channel, float(instant.parse(text)), None, text, "", None)
    if channel.kind is Kind.CHOICE:
        return Reading(channel, None, _choice(channel, text), text, "", None)
    return Reading(channel, None, text, text, "", None)


def _choice(channel: Channel, text: str) -> str:
    for choice in channel.choices:
        if text.casefold() == choice.casefold():
            return choice
    if channel.open_choice:
        return text
    raise refuse("value.not_a_choice", channel=channel.key, value=text, accepted=_accepted(channel))


def _read_number(channel: Channel, text: str, unit_text: str) -> Reading:
    if not _NUMBER.fullmatch(text):
        raise refuse("value.not_a_number", channel=channel.key, value=text, accepted=_accepted(channel))
    plain = text.replace(",", ".")
    typed = float(plain)
    if not isfinite(typed):
        raise refuse("value.not_a_number", channel=channel.key, value=text, accepted=_accepted(channel))
    decimals = len(plain.partition(".")[2])
    unit = channel.unit_named(unit_text or _implied_unit(channel, typed))
    number = unit.to_canonical(typed)
    if unit.name == "%" and channel.unit == "fraction":
        number = typed / 100.0  # exact where x 0.01 is not: 35 % is 0.35
    check_hard(
        channel, number, f"{text} {written(unit.name)}".strip(), unit.name, _meant(channel, typed, text, unit.name)
    )
    return Reading(channel, number, None, text, unit.name, decimals, soft_doubts(channel, number, text, unit.name))


def _implied_unit(channel: Channel, typed: float) -> str:
    if channel.unit == "fraction" and typed > 1.0:
        return "%"
    return channel.unit


def _meant(channel: Channel, typed: float, text: str, unit: str) -> str | None:
    """The same figure in another unit of the channel, where that would be an ordinary value; None elsewhere."""
    low, high = channel.soft or channel.hard or (0.0, 0.0)
    for other in channel.units:
        if other.name != unit and written(other.name) and low <= other.to_canonical(typed) <= high:
            return f"{text} {written(other.name)}"
    return None


def check_hard(channel: Channel, number: float, shown: str, unit: str = "", meant: str | None = None) -> None:
    """Refuse a number outside the channel's hard limits, which are told in the unit that was typed. `meant`: the
    figure in another unit, where that is likelier.

    Raises:
        RecordError: `value.past_hard_limit` with the limits.
    """
    if channel.hard is None:
        return
    low, high = channel.hard
    slack = 1e-9 * max(1.0, abs(high))  # a unit's rounding must not refuse the limit itself
    if not low - slack <= number <= high + slack:
        raise refuse(
            "value.past_hard_limit",
            channel=channel.key, value=shown, low=low, high=high, unit=channel.unit, meant=meant,
            accepted=_accepted(channel, unit),
        )  # fmt: skip


def soft_doubts(channel: Channel, number: float, raw: str = "", raw_unit: str = "") -> tuple[Message, ...]:
    """The question to ask when a number is outside the soft limits; it tells the number as it was typed."""
    if channel.soft is None or channel.soft[0] <= number <= channel.soft[1]:
        return ()
    low, high = channel.soft
    values: dict[str, Value] = {
        "channel": channel.key,
        "value": number,
        "low": low,
        "high": high,
        "unit": channel.unit,
        "raw": raw,
        "raw_unit": raw_unit,
    }
    return (Message("doubt.unusual", values),)


def _accepted(channel: Channel, typed: str = "") -> str:
    if channel.kind is Kind.CHOICE:
        return " | ".join(channel.choices)
    if channel.kind is Kind.INSTANT:
        return "ISO 8601 with offset, e.g. 2026-03-28T02:10+00:00"
    if channel.kind is Kind.NUMBER:
        unit = next((u for u in channel.units if u.name == typed), None)
        shown = typed if unit is not None else channel.unit
        others = [_named(u.name) for u in channel.units if u.name != shown]
        units = f", or {' or '.join(others)}" if others else ""
        ends = (
            () if channel.hard is None else channel.hard if unit is None else map(unit.from_canonical, channel.hard)
        )
        low_high = " to ".join(f"{end:.4g}" for end in sorted(ends))
        return f"a number{f', {low_high}' if low_high else ''} {written(shown)}".rstrip() + units
    return "text"


def _named(unit: str) -> str:
    """A unit as another way to say a figure: in kPa, as a fraction."""
    return f"in {written(unit)}" if written(unit) else f"as a {unit}" if unit == "fraction" else f"as {unit}"
