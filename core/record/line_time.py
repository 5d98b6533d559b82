"""The moment that is typed on a line or in a field: 14:20, yesterday 23:40, 20m ago, now. Never guessed."""

from __future__ import annotations

import re
from collections.abc import Sequence

from core.record import instant
from core.record.instant import HOUR, MINUTE, Instant
from core.record.local_time import dated_wall_time, latest_wall_time, wall_time_near
from core.record.message import RecordError, refuse

_WALL = r"(yesterday\s+)?(?:(first|second)\s+)?(\d{1,2}):(\d{2})(?:\s+(first|second)\b)?(?=\s|$)"
_TIME = re.compile(rf"(?:at\s+)?{_WALL}", re.IGNORECASE)
_AGO = re.compile(r"(\d{1,3})\s*(m|min|h)\s+ago(?=\s|$)", re.IGNORECASE)
TIME_FORMS = "14:20 | yesterday 23:40 | 20m ago | 1h ago | now"
_LIKE_A_TIME = re.compile(
    r"\d{1,2}[.h]\d{2}|\d{3,4}|\d{1,2}:\d{2}:.*|\d{4}-\d{2}.*|\d{1,2}[-./][A-Za-z]{3}.*|\d{1,2}[./]\d{1,2}[./].*",
    re.ASCII,
)
_BARE = re.compile(r"(?:(first|second)\s+)?(\d{1,2}):(\d{2})", re.IGNORECASE)
_DATED = re.compile(
    r"(\d{1,2})-([A-Za-z]{3})-(\d{4})\s+(?:(first|second)\s+)?(\d{1,2}):(\d{2})", re.ASCII | re.IGNORECASE
)
_DIGITS = re.compile(r"(\d{1,2})[.h]?(\d{2})", re.ASCII)
_NO_COLON = re.compile(r"\d{3,4}", re.ASCII)
_LONGEST = 5
"""Words of the longest time: `at yesterday 01:30 first`."""


def read_time(text: str, now: Instant, zone: str) -> tuple[Instant, str, bool]:
    """The moment a text begins with, what follows it, and whether one was typed; now where none was.

    Raises:
        RecordError: `time.*`: a time of day that cannot be, is still to come, or came twice.
    """
    if match := _TIME.match(text):
        which = (match[2] or match[5] or "").lower()
        hour, minute = int(match[3]), int(match[4])
        at = latest_wall_time(hour, minute, now=now, zone=zone, which=which, yesterday=bool(match[1]))
        return at, text[match.end() :].strip(), True
    if match := _AGO.match(text):
        unit = HOUR if match[2].lower() == "h" else MINUTE
        return now - int(match[1]) * unit, text[match.end() :].strip(), True
    head, _, tail = text.partition(" ")
    return (now, tail.strip(), False) if head.lower() == "now" else (now, text, False)


def moment_typed(text: str, now: Instant, zone: str) -> Instant:
    """The moment that a text is, whole: a time of day, with a date or without, how long ago, now, or ISO 8601 with
    its offset.

    Raises:
        RecordError: `line.time_form` where it is none of these; `time.*`, `instant.*`: what is wrong with it.

    >>> instant.iso(moment_typed("01:30", instant.parse("2026-03-28T02:10:00Z"), "UTC"))
    '2026-03-28T01:30:00+00:00'
    """
    text = text.strip()
    if text.lower() == "now":
        return now
    if is_time(text):
        return read_time(text, now, zone)[0]
    if match := _DATED.fullmatch(text):
        date = int(match[3]), match[2], int(match[1])
        return dated_wall_time(date, int(match[5]), int(match[6]), zone=zone, which=(match[4] or "").lower())
    try:
        return instant.parse(text)
    except RecordError as error:
        if error.message.key == "instant.out_of_range":
            raise
    accepted = meant_time(text) or f"{TIME_FORMS} | 28-Mar-2026 02:10 | 2026-03-28T02:10+00:00"
    raise refuse("line.time_form", value=text, accepted=accepted)


def moment_near(text: str, near: Instant, now: Instant, zone: str) -> Instant:
    """As `moment_typed`, but a bare time of day is the nearest such to a moment, on whatever day; first or second
    01:30 tells an hour that came twice.

    Raises:
        RecordError: as `moment_typed`.
    """
    match = _BARE.fullmatch(text.strip())
    if match is None:
        return moment_typed(text, now, zone)
    which, hour, minute = (match[1] or "").lower(), int(match[2]), int(match[3])
    return wall_time_near(hour, minute, near=near, now=now, zone=zone, which=which)


def is_time(text: str) -> bool:
    """Whether a text is a time of day or how long ago, and nothing else."""
    return bool(_TIME.fullmatch(text) or _AGO.fullmatch(text))


def time_behind(words: Sequence[str]) -> str:
    """The time that all of these words are, as it would stand first on a line; "" where they are none.

    >>> time_behind(["20m", "ago"]), time_behind(["at", "01:30"]), time_behind(["01:30", "rr"])
    ('20m ago', 'at 01:30', '')
    """
    text = " ".join(words) if 0 < len(words) <= _LONGEST else ""
    return text if text and is_time(text) else ""


def ends_in_time(text: str) -> str:
    """The time that a text ends in, "" where it ends in none: `salbutamol 20m ago` ends in `20m ago`."""
    words = text.split()
    return next((t for n in range(max(len(words) - _LONGEST, 0), len(words)) if (t := time_behind(words[n:]))), "")


def meant_time(word: str) -> str:
    """The time of day that digits without a colon could mean, "" where they could mean none.

    >>> meant_time("0325"), meant_time("3.25"), meant_time("2575"), meant_time("16")
    ('03:25', '03:25', '', '')
    """
    match = _DIGITS.fullmatch(word)
    if match is None or int(match[1]) > 23 or int(match[2]) > 59:
        return ""
    return f"{int(match[1]):02d}:{match[2]}"


def meant_ago(word: str) -> str:
    """The time that a length alone could mean; "" where it is none.

    >>> meant_ago("20m"), meant_ago("1h"), meant_ago("20")
    ('20m ago', '1h ago', '')
    """
    return f"{word} ago" if _AGO.fullmatch(f"{word} ago") else ""


def check_no_bare_time(words: Sequence[str], *, digits_only: bool = False) -> None:
    """Refuse `0325 rr 26`, with the line it could mean. `digits_only`: `16.50 6` may be pressures.

    Raises:
        RecordError: `line.time_form`.
    """
    word, rest = words[0], " ".join(words[1:])
    if not (_NO_COLON.fullmatch(word) if digits_only else _LIKE_A_TIME.fullmatch(word)):
        return
    meant = meant_time(word)
    raise refuse("line.time_form", value=word, accepted=f"{meant} {rest}".strip() if meant else TIME_FORMS)
