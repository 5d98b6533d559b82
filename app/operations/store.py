"""Operations on the store as a whole: what it is, what was committed since."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from app.operations.outcome import Outcome
from core.judgement.policy import Policy, read_policy, shipped_policy
from core.record.instant import Instant

if TYPE_CHECKING:
    from storage.store import Store


@dataclass(frozen=True, slots=True)
class StoreFacts:
    """What a view must know of a store before it shows anything."""

    episodes: frozenset[str]
    policy: Policy


@dataclass(frozen=True, slots=True)
class Changes:
    """What was committed after a sequence: the episodes with new rows, and the policy if it was replaced."""

    episodes: frozenset[str]
    policy: Policy | None = None


def describe(store: Store, who: str, now: Instant, request: None) -> Outcome[StoreFacts]:
    """The store's episodes and the policy in force."""
    head = store.head()
    return Outcome(StoreFacts(frozenset(store.episode_keys()), policy_in_force(store)), head)


def changes(store: Store, who: str, now: Instant, request: int) -> Outcome[Changes]:
    """What was committed after the sequence `request`."""
    found = store.changes_since(request)
    policy = policy_in_force(store) if found.policies else None
    return Outcome(Changes(frozenset(found.episodes), policy), found.head)


def policy_in_force(store: Store) -> Policy:
    """The policy last put in force in the store; the shipped one before that."""
    text = store.policy_text()
    return shipped_policy() if text is None else read_policy(text)
