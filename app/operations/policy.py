"""Operations on the policy: what is in force, and putting another in force."""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache
from typing import TYPE_CHECKING

from app.operations.outcome import Outcome
from app.operations.people import require_lead
from core.judgement.policy import Policy, policy_hash, read_policy, shipped_policy, shipped_text
from core.judgement.policy_check import ERROR, check
from core.record.instant import Instant
from core.record.message import Message, RecordError, Value

if TYPE_CHECKING:
    from storage.documents import KeptPolicy
    from storage.store import Store


@dataclass(frozen=True, slots=True)
class PolicyInForce:
    """A policy, its text, and whether it is the shipped one for want of one in the store.

    `by` and `at`: who put it in force, and when. `passed_over`: newer policies of the store that cannot be read.
    """

    policy: Policy
    text: str
    is_shipped: bool
    by: str = ""
    at: Instant | None = None
    passed_over: tuple[Message, ...] = ()


@dataclass(frozen=True, slots=True)
class KeptPolicyFacts:
    """One policy of the store's history. `name` is empty where it cannot be read."""

    hash: str
    name: str
    version: int
    by: str
    at: Instant


@lru_cache(maxsize=16)
def _tried(text: str, hash: str) -> Policy | str:
    """The policy of a kept text, or why it cannot be read."""
    if policy_hash(text) != hash:
        return "its text is not the one that was put in force"
    try:
        return read_policy(text)
    except RecordError as error:
        return str(error.message.values.get("detail", error.message.key))


def in_force(store: Store, head: int | None = None) -> Policy:
    """The policy in force in a store (as known at a sequence): the newest that can be read, else the shipped one."""
    newest = store.policy(head)
    if newest is None:
        return shipped_policy()
    tried = _tried(newest[1], newest[0])
    return tried if isinstance(tried, Policy) else found(store, head).policy


def found(store: Store, head: int | None = None) -> PolicyInForce:
    """The policy in force with its text, and what had to be passed over for it."""
    over: list[tuple[KeptPolicy, str]] = []
    for kept in store.policies(head):
        tried = _tried(kept.text, kept.hash)
        if isinstance(tried, Policy):
            told = tuple(_passed_over(k, why, tried) for k, why in over)
            return PolicyInForce(tried, kept.text, False, kept.by, kept.recorded_at, told)
        over.append((kept, tried))
    policy = shipped_policy()
    return PolicyInForce(policy, shipped_text(), True, passed_over=tuple(_passed_over(k, w, policy) for k, w in over))


def _passed_over(kept: KeptPolicy, why: str, stands: Policy) -> Message:
    values: dict[str, Value] = {"hash": kept.hash[:16], "by": kept.by, "at": kept.recorded_at, "detail": why,
              "name": stands.name, "version": stands.version}  # fmt: skip
    return Message("policy.passed_over", values)


def show(store: Store, who: str, now: Instant, request: None) -> Outcome[PolicyInForce]:
    """The policy in force with its text."""
    return Outcome(found(store), store.head())


def history(store: Store, who: str, now: Instant, request: None) -> Outcome[tuple[KeptPolicyFacts, ...]]:
    """Every policy that was put in force, the newest first."""
    told = []
    for kept in store.policies():
        tried = _tried(kept.text, kept.hash)
        name, version = (tried.name, tried.version) if isinstance(tried, Policy) else ("", 0)
        told.append(KeptPolicyFacts(kept.hash, name, version, kept.by, kept.recorded_at))
    return Outcome(tuple(told), store.head())


def begin(store: Store, who: str, now: Instant, request: None) -> Outcome[bool]:
    """Copy the shipped policy into a store that has none, so that a newer program does not change its limits.

    Whether that was needed.
    """
    if store.read_only or store.policy() is not None:
        return Outcome(False, store.head())
    receipt = store.put_policy(shipped_text(), shipped_policy().hash, who, now)
    return Outcome(True, receipt.last_seq)


def put(store: Store, who: str, now: Instant, request: str) -> Outcome[Policy]:
    """Put a policy's TOML text in force. Putting an earlier text back is the undo.

    Raises:
        RecordError: `people.lead_needed`; `policy.*`, the first fault of a text that is no usable policy; nothing
            is changed.
    """
    require_lead(store, who)
    faults = [f for f in check(request).findings if f.kind == ERROR]
    if faults:
        raise RecordError(faults[0].message)
    policy = read_policy(request)
    receipt = store.put_policy(request, policy.hash, who, now)
    return Outcome(policy, receipt.last_seq)
