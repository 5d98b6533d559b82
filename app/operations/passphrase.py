"""Operations on what opens an encrypted store: its passphrase and its recovery code."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import TYPE_CHECKING

from app.operations.outcome import Outcome
from app.operations.people import require_lead
from core.record.instant import Instant
from storage.errors import store_error

if TYPE_CHECKING:
    from storage.store import Store

CHANGED, CODE_CHANGED = "passphrase changed", "recovery code changed"
SECOND_SET, SECOND_GONE = "second passphrase set", "second passphrase taken away"


@dataclass(frozen=True, slots=True)
class ChangeRequest:
    """The passphrase now or the recovery code, the new passphrase, and whether the code is to be made anew."""

    secret: str = field(repr=False)
    new: str = field(repr=False)
    new_code: bool = False


@dataclass(frozen=True, slots=True)
class SecondRequest:
    """A secret that opens the store now, and the second passphrase; "" takes it away."""

    secret: str = field(repr=False)
    second: str = field(repr=False)


def has_second(store: Store, who: str, now: Instant, request: None) -> Outcome[bool]:
    """Whether a second passphrase opens the store."""
    return Outcome(store.has_second_passphrase, store.head())


def set_second(store: Store, who: str, now: Instant, request: SecondRequest) -> Outcome[bool]:
    """Set or take away the second passphrase; a ward lead does, where people sign in. Whether there is one now.

    Raises:
        StoreError: `key.wrong_passphrase`, `store.not_encrypted`, `store.read_only`.
        RecordError: `passphrase.too_short`, `people.lead_needed`.
    """
    require_lead(store, who)
    store.set_second_passphrase(request.secret, request.second or None)
    event = SECOND_SET if request.second else SECOND_GONE
    receipt = store.record_event(event, person=who, now=now)
    return Outcome(bool(request.second), receipt.last_seq)


def code_once(store: Store, who: str, now: Instant, request: None) -> Outcome[str]:
    """The recovery code of a store that was made just now; "" for any other."""
    return Outcome(store.recovery_code or "", store.head())


def change(store: Store, who: str, now: Instant, request: ChangeRequest) -> Outcome[str]:
    """Give the store a new passphrase, and a new recovery code where that is wanted; the code, else "".

    The ledger keeps that it was done and by whom.

    Raises:
        StoreError: `key.wrong_passphrase`, `store.not_encrypted`, `store.read_only`.
        RecordError: `passphrase.too_short`.
    """
    store.change_passphrase(request.secret, request.new)
    code = store.new_recovery_code(request.new) if request.new_code else ""
    receipt = store.record_event(CHANGED, person=who, now=now)
    if code:
        receipt = store.record_event(CODE_CHANGED, person=who, now=now)
    return Outcome(code, receipt.last_seq)


def unlock(store: Store, who: str, now: Instant, request: str) -> Outcome[None]:
    """Check that a secret is the store's passphrase or recovery code.

    Raises:
        StoreError: `key.wrong_passphrase`, `key.envelope_missing`, `key.envelope_altered`, `store.not_encrypted`.
    """
    if not store.opens_with(request):
        raise store_error("key.wrong_passphrase")
    return Outcome(None, store.head())
