"""People: a PIN under a slow hash, wrong tries that wait longer and longer, a ward lead that is always there."""

from __future__ import annotations

import json
import subprocess
import sys
from collections.abc import Callable
from pathlib import Path

import pytest

from core.record.instant import HOUR, SECOND
from core.record.message import RecordError
from storage import people
from storage.keys import Cost
from storage.people import LEAD, SIGNED_IN, STAFF, TURNED_AWAY
from storage.person_events import PersonEvent
from storage.store import Store
from tests.storage.conftest import NOW, PASSPHRASE

PIN, OTHER = "2580", "739146"


@pytest.fixture(autouse=True)
def cheap(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(people.hashed, "__defaults__", (Cost(64, 1, 1),))
    monkeypatch.setattr(people, "_unkept", {})


@pytest.fixture
def ward(store: Store) -> Store:
    people.add(store, "ab", PIN, LEAD, by="AB", now=NOW)
    people.add(store, "CD", OTHER, STAFF, by="AB", now=NOW)
    return store


def refused(work: Callable[[], object]) -> str:
    with pytest.raises(RecordError) as caught:
        work()
    return caught.value.message.key


def test_a_person_signs_in_and_it_stands_in_the_chain(ward: Store) -> None:
    assert people.sign_in(ward, " ab", PIN, NOW).is_lead
    assert not people.sign_in(ward, "CD", OTHER, NOW).is_lead
    assert refused(lambda: people.sign_in(ward, "CD", PIN, NOW)) == "people.wrong_pin"
    told = [(e.person, e.event) for e in ward.person_events((SIGNED_IN, TURNED_AWAY))]
    assert told == [("AB", SIGNED_IN), ("CD", SIGNED_IN), ("CD", TURNED_AWAY)]
    assert ward.verify() == ()


@pytest.mark.parametrize(
    ("initials", "pin", "role", "key"),
    [
        ("EF", "123", STAFF, "people.bad_pin"), ("EF", "12e4", STAFF, "people.bad_pin"),
        ("EF", "1" * 13, STAFF, "people.bad_pin"), ("EF", "٣٤٥٧", STAFF, "people.bad_pin"),
        ("EF", "4321", STAFF, "people.weak_pin"), ("EF", "0000", STAFF, "people.weak_pin"),
        ("E F", PIN, STAFF, "people.bad_initials"), ("", PIN, STAFF, "people.bad_initials"),
        ("<b>", PIN, STAFF, "people.bad_initials"), ("E" * 13, PIN, STAFF, "people.bad_initials"),
        ("EF", PIN, "king", "people.bad_role"), ("cd", PIN, STAFF, "people.exists"),
    ],
)  # fmt: skip
def test_who_cannot_be_added(ward: Store, initials: str, pin: str, role: str, key: str) -> None:
    head = ward.head()
    assert refused(lambda: people.add(ward, initials, pin, role, by="AB", now=NOW)) == key
    assert ward.head() == head


def test_the_first_is_a_ward_lead_and_one_always_stays(store: Store) -> None:
    assert refused(lambda: people.add(store, "AB", PIN, STAFF, by="", now=NOW)) == "people.first_is_lead"
    people.add(store, "AB", PIN, LEAD, by="", now=NOW)
    assert refused(lambda: people.retire(store, "AB", by="AB", now=NOW)) == "people.last_lead"
    people.add(store, "CD", OTHER, LEAD, by="AB", now=NOW)
    people.retire(store, "AB", by="CD", now=NOW)
    assert refused(lambda: people.sign_in(store, "AB", PIN, NOW)) == "people.unknown"
    assert people.of_store(store)["AB"].retired
    people.add(store, "AB", OTHER, STAFF, by="CD", now=NOW)
    assert people.sign_in(store, "AB", OTHER, NOW).role == STAFF


def test_a_new_pin_takes_the_place_of_the_old_one(ward: Store) -> None:
    people.set_pin(ward, "CD", "864297", by="AB", now=NOW)
    assert refused(lambda: people.sign_in(ward, "CD", OTHER, NOW)) == "people.wrong_pin"
    assert people.sign_in(ward, "CD", "864297", NOW).initials == "CD"


def test_no_pin_and_no_two_equal_hashes_are_kept(ward: Store) -> None:
    people.add(ward, "EF", OTHER, STAFF, by="AB", now=NOW)
    details = [e.detail for e in ward.person_events()]
    assert not any(PIN in d or OTHER in d for d in details)
    hashes = [json.loads(d)["pin"]["hash"] for d in details]
    assert len(set(hashes)) == len(hashes)
    assert PIN not in repr(people.of_store(ward))
    assert "salt" not in repr(people.of_store(ward))


def test_wrong_tries_wait_longer_whichever_program_they_come_from(ward: Store) -> None:
    for _ in range(people.FREE_TRIES):
        assert refused(lambda: people.sign_in(ward, "CD", "975310", NOW)) == "people.wrong_pin"
    with Store.open(ward.path) as another:
        assert refused(lambda: people.sign_in(another, "CD", OTHER, NOW + SECOND)) == "people.wait"
        assert people.sign_in(another, "AB", PIN, NOW).initials == "AB"  # nobody else waits
        assert people.sign_in(another, "CD", OTHER, NOW + 6 * SECOND).initials == "CD"
    assert refused(lambda: people.sign_in(ward, "CD", "975310", NOW + 7 * SECOND)) == "people.wrong_pin"


def tries(count: int, at: int = NOW, skew: int = 0) -> list[PersonEvent]:
    return [PersonEvent(i, "CD", TURNED_AWAY, "", "CD", at, skew) for i in range(count)]


def test_the_wait_doubles_and_has_an_end() -> None:
    waits = [people.seconds_to_wait(tries(n), NOW) for n in range(12)]
    assert waits[:6] == [0, 0, 0, 5, 10, 20]
    assert max(waits) == people.MOST_WAIT
    assert people.seconds_to_wait([*tries(9), PersonEvent(9, "CD", SIGNED_IN, "", "CD", NOW)], NOW) == 0


def test_a_clock_set_back_locks_nobody_out() -> None:
    assert people.seconds_to_wait(tries(5), NOW - HOUR) == 0
    held = tries(5, at=NOW, skew=HOUR)  # tried again at an hour earlier: recorded as now, with its skew
    assert people.seconds_to_wait(held, NOW - HOUR) == 20


def test_what_cannot_be_read_gives_no_rights(store: Store) -> None:
    costly = '{"pin": {"salt": "00", "memory_kib": 99999999, "passes": 1, "lanes": 1, "hash": ""}}'
    for detail in ("", "[]", "{", '{"role": "ward lead", "pin": 7}', '{"pin": {"salt": "zz"}}', costly):
        store.record_event(people.ADDED, person="XY", now=NOW, detail=detail)
        assert refused(lambda: people.sign_in(store, "XY", PIN, NOW + HOUR)) in ("people.wrong_pin", "people.wait")


def test_a_store_open_for_reading_alone_signs_in_without_an_event(ward: Store) -> None:
    head = ward.head()
    with Store.open(ward.path, read_only=True) as reader:
        assert people.sign_in(reader, "AB", PIN, NOW).initials == "AB"
    assert ward.head() == head


def test_wrong_tries_wait_though_the_store_can_keep_none_of_them(ward: Store) -> None:
    with Store.open(ward.path, read_only=True) as reader:
        for _ in range(people.FREE_TRIES):
            assert refused(lambda: people.sign_in(reader, "AB", "975310", NOW)) == "people.wrong_pin"
        assert refused(lambda: people.sign_in(reader, "AB", PIN, NOW + SECOND)) == "people.wait"
        assert refused(lambda: people.sign_in(ward, "AB", PIN, NOW + SECOND)) == "people.wait"
        assert people.sign_in(reader, "AB", PIN, NOW + 6 * SECOND).is_lead
        assert people.sign_in(reader, "AB", PIN, NOW + 7 * SECOND).is_lead
    assert people.sign_in(ward, "AB", PIN, NOW + 8 * SECOND).is_lead


def test_wrong_tries_wait_over_a_restart(ward: Store) -> None:
    """Another process, as after a restart, finds the tries in the chain."""
    for _ in range(people.FREE_TRIES):
        refused(lambda: people.sign_in(ward, "CD", "975310", NOW))
    ward.close()
    code = (
        "import sys; from storage import people; from storage.store import Store\n"
        "with Store.open(sys.argv[1]) as store:\n"
        "    try: people.sign_in(store, 'CD', sys.argv[2], int(sys.argv[3]))\n"
        "    except Exception as error: print(error.message.key)\n"
    )
    command = [sys.executable, "-c", code, str(ward.path), OTHER, str(NOW + SECOND)]
    done = subprocess.run(command, capture_output=True, text=True, cwd=Path(__file__).parents[2], check=True)
    assert done.stdout.strip() == "people.wait"


def test_people_go_with_a_backup(make_store: Callable[..., Store]) -> None:
    store = make_store(encrypted=True)
    people.add(store, "AB", PIN, LEAD, by="AB", now=NOW)
    store.backup(store.path.with_name("copy.luff"))
    with Store.open(store.path.with_name("copy.luff"), passphrase=PASSPHRASE) as copy:
        assert people.sign_in(copy, "AB", PIN, NOW).is_lead
