"""What a value of now is, in words: a median of the device's samples over a span, or one reading of a moment.

A heading shows the newest reading, a figure often the median of a quarter of an hour: unsaid, the two contradict.
"""

from __future__ import annotations

from app.look.formats import clock, since
from app.words.template import Reader
from core.record.instant import Instant

Span = tuple[Instant, Instant]


def taken_words(median_of: Span | None, at: Instant | None, reader: Reader) -> str:
    """How and when a value was taken; "" where neither is known.

    >>> taken_words((0, 840_000_000), 840_000_000, Reader(near=(0, 10**12)))
    'median from 00:00 to 00:14'
    >>> taken_words(None, 840_000_000, Reader(near=(0, 10**12)))
    'one reading at 00:14'
    """
    if median_of is not None:
        return median_words(median_of, reader)
    return reader.translate("one reading at {time}").format(time=reader.time(at)) if at is not None else ""


def when_words(at: Instant | None, median_of: Span | None, now: Instant | None, reader: Reader) -> str:
    """Of which moment a figure is and, with `now`, how long ago that was; a median by its span.

    >>> when_words(840_000_000, (0, 840_000_000), 840_000_000, Reader(near=(0, 10**12)))
    'median from 00:00 to 00:14, just now'
    """
    if at is None:
        return ""
    moment = reader.time(at) if median_of is None else median_words(median_of, reader)
    return moment if now is None else f"{moment}, {since(at, now)}"


def median_words(span: Span, reader: Reader) -> str:
    """The span whose median a value is; the date once."""
    text = reader.translate("median from {first} to {last}")
    return text.format(first=reader.time(span[0]), last=clock(span[1], reader.zone))
