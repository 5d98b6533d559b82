"""Reads a column of instants at once: the plain form of ISO 8601, `2026-03-28T02:10:00+01:00` or `...Z`."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from core.record.instant import parse
from core.record.samples import Flags, Times
from storage.intake.byte_fields import Bytes, Offsets

_SHAPE = b"dddd-dd-ddTdd:dd:dd"
_DAYS = np.array([0, 31, 28, 31, 30, 31, 30, 31, 31, 30, 31, 30, 31])
_EARLIEST, _LATEST = parse("1990-01-01T00:00:00Z"), parse("2099-12-31T23:59:59Z")


def read_instants(data: Bytes, start: Offsets, length: Offsets) -> tuple[Times, Flags]:
    """Instants at offsets `start`, shape (n,), and which of them could be read; the rest need a slower look.

    `data` must go on for 32 bytes behind the last offset.
    """
    ok = ((length == 25) | (length == 20)).astype(np.bool_)
    digits: list[NDArray[np.int64]] = []
    for place, want in enumerate(_SHAPE):
        char = data[start + place]
        if want == ord("d"):
            digits.append(char.astype(np.int64) - 48)
            ok &= (char >= 48) & (char <= 57)
        else:
            ok &= char == want
    two = [digits[i] * 10 + digits[i + 1] for i in range(0, 14, 2)]
    year, (month, day, hour, minute, second) = two[0] * 100 + two[1], two[2:]
    ok &= (month >= 1) & (month <= 12) & (hour < 24) & (minute < 60) & (second < 60)
    leap = (year % 4 == 0) & ((year % 100 != 0) | (year % 400 == 0))
    longest = _DAYS[np.where(ok, month, 1)] + (leap & (month == 2))
    ok &= (day >= 1) & (day <= longest)
    offset, offset_ok = _offsets(data, start + 19, length)
    seconds = _days(year, month, day) * 86_400 + hour * 3_600 + minute * 60 + second - offset
    t = seconds * 1_000_000
    return t, ok & offset_ok & (t >= _EARLIEST) & (t <= _LATEST)


def _offsets(data: Bytes, start: Offsets, length: Offsets) -> tuple[NDArray[np.int64], Flags]:
    """Offsets from UTC in seconds: `Z` or `+HH:MM`."""
    sign = data[start]
    zulu = (length == 20) & (sign == ord("Z"))
    h1, h2, colon, m1, m2 = (data[start + k].astype(np.int64) for k in range(1, 6))
    hours, minutes = (h1 - 48) * 10 + h2 - 48, (m1 - 48) * 10 + m2 - 48
    digits = np.ones(start.shape, np.bool_)
    for char in (h1, h2, m1, m2):
        digits &= (char >= 48) & (char <= 57)
    signed = (sign == ord("+")) | (sign == ord("-"))
    full = (length == 25) & signed & digits & (colon == ord(":")) & (hours < 24) & (minutes < 60)
    seconds = (hours * 60 + minutes) * 60 * np.where(sign == ord("-"), -1, 1)
    return np.where(full, seconds, 0), zulu | full


def _days(year: NDArray[np.int64], month: NDArray[np.int64], day: NDArray[np.int64]) -> NDArray[np.int64]:
    """Days since 1970-01-01 of dates of the Gregorian calendar; years start in March, so that leap days end them."""
    y = year - (month <= 2)
    since_march = (month + 9) % 12
    day_of_year = (153 * since_march + 2) // 5 + day - 1
    day_of_400 = (y % 400) * 365 + (y % 400) // 4 - (y % 400) // 100 + day_of_year
    return y // 400 * 146_097 + day_of_400 - 719_468
