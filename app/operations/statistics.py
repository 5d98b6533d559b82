"""Operations that count: shift figures of the ward over a span."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from app.operations.episode import load
from app.operations.outcome import Outcome, report
from app.operations.policy import in_force
from core.figures.ward_statistics import WardStatistics, episode_statistics, nothing
from core.record.instant import Instant
from core.record.message import refuse

if TYPE_CHECKING:
    from storage.store import Store


@dataclass(frozen=True, slots=True)
class StatisticsRequest:
    """A span of any length, as known at a moment (None: all that is recorded)."""

    start: Instant
    end: Instant
    as_known_at: Instant | None = None


def of_ward(store: Store, who: str, now: Instant, request: StatisticsRequest) -> Outcome[WardStatistics]:
    """The shift figures of a span. Its end is drawn back to now, or to when it is known at.

    Nobody counts what is to come.

    Raises:
        RecordError: `statistics.backwards`.
    """
    moments = (request.end, now, request.as_known_at)
    end = min(at for at in moments if at is not None)
    if end <= request.start:
        raise refuse("statistics.backwards", start=request.start, end=end)
    known_head = None if request.as_known_at is None else store.head_known_at(request.as_known_at)
    policy = in_force(store, known_head)
    total = nothing(request.start, end, policy)
    keys = store.standing_keys(request.start, known_head)  # in a store of years most had ended before
    for number, key in enumerate(keys):
        report(number, len(keys))
        total += episode_statistics(load(store, key, request.as_known_at), request.start, end, policy)
    return Outcome(total, store.head())
