"""The stretch of time in view, kept inside an episode. No Qt."""

from typing import Final

from app.chart.time_ticks import MINUTE

LEAST_SPAN: Final = 5 * MINUTE


def kept_inside(start: int, end: int, first: int, last: int) -> tuple[int, int]:
    """The window from `start` to `end` (microseconds), moved and cut so that it stays between `first` and
    `last` with a fiftieth of air at both ends, and never shorter than LEAST_SPAN.

    >>> kept_inside(-900 * MINUTE, -800 * MINUTE, 0, 500 * MINUTE) == (-10 * MINUTE, 90 * MINUTE)
    True
    """
    air = max((last - first) // 50, MINUTE)
    low, high = first - air, last + air
    span = min(max(end - start, LEAST_SPAN), high - low)
    if end - start != span:
        start = (start + end - span) // 2
    start = min(max(start, low), high - span)
    return start, start + span


def zoomed(start: int, end: int, factor: float, about: int) -> tuple[int, int]:
    """The window with its span times `factor`, the instant `about` staying in its place."""
    return about - round((about - start) * factor), about + round((end - about) * factor)
