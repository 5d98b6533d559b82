"""Facts that change while an episode runs: the bed, how far support goes, targets, who answers for it.

Each is a timed entry of its own: what stood before stays, and figures as of an earlier moment keep to it.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from math import nan
from typing import TYPE_CHECKING

from app.operations.entry import Preview
from app.operations.entry_questions import check_target, questions
from app.operations.episode import load, typed_reading
from app.operations.outcome import Outcome
from app.operations.recording import Recorded, append
from core.record.instant import Instant
from core.record.local_time import check_not_future
from core.record.log_line import LogLine
from core.record.message import refuse

if TYPE_CHECKING:
    from storage.store import Store


@dataclass(frozen=True, slots=True)
class FactsRequest:
    """Values of one moment as typed, channel key to text with its unit. `confirmed`: its questions had a yes."""

    episode: str
    at: Instant
    values: Mapping[str, str]
    zone: str
    confirmed: bool = False


def preview(store: Store, who: str, now: Instant, request: FactsRequest) -> Outcome[Preview]:
    """What would be recorded; nothing is written.

    Raises:
        RecordError: what is wrong with a value or the moment, or `episode.unknown`.
    """
    check_not_future(request.at, now)
    record = load(store, request.episode)
    readings = tuple(typed_reading(key, text) for key, text in request.values.items())
    check_target(record, request.at, readings)
    line = LogLine(request.at, request.at != now, readings, nan, nan)
    return Outcome(Preview(record.key, record.label, line, questions(store, record, line.at, readings)), store.head())


def record(store: Store, who: str, now: Instant, request: FactsRequest) -> Outcome[Recorded]:
    """Record them in one batch.

    Raises:
        RecordError: as `preview`; `line.unconfirmed` where something is to be asked first.
    """
    made = preview(store, who, now, request).value
    if made.questions and not request.confirmed:
        raise refuse("line.unconfirmed", count=len(made.questions), first=made.questions[0].key)
    entries = made.line.entries(made.episode, by=who, zone=request.zone, confirmed=request.confirmed)
    return append(store, made.episode, entries, who, "entry.log", now)
