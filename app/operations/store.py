"""Operations on the store as a whole: what it is, what was committed since, whether it is sound."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

from app.operations.figures import RECENTLY_ENDED
from app.operations.outcome import Outcome, report
from app.operations.policy import found as policy_found
from core.judgement.policy import Policy
from core.record.instant import Instant
from core.record.message import Message
from storage import people
from storage.errors import StoreError

if TYPE_CHECKING:
    from storage.store import Store

QUICK_ROWS = 50_000
"""Rows of a ledger that are checked in a second or two."""


@dataclass(frozen=True, slots=True)
class StoreFacts:
    """What a view must know of a store before it shows anything.

    `episodes` are those that are open or ended recently; `printed_head` is the sequence and the first 16 hex digits
    of the chain's newest hash.
    """

    episodes: frozenset[str]
    policy: Policy
    read_only: bool
    encrypted: bool
    notices: tuple[Message, ...]
    printed_head: str
    layout_revision: int = 0
    has_people: bool = False
    """Whether people sign in with a PIN."""


@dataclass(frozen=True, slots=True)
class Changes:
    """What was committed after a sequence: the episodes with new rows, and the policy if it was replaced."""

    episodes: frozenset[str]
    policy: Policy | None = None
    layout_revision: int = 0
    notices: tuple[Message, ...] = ()
    """What a person should know of the store, where the policy was replaced."""
    has_people: bool = False
    erased: bool = False
    """An episode was removed."""


def describe(store: Store, who: str, now: Instant, request: None) -> Outcome[StoreFacts]:
    """The ward's episodes, the store's state, and the policy in force."""
    head = store.head()
    in_force = policy_found(store)
    facts = StoreFacts(
        frozenset(store.standing_keys(now - RECENTLY_ENDED)), in_force.policy, store.read_only, store.is_encrypted,
        (*store.notices, *in_force.passed_over), store.printed_head(), store.changes_since(head).layout_revision,
        _has_people(store),
    )  # fmt: skip
    return Outcome(facts, head)


def changes(store: Store, who: str, now: Instant, request: int) -> Outcome[Changes]:
    """What was committed after the sequence `request`."""
    found = store.changes_since(request)
    if not found.policy_changed:
        plain = Changes(found.episodes, None, found.layout_revision, has_people=_has_people(store),
                        erased=found.erased)  # fmt: skip
        return Outcome(plain, found.head)
    in_force = policy_found(store)
    notices = (*store.notices, *in_force.passed_over)
    made = Changes(found.episodes, in_force.policy, found.layout_revision, notices, _has_people(store), found.erased)
    return Outcome(made, found.head)


def _has_people(store: Store) -> bool:
    return any(not p.retired for p in people.of_store(store).values())


def takes_writing(store: Store, who: str, now: Instant, request: None) -> Outcome[bool]:
    """Whether an entry could be recorded now: another program may hold the store."""
    return Outcome(store.takes_writing(), store.head())


def check_if_quick(store: Store, who: str, now: Instant, request: None) -> Outcome[tuple[Message, ...]]:
    """What is wrong with a plain store, before figures of it are relied on, where that is checked in a second or two.

    An encrypted store proves every page as it is read, a plain one every row that a figure rests on; so in one of
    years the rest waits for `verify`. One of an older program proves nothing until it was opened for writing: it is
    checked whole, however long that takes.
    """
    head = store.head()
    needed = not store.is_encrypted and (head <= QUICK_ROWS or not store.proves_rows)
    return Outcome(store.verify() if needed else (), head)


def verify(store: Store, who: str, now: Instant, request: str | None) -> Outcome[tuple[Message, ...]]:
    """Check the store whole: pages, chain, triggers, domain rules, derived tables. Empty when all is well.

    `request`: a witness file that the store's tail is held against too; one that cannot serve is a finding.
    """
    found = tuple(store.verify(lambda: report(0, 0)))
    if request:
        from storage import witness

        try:
            found += witness.findings(Path(request), store)
        except StoreError as error:
            found += (error.message,)
    return Outcome(found, store.head())
