"""Sampled data of FHIR: many values of one channel at even steps, as device samples."""

from __future__ import annotations

from math import nan

import numpy as np

from core.record.channels import Channel
from core.record.instant import Instant
from core.record.message import refuse
from core.record.samples import Times, Values
from storage.codes import UCUM
from storage.intake.coded_value import unit_name
from storage.intake.device_rows import read_device_value
from storage.intake.fhir_json import Json, child, text
from storage.rules import is_device_channel

_ACCEPTED = "one dimension, origin 0, no factor, a period in ms"


def sampled_points(sampled: Json, channel: Channel, start: Instant) -> tuple[str, Times, Values, int]:
    """Unit, times (int64 us UTC), values in the canonical unit, shapes (n,), and decimals as written.

    `E` (no value could be had) is NaN; `U` and `L` (beyond what can be measured) are refused, since a limit is no
    value.

    Raises:
        RecordError: `sampled.*`, `unit.*`, `value.*`.
    """
    if not is_device_channel(channel.key):
        raise refuse("entry.not_a_device_channel", channel=channel.key, accepted="a numeric device or vital channel")
    origin = child(sampled, "origin")
    plain = text(sampled, "factor") in ("", "1", "1.0") and text(sampled, "dimensions") == "1"
    step = _microseconds(text(sampled, "period"))
    if not plain or step is None or float(text(origin, "value") or "nan") != 0:
        raise refuse("sampled.unreadable", channel=channel.key, accepted=_ACCEPTED)
    is_ucum = text(origin, "system") == UCUM
    code = text(origin, "code") if is_ucum else ""
    if not code and len(channel.units) > 1:
        raise refuse("unit.missing", channel=channel.key, value="", accepted=", ".join(u.name for u in channel.units))
    unit = unit_name(channel, code, is_ucum=is_ucum) if code else channel.unit
    read = [_point(channel, word, unit) for word in text(sampled, "data").split()]
    t = start + step * np.arange(len(read), dtype=np.int64)
    return unit, t, np.array([n for n, _ in read]), max((d for _, d in read), default=0)


def _microseconds(period: str) -> int | None:
    from decimal import Decimal, InvalidOperation

    try:
        step = Decimal(period) * 1000
        return int(step) if step == int(step) and 0 < step < 10**12 else None
    except (InvalidOperation, ValueError, OverflowError):
        return None


def _point(channel: Channel, word: str, unit: str) -> tuple[float, int]:
    if word == "E":
        return nan, 0
    found = read_device_value(channel, word, unit)
    if found is None:
        raise refuse("value.not_a_number", channel=channel.key, value=word[:40], accepted="a number, or E")
    return found
