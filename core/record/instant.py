"""Instants: whole microseconds since 1970 in UTC, as int. Elapsed time is a difference of two.

Wall-clock arithmetic inside one zone is wrong over a clock change, so only instants are subtracted.
"""

from __future__ import annotations

from datetime import UTC, datetime, timedelta

from core.record.message import refuse

Instant = int

SECOND: int = 1_000_000
MINUTE: int = 60 * SECOND
HOUR: int = 60 * MINUTE
DAY: int = 24 * HOUR

_EPOCH = datetime(1970, 1, 1, tzinfo=UTC)
_EARLIEST = datetime(1990, 1, 1, tzinfo=UTC)
_LATEST = datetime(2100, 1, 1, tzinfo=UTC)


def from_datetime(moment: datetime) -> Instant:
    """The instant of an aware datetime.

    Raises:
        RecordError: `instant.no_offset` for a naive datetime.

    >>> from_datetime(datetime(1970, 1, 1, 0, 1, tzinfo=UTC)) == MINUTE
    True
    """
    if moment.tzinfo is None or moment.utcoffset() is None:
        raise refuse("instant.no_offset", value=moment.isoformat())
    return (moment - _EPOCH) // timedelta(microseconds=1)


def to_datetime(at: Instant) -> datetime:
    """The instant as an aware datetime in UTC."""
    return _EPOCH + timedelta(microseconds=int(at))


def parse(text: str) -> Instant:
    """Read ISO 8601 with an offset, e.g. ``2026-03-28T02:10:00+00:00`` or ``...Z``.

    Raises:
        RecordError: `instant.unreadable`, `instant.no_offset` or `instant.out_of_range` (1990-2099).

    >>> parse("1990-01-01T01:00:00+01:00") == from_datetime(_EARLIEST)
    True
    """
    try:
        moment = datetime.fromisoformat(text.strip())
    except ValueError:
        raise refuse("instant.unreadable", value=text) from None
    if moment.tzinfo is None:
        raise refuse("instant.no_offset", value=text)
    if not _EARLIEST <= moment < _LATEST:
        raise refuse("instant.out_of_range", value=text)
    return from_datetime(moment)


def iso(at: Instant) -> str:
    """The instant in UTC as ISO 8601 with offset, to the second, with a fraction only where there is one.

    >>> iso(parse("2026-03-28T02:10:00+01:00"))
    '2026-03-28T01:10:00+00:00'
    """
    return to_datetime(at).isoformat()


def iso_second(at: Instant) -> str:
    """As `iso`, to the whole second: for sentences, where a clock's fraction is only noise.

    >>> iso_second(parse("2026-03-28T01:10:00.123456+00:00"))
    '2026-03-28T01:10:00+00:00'
    """
    return iso(at - at % SECOND)


def minutes_between(earlier: Instant, later: Instant) -> float:
    """Elapsed minutes, negative when `later` comes first."""
    return (later - earlier) / MINUTE
