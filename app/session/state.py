"""What is looked at, by whom and as of when: one immutable value, and what may change of it."""

from __future__ import annotations

from dataclasses import dataclass, field
from enum import StrEnum
from pathlib import Path

from app.session.clock import REAL, Clock
from core.judgement.policy import Policy, shipped_policy
from core.record.instant import Instant
from core.record.message import Message


class What(StrEnum):
    """What changed, so that a view refreshes only what it must."""

    STORE = "store"
    RECORD = "record"
    CLOCK = "clock"
    AS_OF = "as of"
    AS_KNOWN_AT = "as known at"
    POLICY = "policy"
    PERSON = "person"
    SELECTION = "selection"
    LAYOUT = "layout"
    ZONE = "zone"


@dataclass(frozen=True, slots=True)
class Changed:
    """The payload of `SessionModel.changed`. `episodes` are those with new entries; `record` changes only."""

    what: frozenset[What]
    episodes: frozenset[str] = frozenset()

    def touches(self, *what: What) -> bool:
        """Whether any of these changed."""
        return bool(self.what.intersection(what))


@dataclass(frozen=True, slots=True)
class Session:
    """What is looked at. `as_of` None follows the clock; `as_known_at` None is all that is recorded.

    `selection` is the key of the episode in hand. `head` is the ledger's sequence that views have been told.
    """

    store_path: Path
    zone: str = "UTC"
    head: int = 0
    clock: Clock = REAL
    as_of: Instant | None = None
    as_known_at: Instant | None = None
    policy: Policy = field(default_factory=shipped_policy)
    person: str = ""
    selection: str | None = None
    is_demo: bool = False
    read_only: bool = False
    encrypted: bool | None = None
    has_people: bool = False
    layout_revision: int = 0
    notices: tuple[Message, ...] = ()
    """What a person should know of the store: why it is read-only, a policy that cannot be read."""

    def now(self) -> Instant:
        """The moment entries are recorded at: the real clock, or the pretended one."""
        return self.clock.now()

    def moment(self) -> Instant:
        """The moment figures are computed for."""
        return self.now() if self.as_of is None else self.as_of

    @property
    def is_live(self) -> bool:
        """Whether the session follows its clock and knows all that is recorded."""
        return self.as_of is None and self.as_known_at is None
