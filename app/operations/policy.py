"""Operations on the policy: what is in force, and putting another in force."""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache
from typing import TYPE_CHECKING

from app.operations.outcome import Outcome
from core.judgement.policy import Policy, read_policy, shipped_policy, shipped_text
from core.judgement.policy_check import ERROR, check
from core.record.instant import Instant
from core.record.message import RecordError

if TYPE_CHECKING:
    from storage.store import Store


@dataclass(frozen=True, slots=True)
class PolicyInForce:
    """A policy, its text, and whether the store has one of its own."""

    policy: Policy
    text: str
    is_shipped: bool


@lru_cache(maxsize=8)
def _read(text: str) -> Policy:
    return read_policy(text)


def in_force(store: Store, head: int | None = None) -> Policy:
    """The policy in force in a store (as known at a sequence); the shipped one before any other."""
    found = store.policy(head)
    return shipped_policy() if found is None else _read(found[1])


def show(store: Store, who: str, now: Instant, request: None) -> Outcome[PolicyInForce]:
    """The policy in force with its text."""
    found = store.policy()
    text = shipped_text() if found is None else found[1]
    return Outcome(PolicyInForce(in_force(store), text, found is None), store.head())


def put(store: Store, who: str, now: Instant, request: str) -> Outcome[Policy]:
    """Put a policy's TOML text in force. Putting an earlier text back is the undo.

    Raises:
        RecordError: `policy.*`, the first fault of a text that is no usable policy; nothing is changed.
    """
    faults = [f for f in check(request).findings if f.kind == ERROR]
    if faults:
        raise RecordError(faults[0].message)
    policy = read_policy(request)
    receipt = store.put_policy(request, policy.hash, who, now)
    return Outcome(policy, receipt.last_seq)
