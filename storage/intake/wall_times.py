"""Wall-clock times of files made into instants: by their own offset, or in a zone that a person named."""

from __future__ import annotations

from datetime import datetime, time
from functools import lru_cache

from core.record.instant import MINUTE, Instant, from_datetime, parse
from core.record.local_time import candidates
from core.record.message import refuse

EARLIEST, LATEST = parse("1990-01-01T00:00:00Z"), parse("2099-12-31T23:59:59Z")


def in_range(at: Instant, shown: str) -> Instant:
    """The instant, where it lies in 1990 to 2099.

    Raises:
        RecordError: `instant.out_of_range`.
    """
    if not EARLIEST <= at <= LATEST:
        raise refuse("instant.out_of_range", value=shown[:80])
    return at


def instant_of(moment: datetime, zone: str, shown: str, which: str = "") -> Instant:
    """The instant of a moment that a file states: by its offset, else on the clock of `zone`.

    `which` is "first" or "second" for an hour that came twice.

    Raises:
        RecordError: `time.needs_zone`, `time.skipped`, `time.repeated`, `instant.out_of_range`.

    >>> from core.record.instant import iso
    >>> iso(instant_of(datetime(2026, 7, 1, 12, 0), "Europe/Oslo", "01.07.2026 12:00"))
    '2026-07-01T10:00:00+00:00'
    """
    if moment.tzinfo is not None:
        return in_range(from_datetime(moment), shown)
    if not zone:
        raise refuse("time.needs_zone", value=shown[:80], accepted="a time zone, e.g. Europe/Oslo")
    if not 1990 <= moment.year <= 2099:
        raise refuse("instant.out_of_range", value=shown[:80])
    hours = _hour_starts(moment.replace(minute=0, second=0, microsecond=0), moment.minute, zone)
    if not hours:
        raise refuse("time.skipped", value=shown[:80], accepted="a time the wall clock showed")
    if len(hours) > 1 and which not in ("first", "second"):
        raise refuse("time.repeated", value=shown[:80], accepted="a time with its offset | first | second")
    start = hours[1] if which == "second" and len(hours) > 1 else hours[0]
    return start + (moment.second * 1_000_000 + moment.microsecond)


@lru_cache(maxsize=8192)
def _hour_starts(hour: datetime, minute: int, zone: str) -> tuple[Instant, ...]:
    """The instants at which the clock showed this hour and minute; one look per minute, since looks are slow."""
    plain = candidates(hour.date(), time(hour.hour, 0), zone)
    if len(plain) == 1 and candidates(hour.date(), time(hour.hour, 59), zone) == (plain[0] + 59 * MINUTE,):
        return (plain[0] + minute * MINUTE,)
    return candidates(hour.date(), time(hour.hour, minute), zone)


def parse_dtm(text: str, zone: str) -> Instant:
    """Read the date and time of HL7 v2: `YYYYMMDDHHMM[SS[.S...]][+ZZZZ]`. A date alone is no moment.

    Raises:
        RecordError: `time.date_only`, `instant.unreadable`, and as `instant_of`.

    >>> from core.record.instant import iso
    >>> iso(parse_dtm("202603280210+0100", ""))
    '2026-03-28T01:10:00+00:00'
    """
    moment = _dtm(text.strip())
    return instant_of(moment, zone, text)


@lru_cache(maxsize=4096)
def _dtm(text: str) -> datetime:
    body, sign, offset = text, "", ""
    for mark in "+-":
        if mark in text:
            body, sign, offset = text.partition(mark)
    digits, _, fraction = body.partition(".")
    if not digits.isascii() or not digits.isdigit() or (fraction and not fraction.isdigit()):
        raise refuse("instant.unreadable", value=text[:80])
    if len(digits) in (4, 6, 8, 10):
        raise refuse("time.date_only", value=text[:80], accepted="date and time to the minute")
    try:
        moment = datetime.strptime(digits, "%Y%m%d%H%M%S" if len(digits) == 14 else "%Y%m%d%H%M")  # noqa: DTZ007
        if fraction:
            moment = moment.replace(microsecond=int(fraction[:6].ljust(6, "0")))
        if sign:
            if len(offset) != 4 or not offset.isdigit():
                raise ValueError("offset")
            moment = datetime.fromisoformat(f"{moment.isoformat()}{sign}{offset[:2]}:{offset[2:]}")
    except ValueError:
        raise refuse("instant.unreadable", value=text[:80]) from None
    return moment
