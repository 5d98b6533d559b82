"""When something was observed, as FHIR states it. A date is no moment; a span is taken at its start, in doubt."""

from __future__ import annotations

import re

from core.record import instant
from core.record.instant import MINUTE, Instant
from core.record.message import Message, refuse
from storage.intake.fhir_json import Json, child, text
from storage.intake.findings import CLOCK_LEAD

_DATE_ONLY = re.compile(r"\d{4}(-\d{2}(-\d{2})?)?")
LONGEST = 15 * MINUTE
"""A span up to this counts as a moment (common practice, no source)."""


def observed_at(resource: Json, now: Instant) -> tuple[Instant | None, tuple[Message, ...]]:
    """The moment of an observation, and what is doubtful about it; None where it states none.

    Raises:
        RecordError: `time.date_only`, `time.not_a_moment`, `instant.*`.
    """
    for name in ("effectiveDateTime", "effectiveInstant"):
        if text(resource, name):
            return moment(text(resource, name), now), ()
    if "effectiveTiming" in resource:
        raise refuse("time.not_a_moment", value="effectiveTiming", accepted="effectiveDateTime, Instant or Period")
    period = child(resource, "effectivePeriod")
    start, end = text(period, "start"), text(period, "end")
    if not start and not end:
        return None, ()
    if not start:
        raise refuse("time.not_a_moment", value=f"until {end}"[:80], accepted="a period with its start")
    began = moment(start, now)
    if not end or _DATE_ONLY.fullmatch(end):
        return began, () if not end else (_long(start, end),)
    ended = instant.parse(end)
    if ended < began:
        raise refuse("entry.span_backwards", value=end[:80], accepted="an end at or after the start")
    return began, () if ended - began <= LONGEST else (_long(start, end),)


def _long(start: str, end: str) -> Message:
    return Message("time.start_of_span", {"start": start[:40], "end": end[:40]})


def moment(shown: str, now: Instant) -> Instant:
    """One moment with its offset, not ahead of the clock.

    Raises:
        RecordError: `time.date_only`, `instant.*`.
    """
    if _DATE_ONLY.fullmatch(shown.strip()):
        raise refuse("time.date_only", value=shown[:80], accepted="date and time to the minute")
    at = instant.parse(shown)
    if at > now + CLOCK_LEAD:
        raise refuse("instant.in_future", value=shown[:80], now=instant.iso_second(now),
                     accepted="at most 5 min ahead of the clock")  # fmt: skip
    return at
