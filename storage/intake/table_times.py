"""Times of a table, one by one and a block at once. Both ways give the same instants; a test holds them equal."""

from __future__ import annotations

import re
from collections.abc import Sequence
from datetime import UTC, datetime
from functools import lru_cache

import numpy as np
from numpy.typing import NDArray

from core.record.instant import HOUR, Instant, from_datetime
from core.record.message import RecordError, refuse
from core.record.samples import Flags, Times
from storage.intake.mapping import TimeUse
from storage.intake.wall_times import in_range, instant_of

_CLOCK = (
    r"(?P<hour>\d{1,2}):(?P<minute>\d{2})(?::(?P<second>\d{2})(?:[.,](?P<fraction>\d{1,9}))?)?"
    r"(?:\s*(?P<half>[AaPp])\.?[Mm]\.?)?\s*(?P<offset>Z|[+-]\d{2}:?\d{2})?"
)
_GAP = r"(?:[T ]|,\s*|\s+)\s*"
_YEAR = r"(?P<year>\d{4}|\d{2})"
_MONTH = r"(?:(?P<month>\d{1,2})|(?P<name>[A-Za-z]{3,9}))"
_DAY = r"(?P<day>\d{1,2})"
_SEP = r"[./ -]"
_PATTERNS = {
    "iso": re.compile(r"(?P<year>\d{4})-(?P<month>\d{2})-(?P<day>\d{2})" + _GAP + _CLOCK),
    "ymd": re.compile(r"(?P<year>\d{4})[./-](?P<month>\d{1,2})[./-](?P<day>\d{1,2})" + _GAP + _CLOCK),
    "dmy": re.compile(_DAY + _SEP + _MONTH + _SEP + _YEAR + _GAP + _CLOCK),
    "mdy": re.compile(_MONTH + _SEP + _DAY + _SEP + _YEAR + _GAP + _CLOCK),
}
_MONTHS = ("jan", "feb", "mar", "apr", "may", "jun", "jul", "aug", "sep", "oct", "nov", "dec")
_EPOCH = re.compile(r"\d{1,14}(?:\.\d{1,6})?")
_DATE_ONLY = re.compile(r"\d{4}-\d{2}-\d{2}|\d{1,2}[./-]\d{1,2}[./-](?:\d{4}|\d{2})")
_ACCEPTED = {"iso": "2026-03-28 02:10", "ymd": "2026/03/28 02:10", "dmy": "28.03.2026 02:10",
             "mdy": "03/28/2026 02:10", "epoch_s": "seconds since 1970",
             "epoch_ms": "milliseconds since 1970"}  # fmt: skip


def read_time(text: str, use: TimeUse) -> Instant:
    """The instant of one time of a table.

    Raises:
        RecordError: `time.unlike`, `time.date_only`, `time.needs_zone`, `time.skipped`, `time.repeated`,
            `instant.out_of_range`.

    >>> from core.record.instant import iso
    >>> iso(read_time("28.03.2026 02:10", TimeUse("t", order="dmy", zone="Europe/Oslo")))
    '2026-03-28T01:10:00+00:00'
    """
    text = text.strip()
    if use.order.startswith("epoch"):
        return _since_1970(text, use)
    return instant_of(_moment(text, use.order), use.zone, text, use.repeated)


def _since_1970(text: str, use: TimeUse) -> Instant:
    if not _EPOCH.fullmatch(text):
        raise refuse("time.unlike", value=text[:80], accepted=_ACCEPTED[use.order])
    whole, _, fraction = text.partition(".")
    if use.order == "epoch_s":
        return in_range(int(whole) * 1_000_000 + int(fraction.ljust(6, "0") or 0), text)
    return in_range(int(whole) * 1_000 + int(fraction[:3].ljust(3, "0") or 0), text)


@lru_cache(maxsize=2048)
def _moment(text: str, order: str) -> datetime:
    """The moment a text states, with its offset where it has one."""
    pattern = _PATTERNS.get(order)
    found = pattern.fullmatch(text) if pattern is not None else None
    if found is None:
        if _DATE_ONLY.fullmatch(text):
            raise refuse("time.date_only", value=text[:80], accepted="date and time to the minute")
        raise refuse("time.unlike", value=text[:80], accepted=_ACCEPTED.get(order, "a date and time"))
    part = found.groupdict()
    try:
        return _made(part)
    except ValueError:
        raise refuse("time.unlike", value=text[:80], accepted=_ACCEPTED[order]) from None


def _made(part: dict[str, str | None]) -> datetime:
    year, day = int(part["year"] or 0), int(part["day"] or 0)
    month = int(part["month"] or 0) or _MONTHS.index((part.get("name") or "")[:3].lower()) + 1
    hour, half = int(part["hour"] or 0), (part["half"] or "").lower()
    if half:
        if not 1 <= hour <= 12:
            raise ValueError("hour")
        hour = hour % 12 + (12 if half == "p" else 0)
    micro = int((part["fraction"] or "").ljust(6, "0")[:6])
    offset = part["offset"] or ""
    minute, second = int(part["minute"] or 0), int(part["second"] or 0)
    year += 2000 if year < 100 else 0
    moment = datetime(year, month, day, hour, minute, second, micro)  # noqa: DTZ001
    if not offset:
        return moment
    if offset == "Z":
        return moment.replace(tzinfo=UTC)
    return datetime.fromisoformat(f"{moment.isoformat()}{offset[:3]}:{offset[-2:]}")


def fitting_orders(texts: Sequence[str]) -> tuple[str, ...]:
    """The ways in which texts can be read as times; more than one where day and month may be swapped.

    A text that no way reads is passed over, as long as most are read: it will be refused by its line.

    >>> fitting_orders(["03/04/2026 10:00"]), fitting_orders(["13/04/2026 10:00"])
    (('dmy', 'mdy'), ('dmy',))
    """
    fits = {order: {t for t in texts if _fits(t, order)} for order in ("iso", "ymd", "dmy", "mdy")}
    most = max(map(len, fits.values()))
    if most * 2 <= len(set(texts)):
        return ()
    found = [order for order, read in fits.items() if len(read) == most]
    return tuple(o for o in found if o != "ymd" or "iso" not in found)


def _fits(text: str, order: str) -> bool:
    try:
        _moment(text.strip(), order)
    except RecordError:
        return False
    return True


def all_have_offsets(texts: Sequence[str], order: str) -> bool:
    """Whether every time that can be read carries its own offset; False where none can be read."""
    read = [t for t in texts if _fits(t, order)]
    return bool(read) and all(has_offset(t, order) for t in read)


def has_offset(text: str, order: str) -> bool:
    """Whether a time carries its own offset."""
    try:
        return _moment(text.strip(), order).tzinfo is not None
    except RecordError:
        return False


def read_times(texts: list[str], use: TimeUse) -> tuple[Times, Flags]:
    """Instants of many times, shape (n,), and which of them could be read at once; the rest need a slower look.

    Times written alike (same length, same marks) are read on arrays: digits by place, the zone by the hour.
    """
    n = len(texts)
    none = np.zeros(n, np.int64), np.zeros(n, np.bool_)
    plan = _plan(texts[0].strip(), use.order) if texts else None
    if plan is None:
        return none
    joined = "".join(texts)
    if not joined.isascii() or len(joined) != n * plan.length:
        return none
    data = np.frombuffer(joined.encode("ascii"), np.uint8).reshape(n, plan.length)
    good = np.array([len(x) == plan.length for x in texts]) if n else np.zeros(0, np.bool_)
    if not good.all():
        return none
    digits = data[:, plan.digits].astype(np.int64) - 48
    good &= ((digits >= 0) & (digits <= 9)).all(axis=1) & (data[:, plan.marks] == plan.mark_bytes).all(axis=1)
    wall, fits = _wall(data, plan)
    good &= fits
    if plan.offset is not None:
        return wall - plan.offset, good
    return _zoned(wall, good, use)


class _Plan:
    """Where the parts of a time stand in a text of one fixed form."""

    def __init__(self, sample: str, spans: dict[str, tuple[int, int]], offset: int | None) -> None:
        self.length = len(sample)
        self.spans = spans
        self.offset = offset
        taken = {i for start, end in spans.values() for i in range(start, end)}
        self.digits = sorted(taken)
        self.marks = [i for i in range(len(sample)) if i not in taken]
        self.mark_bytes = np.array([ord(sample[i]) for i in self.marks], np.uint8)


@lru_cache(maxsize=64)
def _plan(sample: str, order: str) -> _Plan | None:
    pattern = _PATTERNS.get(order)
    found = pattern.fullmatch(sample) if pattern is not None and sample.isascii() else None
    if found is None or found["half"] or found.groupdict().get("name"):
        return None
    names = ("year", "month", "day", "hour", "minute", "second", "fraction")
    spans = {name: found.span(name) for name in names if found[name] is not None}
    if spans["year"][1] - spans["year"][0] != 4 or found["month"] is None:
        return None
    offset: int | None = None
    if found["offset"]:
        try:
            moment = _moment(sample, order)
        except RecordError:
            return None
        delta = moment.utcoffset()
        offset = int(delta.total_seconds()) * 1_000_000 if delta is not None else None
    return _Plan(sample, spans, offset)


def _wall(data: NDArray[np.uint8], plan: _Plan) -> tuple[Times, Flags]:
    """Microseconds on the wall clock as if it were UTC, and which of them are real dates and times."""

    def part(name: str) -> NDArray[np.int64]:
        if name not in plan.spans:
            return np.zeros(data.shape[0], np.int64)
        start, end = plan.spans[name]
        value = np.zeros(data.shape[0], np.int64)
        for place in range(start, end):
            value = value * 10 + (data[:, place].astype(np.int64) - 48)
        return value

    year, month, day = part("year"), part("month"), part("day")
    hour, minute, second = part("hour"), part("minute"), part("second")
    good = (year >= 1990) & (year <= 2099) & (month >= 1) & (month <= 12) & (day >= 1) & (day <= 31)
    good &= (hour < 24) & (minute < 60) & (second < 60)
    months = np.where(good, (year - 1970) * 12 + month - 1, 0).astype("datetime64[M]")
    days = months.astype("datetime64[D]") + np.where(good, day - 1, 0)
    good &= days.astype("datetime64[M]") == months
    digits = plan.spans.get("fraction", (0, 0))
    scale = 10 ** (6 - (digits[1] - digits[0]))
    micro = part("fraction") * scale if scale >= 1 else part("fraction") // round(1 / scale)
    seconds = days.astype(np.int64) * 86_400 + hour * 3_600 + minute * 60 + second
    return seconds * 1_000_000 + micro, good


def _zoned(wall: Times, good: Flags, use: TimeUse) -> tuple[Times, Flags]:
    """Wall times to instants: the offset is the same within an hour, but for hours of a change of the clock."""
    if not use.zone:
        return wall, np.zeros_like(good)
    hours, inverse = np.unique(np.where(good, wall // HOUR, 0), return_inverse=True)
    shifts = np.zeros(hours.size, np.int64)
    plain = np.zeros(hours.size, np.bool_)
    for i, hour in enumerate(hours.tolist()):
        shift = _hour_shift(hour, use.zone)
        if shift is not None:
            shifts[i], plain[i] = shift, True
    return wall - shifts[inverse], good & plain[inverse]


@lru_cache(maxsize=4096)
def _hour_shift(hour: int, zone: str) -> int | None:
    """Wall clock less UTC in microseconds, where the whole hour has one; None in an hour of a change."""
    from datetime import timedelta

    start = datetime(1970, 1, 1) + timedelta(hours=hour)  # noqa: DTZ001
    try:
        first = instant_of(start, zone, "")
        last = instant_of(start + timedelta(minutes=59), zone, "")
    except RecordError:
        return None
    if last - first != 59 * 60_000_000:
        return None
    return from_datetime(start.replace(tzinfo=UTC)) - first
