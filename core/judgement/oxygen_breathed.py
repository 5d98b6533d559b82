"""Whether a patient breathes oxygen, as far as the record says.

What was set on the device says nothing of what is breathed once the mask is off: it may be a cannula, or air. There
only what was logged since the mask came off counts.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from core.judgement.scores_news2 import breathes_oxygen
from core.record.instant import MINUTE, Instant
from core.record.samples import Times, Values
from core.record.settings import ROOM_AIR, SettingsInForce
from core.record.support import SupportTime


@dataclass(frozen=True, slots=True)
class Breathed:
    """`given` is None where it is not known; `at` is when it was logged, `off_since` when the mask came off."""

    given: bool | None
    at: Instant | None = None
    off_since: Instant | None = None
    """Since when the mask is off, where that is why it is not known."""


def oxygen_breathed(settings: SettingsInForce, support: SupportTime, at: Instant) -> Breathed:
    """Whether oxygen is breathed at a moment: an FiO2 above 0.21 or a flow is yes, a flow without an FiO2 too."""
    logged = settings.fio2.t
    i = int(np.searchsorted(logged, at, side="right")) - 1
    if i < 0:
        return Breathed(None)
    then, off = int(logged[i]), off_mask_since(support, at)
    if off is not None and then < off:
        return Breathed(None, off_since=off)
    return Breathed(breathes_oxygen(settings.fio2.at(at), settings.o2_flow.at(at)), then)


def off_mask_since(support: SupportTime, at: Instant) -> Instant | None:
    """When the mask had come off before the minute of an observation; None on the mask, or before any support.

    An observation belongs before what changed in its minute, as a gas does.
    """
    off = support.drawn_in(at)
    if off is not None:
        return off.start
    ended = support.end is not None and at // MINUTE > support.end // MINUTE
    return support.end if ended else None


def oxygen_course(settings: SettingsInForce, support: SupportTime, times: Times) -> Values:
    """The same at each of `times`, shape (n,): 1 on oxygen, 0 on air, NaN where it is not known."""
    logged = settings.fio2.t
    if not logged.size:
        return np.full(times.shape, np.nan)
    fio2, flow = settings.fio2.on(times), settings.o2_flow.on(times)
    by_fraction = np.where(np.isnan(fio2), np.where(flow == 0, 0.0, np.nan), fio2 > ROOM_AIR + 1e-9)
    given = np.where(flow > 0, 1.0, by_fraction)
    i = np.searchsorted(logged, times, side="right") - 1
    then, minute = logged[np.maximum(i, 0)], times // MINUTE
    given[i < 0] = np.nan
    ended = [(support.end, None)] if support.end is not None else []
    for start, end in [*((b.start, b.end) for b in support.breaks), *ended]:
        off = (minute > start // MINUTE) & (True if end is None else minute <= end // MINUTE)
        given[off & (then < start)] = np.nan
    return given
