"""The times of a block of rows at once: digits by their place, the zone by the hour, a minute once.

What is not written in one of the plain forms is left for `table_times`, which reads one by one; both ways give the
same instants, and a test holds them equal.
"""

from __future__ import annotations

from datetime import UTC, datetime, timedelta
from functools import lru_cache

import numpy as np
from numpy.typing import NDArray

from core.record.instant import DAY, HOUR, MINUTE, from_datetime
from core.record.message import RecordError
from core.record.samples import Flags, Times
from storage.intake.byte_fields import ByteFields, Bytes, Offsets
from storage.intake.distinct import kinds
from storage.intake.mapping import TimeUse
from storage.intake.number_columns import plain_digits
from storage.intake.table_times import PATTERNS, moment_of
from storage.intake.wall_times import EARLIEST, LATEST, instant_of

_EPOCHS = {"epoch_s": 6, "epoch_ms": 3}
_FORMS = 8
"""Forms tried in one block: `9:05` and `10:05` are two of them."""
_LONGEST = 40
_WORTH = 4
"""Rows in a minute from which it pays to read the minute once."""


def read_times(fields: ByteFields, date: int, clock: int | None, rows: Offsets, use: TimeUse) -> tuple[Times, Flags]:
    """Instants of rows, shape (n,), by the column of their time (or of date and clock), and which could be read."""
    if use.order in _EPOCHS:
        return _since_1970(fields, date, rows, _EPOCHS[use.order])
    t, good = np.zeros(rows.size, np.int64), np.zeros(rows.size, np.bool_)
    open_ = np.arange(rows.size)
    for _ in range(_FORMS):
        if open_.size == 0:
            break
        form = _form(fields, date, clock, int(rows[open_[0]]), use.order)
        if form is None:
            open_ = open_[1:]
            continue
        alike = form.places(fields, date, clock, rows[open_])
        of_form = open_[alike]
        table = form.table(fields, date, clock, rows[of_form])
        found, fits, reads = _read(table, form, use)
        t[of_form], good[of_form] = found, reads
        left = np.ones(open_.size, np.bool_)
        left[alike[fits]] = False
        left[0] = False  # whatever it is, it is not tried again
        open_ = open_[left]
    return t, good


def _since_1970(fields: ByteFields, date: int, rows: Offsets, decimals: int) -> tuple[Times, Flags]:
    """Seconds (six decimals to a microsecond) or milliseconds (three) since 1970, without rounding."""
    length = fields.length[date, rows]
    total, behind = plain_digits(fields.table(date, 2, rows), length, ord("."))
    good = (behind >= 0) & (behind <= decimals)
    t = np.where(good, total, 0) * 10 ** np.where(good, decimals - behind, 0)
    return t, good & (t >= EARLIEST) & (t <= LATEST)


class _Form:
    """One way in which times are written: where each part stands, and what marks stand between."""

    def __init__(self, date: str, clock: str | None, spans: dict[str, tuple[int, int]], offset: int | None) -> None:
        self._date, self._clock, self.spans, self.offset = date, clock, spans, offset
        self._day = date if clock is None else date.split(" ", maxsplit=1)[0]
        text = date if clock is None else f"{self._day} {clock}"
        taken = {i for start, end in spans.values() for i in range(start, end)}
        self.size = len(text)
        self.digits = np.array(sorted(taken))
        self.marks = np.array([i for i in range(len(text)) if i not in taken], np.int64)
        self.mark_bytes = np.array([ord(text[i]) for i in self.marks], np.uint8)
        loose = {i for name in ("second", "fraction") for i in range(*spans.get(name, (0, 0)))}
        self.minute = np.array([i for i in range(len(text)) if i not in loose])
        self.loose = np.array(sorted(loose), np.int64)

    def places(self, fields: ByteFields, date: int, clock: int | None, rows: Offsets) -> Offsets:
        """The rows whose fields are as long as those of the form."""
        alike = fields.length[date, rows] == len(self._date)
        if clock is not None and self._clock is not None:
            alike &= fields.length[clock, rows] == len(self._clock)
        return np.flatnonzero(alike)

    def table(self, fields: ByteFields, date: int, clock: int | None, rows: Offsets) -> Bytes:
        """Their bytes, shape (n, size), date and clock put together."""
        dates = fields.table(date, (len(self._date) + 7) // 8, rows)
        if clock is None or self._clock is None:
            return dates
        made = np.full((rows.size, self.size), 32, np.uint8)
        made[:, : len(self._day)] = dates[:, : len(self._day)]
        clocks = fields.table(clock, (len(self._clock) + 7) // 8, rows)
        made[:, len(self._day) + 1 :] = clocks[:, : len(self._clock)]
        if len(self._date) > len(self._day):  # a date with midnight behind it
            made[dates[:, len(self._day)] != 32, 0] = 0
        return made


def _form(fields: ByteFields, date: int, clock: int | None, row: int, order: str) -> _Form | None:
    texts = [fields.text(row, c) for c in (date, clock) if c is not None]
    if any(not x.isascii() or len(x) > _LONGEST for x in texts):
        return None
    return _form_of(texts[0], texts[1] if clock is not None else None, order)


@lru_cache(maxsize=64)
def _form_of(date: str, clock: str | None, order: str) -> _Form | None:
    text = date if clock is None else f"{date.split(' ', maxsplit=1)[0]} {clock}"
    pattern = PATTERNS.get(order)
    found = pattern.fullmatch(text) if pattern is not None else None
    if found is None or found["half"] or found.groupdict().get("name"):
        return None
    names = ("year", "month", "day", "hour", "minute", "second", "fraction")
    spans = {name: found.span(name) for name in names if found[name] is not None}
    if spans["year"][1] - spans["year"][0] != 4:
        return None
    offset: int | None = None
    if found["offset"]:
        try:
            delta = moment_of(text, order).utcoffset()
        except RecordError:
            return None
        offset = int(delta.total_seconds()) * 1_000_000 if delta is not None else None
    return _Form(date, clock, spans, offset)


def _read(table: Bytes, form: _Form, use: TimeUse) -> tuple[Times, Offsets, Flags]:
    """Instants of rows of one form; the places of those that are of the form, and which can be read."""
    new = _new_minutes(table, form)
    which = None if new.size * _WORTH > table.shape[0] else _which(new, table.shape[0])
    some = table if which is None else table[new]
    digits = some[:, form.digits]
    fits = ((digits >= 48) & (digits <= 57)).all(axis=1) & (some[:, form.marks] == form.mark_bytes).all(axis=1)
    wall, real = _wall(some, form)
    t, good = (wall - form.offset, fits & real) if form.offset is not None else _zoned(wall, fits & real, use)
    if which is None:
        return t, np.flatnonzero(fits), good
    t, good, fits = t[which], good[which], fits[which]
    own = table[:, form.loose]
    plain = ((own >= 48) & (own <= 57)).all(axis=1)
    seconds = _loose(table, form)
    t += seconds - seconds[new][which]
    return t, np.flatnonzero(fits & plain), good & plain & (seconds < 60_000_000)


def _new_minutes(table: Bytes, form: _Form) -> Offsets:
    """The rows whose minute is another than that of the row before."""
    if table.shape[0] < 2 or form.loose.size == 0:
        return np.arange(table.shape[0])
    width = table.shape[1]
    mask = np.zeros(-(-width // 8) * 8, np.uint8)
    mask[form.minute] = 255
    if width % 8:
        padded = np.zeros((table.shape[0], mask.size), np.uint8)
        padded[:, :width] = table
        table = padded
    words = np.ascontiguousarray(table).view(np.uint64) & mask.view(np.uint64)
    new = np.ones(table.shape[0], np.bool_)
    new[1:] = words[1:, 0] != words[:-1, 0]
    for part in range(1, words.shape[1]):
        new[1:] |= words[1:, part] != words[:-1, part]
    return np.flatnonzero(new)


def _which(new: Offsets, count: int) -> Offsets:
    """For each row the place of its minute's first row in `new`."""
    starts = np.zeros(count, np.int64)
    starts[new[1:]] = 1
    return np.cumsum(starts)


def _part(table: Bytes, span: tuple[int, int]) -> NDArray[np.int64]:
    value = np.zeros(table.shape[0], np.int64)
    for place in range(*span):
        value = value * 10 + (table[:, place].astype(np.int64) - 48)
    return value


def _loose(table: Bytes, form: _Form) -> Times:
    """Seconds and their fraction, in microseconds."""
    made = _part(table, form.spans.get("second", (0, 0))) * 1_000_000
    if "fraction" in form.spans:
        start, end = form.spans["fraction"]
        end = min(end, start + 6)
        made += _part(table, (start, end)) * 10 ** (6 - (end - start))
    return made


def _wall(table: Bytes, form: _Form) -> tuple[Times, Flags]:
    """Microseconds on the wall clock as if it were UTC, and which of them are real dates and times."""
    names = ("year", "month", "day", "hour", "minute")
    year, month, day, hour, minute = (_part(table, form.spans[name]) for name in names)
    good = (year >= 1990) & (year <= 2099) & (month >= 1) & (month <= 12) & (day >= 1) & (day <= 31)
    good &= (hour < 24) & (minute < 60)
    months = np.where(good, (year - 1970) * 12 + month - 1, 0).astype("datetime64[M]")
    days = months.astype("datetime64[D]") + np.where(good, day - 1, 0)
    good &= days.astype("datetime64[M]") == months
    loose = _loose(table, form)
    good &= loose < 60_000_000
    return (days.astype(np.int64) * 86_400 + hour * 3_600 + minute * 60) * 1_000_000 + loose, good


def _zoned(wall: Times, good: Flags, use: TimeUse) -> tuple[Times, Flags]:
    """Wall times to instants: the offset is the same within an hour, but for hours of a change of the clock."""
    if not use.zone:
        return wall, np.zeros_like(good)
    days, of_day = kinds(np.where(good, wall // DAY, 0).view(np.uint64))
    found = [_shift(int(d), DAY // MINUTE, use.zone) for d in (np.where(good, wall // DAY, 0)[days]).tolist()]
    shifts = np.array([s or 0 for s in found], np.int64)[of_day]
    plain = np.array([s is not None for s in found], np.bool_)[of_day]
    odd = np.flatnonzero(good & ~plain)
    if odd.size:  # a day on which the clock is changed: hour by hour
        hours, of_hour = np.unique(wall[odd] // HOUR, return_inverse=True)
        found = [_shift(int(h), HOUR // MINUTE, use.zone) for h in hours.tolist()]
        shifts[odd] = np.array([s or 0 for s in found], np.int64)[of_hour]
        plain[odd] = np.array([s is not None for s in found], np.bool_)[of_hour]
    return wall - shifts, good & plain


@lru_cache(maxsize=4096)
def _shift(number: int, minutes: int, zone: str) -> int | None:
    """Wall clock less UTC in microseconds in the `number`th span of so many minutes; None where it changes."""
    start = datetime(1970, 1, 1) + timedelta(minutes=number * minutes)  # noqa: DTZ001
    parts = (0, minutes // 2, minutes - 1)
    try:
        first, *others = (instant_of(start + timedelta(minutes=m), zone, "") - m * MINUTE for m in parts)
    except RecordError:
        return None
    return from_datetime(start.replace(tzinfo=UTC)) - first if all(x == first for x in others) else None
