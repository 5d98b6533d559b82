"""The handover before: which closed one a new one is compared with, and what is otherwise than it said."""

from __future__ import annotations

import json
from dataclasses import asdict, dataclass
from typing import TYPE_CHECKING

from app.operations.policy import in_force
from core.figures.episode_figures import episode_figures
from core.figures.since_handover import SinceHandover, since_handover
from core.judgement.policy import Policy
from core.judgement.shapes import EpisodeFigures
from core.record.episode import Episode
from core.record.instant import Instant

if TYPE_CHECKING:
    from storage.documents import DocumentFacts
    from storage.store import Store

KIND = "handover"


@dataclass(frozen=True, slots=True)
class ClosingFacts:
    """Of which shift a closed handover is, as of which moment its figures were, and which ledger's head it knew."""

    start: Instant
    end: Instant
    as_of: Instant
    head: int

    def text(self) -> str:
        """As it is kept beside the document.

        >>> ClosingFacts(1, 2, 2, 9).text()
        '{"start": 1, "end": 2, "as_of": 2, "head": 9}'
        """
        return json.dumps(asdict(self))


def facts_of(document: DocumentFacts) -> ClosingFacts:
    """What is known of a closed handover. One that was kept without its facts was closed as of when it was kept."""
    try:
        told = json.loads(document.facts)
        return ClosingFacts(int(told["start"]), int(told["end"]), int(told["as_of"]), int(told["head"]))
    except (ValueError, KeyError, TypeError):
        at = document.recorded_at
        return ClosingFacts(0, at, at, document.seq - 1)


@dataclass(frozen=True, slots=True)
class Handed:
    """What a handover is compared with: a closed one, as of `at` and as known at its `head`.

    Where none was closed before, the start of the shift by what is known now (`head` None, `name` empty).
    """

    at: Instant
    head: int | None = None
    name: str = ""
    closed_at: Instant | None = None
    own_closed_at: Instant | None = None
    """When a handover of this very shift was closed, the last time: it is not what is compared with."""


def handed_before(store: Store, start: Instant, end: Instant, as_of: Instant, known_head: int | None) -> Handed:
    """The last closed handover of a ward before a shift's own, as known at a sequence.

    One of the same shift is no other handover: closing again, after a word was added, is compared as the first was.
    """
    closed = [
        (facts_of(d), d) for d in store.documents() if d.kind == KIND and (known_head is None or d.seq <= known_head)
    ]
    own = max((d.recorded_at for f, d in closed if (f.start, f.end) == (start, end)), default=None)
    found = [(f, d) for f, d in closed if f.as_of < as_of and (f.start, f.end) != (start, end)]
    if not found:
        return Handed(start, own_closed_at=own)
    facts, document = max(found, key=lambda x: (x[0].as_of, x[1].seq))
    return Handed(facts.as_of, facts.head, document.name, document.recorded_at, own)


class Comparer:
    """Compares episodes with what was handed over."""

    def __init__(self, store: Store, handed: Handed, policy: Policy) -> None:
        self._store, self._handed = store, handed
        self._policy = policy if handed.head is None else in_force(store, handed.head)

    def since(self, record: Episode, now: EpisodeFigures) -> SinceHandover:
        """What is otherwise for one episode. `record` is what is known of it now."""
        handed = self._handed
        then = record if handed.head is None else self._store.episode(record.key, handed.head)
        known = then.first_at is not None and then.first_at <= handed.at
        figures = episode_figures(then, handed.at, self._policy) if known else None
        return since_handover(figures, now, handed.at)
