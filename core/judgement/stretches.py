"""The stretch on the mask, or in one break, that a moment lies in: what was seen elsewhere says nothing of it.

A value of the minute in which a mask comes off or goes on belongs before that, as a gas of an anchor's minute does.
"""

from __future__ import annotations

from core.record.instant import Instant
from core.record.support import Break

FOREVER = 2**62


def stretch_around(breaks: tuple[Break, ...], at: Instant) -> tuple[Instant, Instant]:
    """What no edge of a break cuts off from a moment: later than the first, not later than the second.

    >>> stretch_around((Break(100, 200), Break(300, None)), 250)
    (200, 300)
    """
    edges = [e for b in breaks for e in (b.start, b.end) if e is not None]
    low = max((e for e in edges if e < at), default=0)
    return low, min((e for e in edges if e >= at), default=FOREVER)


def stretch_before(breaks: tuple[Break, ...], kind: str, first_at: Instant) -> tuple[Instant, Instant]:
    """The stretch that an anchor changed: the break that it ends, else the time on the mask up to it.

    What was set in a short break took effect at its end; before it stands the time on the mask before that break.

    >>> stretch_before((Break(100, 200),), "change", 200), stretch_before((Break(100, 200),), "break_end", 200)
    ((0, 100), (100, 200))
    """
    ended = next((b for b in breaks if b.end == first_at), None)
    last = first_at if ended is None or kind == "break_end" else ended.start
    return stretch_around(breaks, last)[0], last
