"""The people of a store: initials, a PIN under a slow hash, and what they may do. Kept as events in the one chain.

A PIN is short, so each try costs (Argon2id, RFC 9106), and after a few wrong ones the next is made to wait. Wrong
tries are events too, so that starting the program anew shortens no wait. Who holds the file and its passphrase
needs no PIN: it says who logs, and keeps a colleague's screen closed.
"""

from __future__ import annotations

import hmac
import json
import os
import re
from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field
from itertools import pairwise
from typing import TYPE_CHECKING, Any

from core.record.instant import SECOND, Instant
from core.record.message import refuse
from storage.keys import Cost, new_recovery_code, plain_code
from storage.person_events import PersonEvent

if TYPE_CHECKING:
    from storage.draft_batch import Receipt
    from storage.store import Store

STAFF, LEAD = "staff", "ward lead"
ROLES = (STAFF, LEAD)
ADDED, PIN_SET, ROLE_SET, RETIRED = "person added", "pin changed", "role changed", "person retired"
SIGNED_IN, TURNED_AWAY = "signed in", "sign-in refused"
CODE_USED = "recovery code used"
CODE_SET = "recovery code of people set"
PIN_COST = Cost(32_768, 2, 1)
MOST_INITIALS, LEAST_PIN, MOST_PIN = 12, 4, 12
FREE_TRIES, MOST_WAIT = 3, 300
"""Wrong tries before the next must wait, and the longest wait in seconds: a ward is never locked out for long."""
_MANAGED = (ADDED, PIN_SET, ROLE_SET, RETIRED)
_TRIES = 20
_PATIENCE = 2.0
"""Seconds for which a try waits for another window to end its writing, so that it is kept."""


@dataclass(frozen=True, slots=True)
class Person:
    """Somebody who may log. Those who have gone stay known: their entries name them."""

    initials: str
    role: str
    retired: bool
    since: Instant
    pin: Mapping[str, Any] = field(repr=False)

    @property
    def is_lead(self) -> bool:
        """Whether they may change policy and people, restore and remove."""
        return self.role == LEAD and not self.retired


_unkept: dict[tuple[str, str], list[PersonEvent]] = {}
"""Tries at stores that could keep no event, by store and person, for as long as the program runs."""


def people(events: Iterable[PersonEvent]) -> dict[str, Person]:
    """Everybody by initials, as the events in order leave them. What cannot be read gives no rights."""
    found: dict[str, Person] = {}
    for e in events:
        detail = _read(e.detail)
        old = found.get(e.person)
        if e.event == ADDED:
            found[e.person] = Person(e.person, _role(detail), False, e.recorded_at, _pin(detail))
        elif old is not None and e.event == PIN_SET:
            found[e.person] = Person(old.initials, old.role, old.retired, old.since, _pin(detail))
        elif old is not None and e.event == ROLE_SET:
            found[e.person] = Person(old.initials, _role(detail), old.retired, old.since, old.pin)
        elif old is not None and e.event == RETIRED:
            found[e.person] = Person(old.initials, old.role, True, old.since, {})
    return found


def of_store(store: Store) -> dict[str, Person]:
    """Everybody of a store; empty where nobody was added, so that initials alone are asked for."""
    return people(store.person_events(_MANAGED))


def check_initials(text: str) -> str:
    """Initials in capitals.

    Raises:
        RecordError: `people.bad_initials`.

    >>> check_initials(" ab ")
    'AB'
    """
    initials = text.strip().upper()
    if not re.fullmatch(rf"[^\W_][\w-]{{0,{MOST_INITIALS - 1}}}", initials):
        raise refuse("people.bad_initials", value=text[:40], accepted=MOST_INITIALS)
    return initials


def check_new_pin(pin: str) -> None:
    """Refuse a PIN that is too short or guessed first.

    Raises:
        RecordError: `people.weak_pin`. The PIN itself stands in no message.
    """
    if not re.fullmatch(rf"[0-9]{{{LEAST_PIN},{MOST_PIN}}}", pin):
        raise refuse("people.bad_pin", accepted=f"{LEAST_PIN} to {MOST_PIN} digits")
    steps = {int(b) - int(a) for a, b in pairwise(pin)}
    if steps in ({0}, {1}, {-1}):
        raise refuse("people.weak_pin", accepted="digits that are no row and not all the same")


def add(store: Store, initials: str, pin: str, role: str, *, by: str, now: Instant) -> Receipt:
    """Add somebody; the first of a store is a ward lead.

    Raises:
        RecordError: `people.*`.
    """
    known = of_store(store)
    initials = check_initials(initials)
    check_new_pin(pin)
    if role not in ROLES:
        raise refuse("people.bad_role", value=role, accepted=" | ".join(ROLES))
    if not known and role != LEAD:
        raise refuse("people.first_is_lead", accepted=LEAD)
    if initials in known and not known[initials].retired:
        raise refuse("people.exists", person=initials, accepted="initials that are not in use")
    detail = json.dumps({"role": role, "pin": hashed(pin)})
    return store.record_event(ADDED, person=initials, by=by, now=now, detail=detail)


def set_pin(store: Store, initials: str, pin: str, *, by: str, now: Instant) -> Receipt:
    """Give somebody a new PIN.

    Raises:
        RecordError: `people.*`.
    """
    check_new_pin(pin)
    known = active(of_store(store), initials)
    detail = json.dumps({"pin": hashed(pin)})
    return store.record_event(PIN_SET, person=known.initials, by=by, now=now, detail=detail)


def retire(store: Store, initials: str, *, by: str, now: Instant) -> Receipt:
    """Take somebody's sign-in away; their entries stay. The last ward lead cannot go.

    Raises:
        RecordError: `people.unknown`, `people.last_lead`.
    """
    known = of_store(store)
    person = active(known, initials)
    if person.is_lead and sum(p.is_lead for p in known.values()) == 1:
        raise refuse("people.last_lead", person=person.initials, accepted="another ward lead first")
    return store.record_event(RETIRED, person=person.initials, by=by, now=now)


def active(known: Mapping[str, Person], initials: str) -> Person:
    """Somebody who may sign in.

    Raises:
        RecordError: `people.unknown`.
    """
    person = known.get(initials.strip().upper())
    if person is None or person.retired:
        names = ", ".join(sorted(p.initials for p in known.values() if not p.retired)) or "nobody yet"
        raise refuse("people.unknown", value=initials[:40], accepted=names)
    return person


def sign_in(store: Store, initials: str, pin: str, now: Instant) -> Person:
    """Check a PIN; the try is an event, right or wrong. A store that takes no writing keeps no event: then this
    program remembers the try, so that nobody tries on for want of one.

    Raises:
        RecordError: `people.unknown`, `people.wait`, `people.wrong_pin`.
    """
    person = active(of_store(store), initials)
    tries = store.person_events((SIGNED_IN, TURNED_AWAY), person=person.initials, newest=_TRIES)
    unkept = _unkept.setdefault((store.store_id, person.initials), [])
    left = seconds_to_wait(sorted([*tries, *unkept], key=lambda e: e.recorded_at), now)
    if left:
        raise refuse("people.wait", person=person.initials, seconds=left)
    right = fits(person.pin, pin)
    event = SIGNED_IN if right else TURNED_AWAY
    if store.takes_writing(_PATIENCE):
        store.record_event(event, person=person.initials, now=now)
    else:
        unkept.append(PersonEvent(0, person.initials, event, "", person.initials, now))
    if not right:
        raise refuse("people.wrong_pin", person=person.initials)
    return person


def code_if_none(store: Store, *, by: str, now: Instant) -> str:
    """Make the code by which who has no PIN gets one, where the store has none: "" where it has. An encrypted store's
    recovery code serves; a plain one keeps a code under the slow hash, told this once."""
    if store.is_encrypted or store.person_events((CODE_SET,)):
        return ""
    code = new_recovery_code()
    store.record_event(CODE_SET, person=by, now=now, detail=json.dumps(hashed(plain_code(code))))
    return code


def is_code(store: Store, code: str) -> bool:
    """Whether a code is the one that gives somebody a PIN; a passphrase, which a whole ward knows, is not."""
    if not code:
        return False
    if store.is_encrypted:
        return store.is_recovery_code(code)
    kept = store.person_events((CODE_SET,), newest=1)
    return any(fits(_read(e.detail), plain_code(code)) for e in kept)


def seconds_to_wait(tries: Iterable[PersonEvent], now: Instant) -> int:
    """How long the next try must wait, from the tries so far in order.

    The wait doubles with each wrong try in a row. A clock that stands before the last try (it was set back) makes
    nobody wait: the try after that is slowed again.
    """
    wrong: list[PersonEvent] = []
    for one in tries:
        wrong = [*wrong, one] if one.event == TURNED_AWAY else []
    if len(wrong) < FREE_TRIES:
        return 0
    at = wrong[-1].recorded_at - wrong[-1].skew
    if now < at:
        return 0
    wait: int = min(MOST_WAIT, 5 * 2 ** (len(wrong) - FREE_TRIES))
    return max(0, -((now - at - wait * SECOND) // SECOND))


def hashed(pin: str, cost: Cost = PIN_COST) -> dict[str, Any]:
    """A PIN under a slow hash with a salt of its own."""
    salt = os.urandom(16)
    made = {"salt": salt.hex(), "memory_kib": cost.memory_kib, "passes": cost.passes, "lanes": cost.lanes}
    return {**made, "hash": _derived(pin, salt, cost).hex()}


def fits(kept: Mapping[str, Any], pin: str) -> bool:
    """Whether a PIN is the one that was hashed."""
    try:
        cost = Cost(int(kept["memory_kib"]), int(kept["passes"]), int(kept["lanes"]))
        if cost.memory_kib > 4 * PIN_COST.memory_kib or cost.passes > 10 or cost.lanes > 4:
            return False
        return hmac.compare_digest(_derived(pin, bytes.fromhex(kept["salt"]), cost).hex(), str(kept["hash"]))
    except (KeyError, TypeError, ValueError):
        return False


def _derived(pin: str, salt: bytes, cost: Cost) -> bytes:
    from cryptography.hazmat.primitives.kdf.argon2 import Argon2id

    kdf = Argon2id(salt=salt, length=32, iterations=cost.passes, lanes=cost.lanes, memory_cost=cost.memory_kib)
    return kdf.derive(pin.encode("utf-8", "replace"))


def _read(detail: str) -> Mapping[str, Any]:
    try:
        found = json.loads(detail) if detail else {}
    except ValueError:
        return {}
    return found if isinstance(found, dict) else {}


def _role(detail: Mapping[str, Any]) -> str:
    return LEAD if detail.get("role") == LEAD else STAFF


def _pin(detail: Mapping[str, Any]) -> Mapping[str, Any]:
    found = detail.get("pin")
    return found if isinstance(found, dict) else {}
