"""A time of day in a field of a form, read as the log strip reads it: 14:20, yesterday 23:40, 20m ago."""

from __future__ import annotations

from core.record.instant import Instant
from core.record.line_time import moment_near, moment_typed
from core.record.local_time import zoned_iso


def typed_time(text: str, now: Instant, zone: str) -> Instant | None:
    """The moment that is typed; None where nothing is.

    Raises:
        RecordError: `time.*`, `line.*`: what is wrong with it.
    """
    if not text.strip():
        return None
    return moment_typed(text, now, zone)


def typed_near(text: str, near: Instant, now: Instant, zone: str) -> Instant | None:
    """The moment that is typed for something logged `near` it: a bare time of day is the nearest such, on whatever
    day; first or second 01:30 tells an hour that came twice. None where nothing is typed.

    Raises:
        RecordError: as `typed_time`.
    """
    return moment_near(text, near, now, zone) if text.strip() else None


def typed_iso(text: str, now: Instant, zone: str) -> str:
    """The moment as ISO 8601 with its offset, as values of instants are kept; "" where nothing is typed.

    Raises:
        RecordError: as `typed_time`.
    """
    at = typed_time(text, now, zone)
    return "" if at is None else zoned_iso(at, zone)
