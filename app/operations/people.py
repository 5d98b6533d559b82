"""Operations on people: who there are, signing in, and what only a ward lead may do."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import TYPE_CHECKING

from app.operations.outcome import Outcome
from core.record.instant import Instant
from core.record.message import refuse
from storage import people

if TYPE_CHECKING:
    from storage.people import Person
    from storage.store import Store


@dataclass(frozen=True, slots=True)
class SignIn:
    """Initials and a PIN as typed."""

    initials: str
    pin: str = field(repr=False)


@dataclass(frozen=True, slots=True)
class NewPerson:
    """Somebody to be added."""

    initials: str
    pin: str = field(repr=False)
    role: str = people.STAFF


@dataclass(frozen=True, slots=True)
class NewPin:
    """A new PIN for somebody. `recovery_code` gives a ward lead's right where every lead has forgotten their PIN."""

    initials: str
    pin: str = field(repr=False)
    recovery_code: str = field(default="", repr=False)


def listed(store: Store, who: str, now: Instant, request: None) -> Outcome[tuple[Person, ...]]:
    """Everybody, those who may sign in first, by initials."""
    found = sorted(people.of_store(store).values(), key=lambda p: (p.retired, p.initials))
    return Outcome(tuple(found), store.head())


def sign_in(store: Store, who: str, now: Instant, request: SignIn) -> Outcome[str]:
    """Sign somebody in; their initials as kept.

    Raises:
        RecordError: `people.unknown`, `people.wait`, `people.wrong_pin`.
    """
    person = people.sign_in(store, request.initials, request.pin, now)
    return Outcome(person.initials, store.head())


def add(store: Store, who: str, now: Instant, request: NewPerson) -> Outcome[str]:
    """Add somebody. A ward lead does; the first of a store, who is one, may be added by anybody.

    Raises:
        RecordError: `people.*`.
    """
    require_lead(store, who)
    receipt = people.add(store, request.initials, request.pin, request.role, by=who, now=now)
    return Outcome(people.check_initials(request.initials), receipt.last_seq)


def set_pin(store: Store, who: str, now: Instant, request: NewPin) -> Outcome[None]:
    """Give somebody a new PIN: their own, or any for a ward lead or with the recovery code.

    Raises:
        RecordError: `people.*`.
    """
    own = request.initials.strip().upper() == who
    if not own and not people.is_code(store, request.recovery_code):
        require_lead(store, who)
    receipt = people.set_pin(store, request.initials, request.pin, by=who, now=now)
    return Outcome(None, receipt.last_seq)


def retire(store: Store, who: str, now: Instant, request: str) -> Outcome[None]:
    """Take somebody's sign-in away.

    Raises:
        RecordError: `people.*`.
    """
    require_lead(store, who)
    return Outcome(None, people.retire(store, request, by=who, now=now).last_seq)


def require_lead(store: Store, who: str) -> None:
    """Refuse what only a ward lead may do. A store without people has none, and asks for none.

    Raises:
        RecordError: `people.lead_needed`.
    """
    known = people.of_store(store)
    if known and not (who in known and known[who].is_lead):
        leads = ", ".join(sorted(p.initials for p in known.values() if p.is_lead))
        raise refuse("people.lead_needed", person=who, accepted=leads)


def pin_by_code(store: Store, who: str, now: Instant, request: NewPin) -> Outcome[str]:
    """Give somebody a PIN by the recovery code, a new one or, as staff, the first one, and sign them in; their
    initials. That the code was used is an event of its own.

    Raises:
        RecordError: `people.wrong_code`, `people.bad_initials`, `people.bad_pin`, `people.weak_pin`.
    """
    if not people.is_code(store, request.recovery_code):
        raise refuse("people.wrong_code", accepted="the recovery code of this store")
    initials = people.check_initials(request.initials)
    known = people.of_store(store).get(initials)
    if known is None or known.retired:
        people.add(store, initials, request.pin, people.STAFF, by=initials, now=now)
    else:
        people.set_pin(store, initials, request.pin, by=initials, now=now)
    store.record_event(people.CODE_USED, person=initials, now=now)
    return Outcome(initials, store.record_event(people.SIGNED_IN, person=initials, now=now).last_seq)


def code_once(store: Store, who: str, now: Instant, request: None) -> Outcome[str]:
    """The code that gives a PIN to who has none, for a ward lead of a plain store that has no such code yet; else "".

    An encrypted store has its recovery code since it was made.
    """
    known = people.of_store(store).get(who)
    if known is None or not known.is_lead or not store.takes_writing():
        return Outcome("", store.head())
    return Outcome(people.code_if_none(store, by=who, now=now), store.head())
