"""Operations for looking back: moments at which something was recorded, and what came later than one of them."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import TYPE_CHECKING

from app.operations.episode import check_known
from app.operations.outcome import Outcome, report
from core.record.hindsight import Hindsight, hindsight
from core.record.instant import Instant

if TYPE_CHECKING:
    from storage.store import Store


@dataclass(frozen=True, slots=True)
class Beside:
    """When something was last recorded before a moment, and first after it; None where there is nothing."""

    at: Instant
    before: Instant | None
    after: Instant | None


CameLater = Mapping[str, tuple[Hindsight, ...]]


@dataclass(frozen=True, slots=True)
class LaterRequest:
    """What came later than `known_at`, of episodes (None: every one that anything was recorded for since)."""

    known_at: Instant
    episodes: tuple[str, ...] | None = None


def beside(store: Store, who: str, now: Instant, request: Instant) -> Outcome[Beside]:
    """The moments of recording on both sides of one."""
    before, after = store.recorded_beside(request)
    return Outcome(Beside(request, before, after), store.head())


def came_later(store: Store, who: str, now: Instant, request: LaterRequest) -> Outcome[CameLater]:
    """What is known now of the time up to a moment and was not known then, by episode; none where nothing came.

    Raises:
        RecordError: `episode.unknown`.
    """
    head = store.head_known_at(request.known_at)
    keys = sorted(store.changes_since(head).episodes) if request.episodes is None else request.episodes
    found: dict[str, tuple[Hindsight, ...]] = {}
    for number, key in enumerate(keys):
        report(number, len(keys))
        check_known(store, key)
        if told := hindsight(store.entries(key), key, head, request.known_at):
            found[key] = told
    return Outcome(found, store.head())
