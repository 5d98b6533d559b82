"""Where a clock is marked, and how: local wall time in any zone, through clock changes. No Qt.

Marks stand at round wall times (`02:00`, not at round UTC times). At midnight the date stands in letters
(`28-Mar`). In a night with a repeated hour both times of one name are shown with their offset from UTC
(`01:30 +01`, `01:30 +00`): nobody has to guess which one a gas was taken at.
"""

from collections.abc import Callable
from dataclasses import dataclass
from datetime import UTC, datetime, timedelta
from functools import lru_cache
from zoneinfo import ZoneInfo

SECOND = 1_000_000
MINUTE = 60 * SECOND
HOUR = 60 * MINUTE
DAY = 24 * HOUR
_STEPS = (
    *(n * MINUTE for n in (1, 2, 5, 10, 15, 30)),
    *(n * HOUR for n in (1, 2, 3, 4, 6, 12)),
    *(n * DAY for n in (1, 2, 7, 14, 28, 91, 182, 364)),
)
_MONTHS = ("Jan", "Feb", "Mar", "Apr", "May", "Jun", "Jul", "Aug", "Sep", "Oct", "Nov", "Dec")
_EPOCH = datetime(1970, 1, 1, tzinfo=UTC)


@dataclass(frozen=True, slots=True)
class ClockMark:
    """One mark of the clock; `label` is empty where it would have run into its neighbour."""

    at: int
    label: str
    midnight: bool


def local_time(instant: int, zone: ZoneInfo) -> datetime:
    """The wall time of an instant; whole microseconds, exact."""
    return (_EPOCH + timedelta(microseconds=instant)).astimezone(zone)


def offset_of(instant: int, zone: ZoneInfo) -> int:
    """The zone's offset from UTC at an instant, in microseconds."""
    offset = local_time(instant, zone).utcoffset()
    return 0 if offset is None else offset // timedelta(microseconds=1)


def date_word(instant: int, zone: ZoneInfo, *, year: bool = False) -> str:
    """The local date, with month in letters whatever the computer's region.

    >>> date_word(1_774_652_400_000_000, ZoneInfo("Europe/Berlin"))
    '28-Mar'
    """
    local = local_time(instant, zone)
    word = f"{local.day:02d}-{_MONTHS[local.month - 1]}"
    return f"{word}-{local.year}" if year else word


def time_word(instant: int, zone: ZoneInfo) -> str:
    """The local time in 24 h, with its offset where the same wall time comes twice.

    >>> twice = 1_793_514_600_000_000  # 2026-11-01 01:30 by the clock of New York, for the second time
    >>> time_word(twice, ZoneInfo("America/New_York")), time_word(twice - HOUR, ZoneInfo("America/New_York"))
    ('01:30 -05', '01:30 -04')
    """
    local = local_time(instant, zone)
    word = f"{local.hour:02d}:{local.minute:02d}"
    if local.replace(fold=0).utcoffset() == local.replace(fold=1).utcoffset() or not _comes_twice(local):
        return word
    return f"{word} {_offset_word(offset_of(instant, zone))}"


def moment_word(instant: int, zone: ZoneInfo) -> str:
    """Date, year and time: `28-Mar-2026 02:10`."""
    return f"{date_word(instant, zone, year=True)} {time_word(instant, zone)}"


def _comes_twice(local: datetime) -> bool:
    """Folds also differ inside the hour that is left out; a time that is there comes back unchanged."""
    bare = local.replace(tzinfo=None)
    both = (local.replace(fold=fold).astimezone(UTC).astimezone(local.tzinfo) for fold in (0, 1))
    return all(back.replace(tzinfo=None) == bare for back in both)


def _offset_word(offset: int) -> str:
    sign = "-" if offset < 0 else "+"
    hours, minutes = divmod(abs(offset) // MINUTE, 60)
    return f"{sign}{hours:02d}" if minutes == 0 else f"{sign}{hours:02d}:{minutes:02d}"


def time_ticks(
    start: int, end: int, width: float, zone: ZoneInfo, measure: Callable[[str], float], gap: float = 20.0
) -> list[ClockMark]:
    """Marks of the window from `start` to `end` drawn `width` pixels wide.

    measure  width in pixels of a label in the font that will be used
    gap      least distance in pixels between two labels

    Raises ValueError where the window is empty or has no width.
    """
    if end <= start or width <= 0:
        raise ValueError(f"window from {start} to {end}, {width:g} pixels: positive sizes are accepted")
    step = _step(start, end, width, measure("00:00") + gap)
    instants = _wall_times(start, end, step, zone)
    marks = [_mark(at, zone, step) for at in instants]
    return _without_collisions(marks, start, width / (end - start), measure, gap)


def _step(start: int, end: int, width: float, least: float) -> int:
    wanted = least * (end - start) / width
    return next((step for step in _STEPS if step >= wanted), _STEPS[-1])


def _wall_times(start: int, end: int, step: int, zone: ZoneInfo) -> list[int]:
    found: list[int] = []
    for low, high, offset in offset_runs(start // DAY, end // DAY + 1, zone):
        first = -(-(max(low, start) + offset) // step) * step
        found += [wall - offset for wall in range(first, min(high, end + 1) + offset, step)]
    return found


@lru_cache(maxsize=64)
def offset_runs(first_day: int, last_day: int, zone: ZoneInfo) -> tuple[tuple[int, int, int], ...]:
    """Stretches of one offset between two UTC days: (from, to, offset) in microseconds.

    Kept in memory, because a chart asks again at every step of a pan.
    """
    low, high = first_day * DAY, last_day * DAY
    stride = max(6 * HOUR, (high - low) // 400)
    runs: list[tuple[int, int, int]] = []
    since, offset = low, offset_of(low, zone)
    for at in range(low + stride, high + stride, stride):
        new = offset_of(at, zone)
        if new != offset:
            change = _change(at - stride, at, offset, zone)
            runs.append((since, change, offset))
            since, offset = change, new
    runs.append((since, max(high, since) + 1, offset))
    return tuple(runs)


def _change(low: int, high: int, before: int, zone: ZoneInfo) -> int:
    """The first second with another offset, between one that has it not and one that has."""
    while high - low > SECOND:
        middle = (low + high) // (2 * SECOND) * SECOND
        if offset_of(middle, zone) == before:
            low = middle
        else:
            high = middle
    return high


def _mark(at: int, zone: ZoneInfo, step: int) -> ClockMark:
    local = local_time(at, zone)
    midnight = local.hour == 0 and local.minute == 0
    label = date_word(at, zone, year=step >= 91 * DAY) if midnight else time_word(at, zone)
    return ClockMark(at, label, midnight)


def _without_collisions(
    marks: list[ClockMark], start: int, scale: float, measure: Callable[[str], float], gap: float
) -> list[ClockMark]:
    """Leaves out labels that would touch: dates stay first, then times with an offset, then the others."""
    order = sorted(range(len(marks)), key=lambda i: (not marks[i].midnight, len(marks[i].label) <= 5, i))
    taken: list[tuple[float, float]] = []
    kept: set[int] = set()
    for i in order:
        middle, half = (marks[i].at - start) * scale, measure(marks[i].label) / 2
        low, high = middle - half - gap / 2, middle + half + gap / 2
        if all(high <= a or low >= b for a, b in taken):
            taken.append((low, high))
            kept.add(i)
    return [m if i in kept else ClockMark(m.at, "", m.midnight) for i, m in enumerate(marks)]
