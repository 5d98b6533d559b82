"""Wall-clock times as people type them, made into instants. A clock change is asked about, never guessed."""

from __future__ import annotations

from datetime import UTC, date, datetime, time, timedelta
from zoneinfo import ZoneInfo

from core.record.instant import HOUR, MINUTE, Instant, from_datetime, to_datetime
from core.record.message import refuse

MONTHS = ("Jan", "Feb", "Mar", "Apr", "May", "Jun", "Jul", "Aug", "Sep", "Oct", "Nov", "Dec")
LEAD = 5 * MINUTE
"""A typed time may lead the clock by this much: clocks on a ward differ."""

SOON = 3 * HOUR
"""A typed time this far ahead is asked about: yesterday's is rarely meant, a slip of the finger often is."""


def local(at: Instant, zone: str) -> datetime:
    """The instant on the wall clock of a zone."""
    return to_datetime(at).astimezone(ZoneInfo(zone))


def zoned_iso(at: Instant, zone: str) -> str:
    """The instant as ISO 8601 with the zone's offset of that moment.

    >>> zoned_iso(0, "Europe/London")
    '1970-01-01T01:00:00+01:00'
    """
    return local(at, zone).isoformat()


def candidates(day: date, wall: time, zone: str) -> tuple[Instant, ...]:
    """The instants that show `wall` on `day`: none in the skipped hour, two in the repeated one."""
    found = []
    for fold in (0, 1):
        moment = datetime.combine(day, wall, ZoneInfo(zone)).replace(fold=fold)
        instant = from_datetime(moment.astimezone(UTC))
        if local(instant, zone).replace(tzinfo=None) == datetime.combine(day, wall) and instant not in found:
            found.append(instant)
    return tuple(found)


def latest_wall_time(
    hour: int, minute: int, *, now: Instant, zone: str, which: str = "", yesterday: bool = False
) -> Instant:
    """The newest moment at or before now (5 min of lead allowed) at which the wall clock showed the time.

    So `23:50` typed at 00:10 is yesterday's. A time that comes within the next `SOON` is more likely a slip than
    yesterday's: it is refused, and `yesterday` says that it was meant. `which` is "first" or "second" for an hour
    that came twice.

    Raises:
        RecordError: `time.unreadable`; `time.not_yet` for a time still to come; `time.skipped` for a time the clock
            never showed; `time.repeated` for a time that came twice when `which` is not said.

    >>> from core.record.instant import parse, iso
    >>> iso(latest_wall_time(23, 50, now=parse("2026-03-28T00:10:00+00:00"), zone="UTC"))
    '2026-03-27T23:50:00+00:00'
    """
    shown = f"{hour:02d}:{minute:02d}"
    if not (0 <= hour <= 23 and 0 <= minute <= 59):
        raise refuse("time.unreadable", value=shown, accepted="00:00 to 23:59")
    today = local(now, zone).date()
    near = [t for t in _around(today, hour, minute, zone) if now - SOON <= t <= now + SOON]
    if near and near[0] > now + LEAD and not yesterday:
        raise refuse("time.not_yet", value=shown, at=near[0], accepted=f"a time up to now, or: yesterday {shown}")
    for days_back in (1,) if yesterday else (0, 1):
        day = today - timedelta(days=days_back)
        found = candidates(day, time(hour, minute), zone)
        if not found:
            if days_back == 0 and local(now, zone).time() >= time(hour, minute):
                raise refuse("time.skipped", value=shown, accepted="a time the wall clock showed")
            continue
        past = [t for t in found if t <= now + LEAD]
        if past:
            return _chosen(past, which, shown)
    raise refuse("time.skipped", value=shown, accepted="a time the wall clock showed")


def wall_time_near(hour: int, minute: int, *, near: Instant, now: Instant, zone: str, which: str = "") -> Instant:
    """The moment nearest to another at which the wall clock showed the time, e.g. the right time of an entry.

    Raises:
        RecordError: `time.unreadable`, `time.not_yet`, `time.skipped`, `time.repeated` as `latest_wall_time`.

    >>> from core.record.instant import parse, iso
    >>> midnight, now = parse("2026-03-28T00:10:00+00:00"), parse("2026-03-30T08:00:00+00:00")
    >>> iso(wall_time_near(23, 50, near=midnight, now=now, zone="UTC"))
    '2026-03-27T23:50:00+00:00'
    """
    shown = f"{hour:02d}:{minute:02d}"
    if not (0 <= hour <= 23 and 0 <= minute <= 59):
        raise refuse("time.unreadable", value=shown, accepted="00:00 to 23:59")
    day = local(near, zone).date()
    days = [candidates(day + timedelta(days=n), time(hour, minute), zone) for n in (-1, 0, 1)]
    shows = [found for found in days if found]
    if not shows:
        raise refuse("time.skipped", value=shown, accepted="a time the wall clock showed")
    nearest = min(shows, key=lambda found: min(abs(t - near) for t in found))
    past = [t for t in nearest if t <= now + LEAD]
    if not past:
        raise refuse("time.not_yet", value=shown, at=nearest[0], accepted=f"a time up to now, or: yesterday {shown}")
    return _chosen(past, which, shown)


def dated_wall_time(day: tuple[int, str, int], hour: int, minute: int, *, zone: str, which: str = "") -> Instant:
    """The moment at which the wall clock showed a time on a day (year, month as Mar, day of the month).

    Raises:
        RecordError: `time.unreadable`, `time.skipped`, `time.repeated` as `latest_wall_time`.

    >>> from core.record.instant import iso
    >>> iso(dated_wall_time((2026, "mar", 28), 1, 30, zone="UTC"))
    '2026-03-28T01:30:00+00:00'
    """
    year, month, number = day
    shown = f"{number:02d}-{month.title()}-{year} {hour:02d}:{minute:02d}"
    try:
        wall, date_ = time(hour, minute), date(year, MONTHS.index(month.title()) + 1, number)
    except ValueError:
        raise refuse("time.unreadable", value=shown, accepted="00:00 to 23:59, on a day as 28-Mar-2026") from None
    found = candidates(date_, wall, zone)
    if not found:
        raise refuse("time.skipped", value=shown, accepted="a time the wall clock showed")
    if len(found) > 1 and which not in ("first", "second"):
        first, clock = shown.split()
        raise refuse("time.repeated", value=shown, accepted=f"{first} first {clock} | {first} second {clock}")
    return found[-1] if which == "second" else found[0]


def check_not_future(at: Instant, now: Instant) -> None:
    """Refuse a moment that leads the clock by more than clocks on a ward differ.

    Raises:
        RecordError: `entry.in_future`.
    """
    if at > now + LEAD:
        raise refuse("entry.in_future", at=at, now=now, accepted="now or earlier")


def _around(today: date, hour: int, minute: int, zone: str) -> tuple[Instant, ...]:
    """The moments of a wall time today and tomorrow: after 23:00 a slip may lie beyond midnight."""
    wall = time(hour, minute)
    return candidates(today, wall, zone) + candidates(today + timedelta(days=1), wall, zone)


def _chosen(past: list[Instant], which: str, shown: str) -> Instant:
    if len(past) == 1:
        return past[0]
    if which not in ("first", "second"):
        raise refuse("time.repeated", value=shown, accepted=f"first {shown} | second {shown}")
    return past[0] if which == "first" else past[1]
