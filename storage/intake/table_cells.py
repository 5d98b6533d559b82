"""One cell of a mapped table becomes a value: empty ones pass, formulas and doubtful decimal marks are refused."""

from __future__ import annotations

import re
from math import nan

from core.record.channels import Channel, Kind
from core.record.instant import parse
from core.record.message import RecordError, refuse
from core.record.reading import Reading, read_value
from storage.intake.coded_value import refuse_limit
from storage.intake.device_rows import read_device_value
from storage.intake.mapping import TimeUse
from storage.intake.table_times import read_time

ABSENT = frozenset({"", "-", "--", "---", "n/a", "na", "nan", "null", "none", ".", "?", "\N{EN DASH}", "\N{EM DASH}"})
"""What tables write where they have no value (common practice, no source)."""
_FORMULA = re.compile(r"[=@]|[+\-][^0-9.,\s].*[(!|]|[+\-][\d.,]+[-+*/].*[(!|]|\t|\r")


def is_absent(text: str) -> bool:
    """Whether a cell says that there is no value."""
    return text.casefold() in ABSENT


def read_cell(known: Channel, text: str, unit: str, decimal: str, time: TimeUse) -> Reading:
    """The value of a cell for a channel.

    Raises:
        RecordError: `value.formula`, `value.other_mark`, `value.comparator`, and as `read_value`.

    >>> from core.record.channels import channel
    >>> read_cell(channel("ph"), "7,40", "pH", ",", TimeUse()).raw
    '7,40'
    """
    if known.kind is Kind.NUMBER:
        check_mark(known, text, decimal)
        refuse_limit(known, text)
        return read_value(known, text, unit)
    if _FORMULA.match(text):
        raise refuse("value.formula", channel=known.key, value=text[:40], accepted="text that is no formula")
    if known.kind is Kind.INSTANT:
        at = read_time(text, time) if time.order else parse(text)
        return Reading(known, float(at), None, text, "", None)
    return read_value(known, text)


def check_mark(known: Channel, text: str, decimal: str) -> None:
    """Refuse a number with the mark that is not the table's decimal mark: 1,234 is one thing or another.

    Raises:
        RecordError: `value.other_mark`.
    """
    other = "," if decimal == "." else "."
    if other in text:
        accepted = f"{'a point' if decimal == '.' else 'a comma'} for decimals, no mark for thousands"
        raise refuse("value.other_mark", channel=known.key, value=text[:40], accepted=accepted)


def device_cell(known: Channel, text: str, unit: str, decimal: str) -> tuple[float, int] | None:
    """A device's value in the canonical unit and its decimals; NaN where there is none; None where it is refused."""
    text = text.strip()
    if is_absent(text):
        return (nan, 0)
    if ("," if decimal == "." else ".") in text:
        return None
    return read_device_value(known, text, unit)


def fault_of(known: Channel, text: str, unit: str, decimal: str) -> RecordError:
    """Why a device's value was refused."""
    try:
        read_cell(known, text, unit, decimal, TimeUse())
    except RecordError as error:
        return error
    return refuse("value.not_a_number", channel=known.key, value=text[:40], accepted="a number")
