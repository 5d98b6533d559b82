"""Times of a table one by one, and which ways of writing them fit. `time_columns` reads a block at once."""

from __future__ import annotations

import re
from collections.abc import Sequence
from datetime import UTC, datetime
from functools import lru_cache

from core.record.instant import Instant
from core.record.message import RecordError, refuse
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
PATTERNS = {
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
    return instant_of(moment_of(text, use.order), use.zone, text, use.repeated)


def _since_1970(text: str, use: TimeUse) -> Instant:
    if not _EPOCH.fullmatch(text):
        raise refuse("time.unlike", value=text[:80], accepted=_ACCEPTED[use.order])
    whole, _, fraction = text.partition(".")
    if use.order == "epoch_s":
        return in_range(int(whole) * 1_000_000 + int(fraction.ljust(6, "0") or 0), text)
    return in_range(int(whole) * 1_000 + int(fraction[:3].ljust(3, "0") or 0), text)


@lru_cache(maxsize=2048)
def moment_of(text: str, order: str) -> datetime:
    """The moment a text states, with its offset where it has one."""
    pattern = PATTERNS.get(order)
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
        moment_of(text.strip(), order)
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
        return moment_of(text.strip(), order).tzinfo is not None
    except RecordError:
        return False
