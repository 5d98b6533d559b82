"""The recovery code gives somebody a PIN where nobody here has one that fits; the passphrase does not."""

import pytest

from app.operations.people import NewPin, code_once, pin_by_code
from core.record.message import RecordError
from storage import people
from storage.keys import Cost
from storage.store import Store
from tests.support.open_window import NOW

SECRET, CHEAP = "four quiet boats tonight", Cost(64, 1, 1)


@pytest.fixture
def store(tmp_path, monkeypatch):
    monkeypatch.setattr(people.hashed, "__defaults__", (CHEAP,))
    with Store.create(tmp_path / "ward.luffmark", now=NOW, passphrase=SECRET, cost=CHEAP) as made:
        people.add(made, "AB", "2580", people.LEAD, by="AB", now=NOW)
        people.add(made, "EF", "4826", people.STAFF, by="AB", now=NOW)
        people.retire(made, "EF", by="AB", now=NOW)
        yield made


def by_code(store, initials, pin, code=None):
    return pin_by_code(store, "", NOW, NewPin(initials, pin, code or store.recovery_code)).value


def test_who_has_none_becomes_staff_and_who_forgot_theirs_keeps_their_role(store):
    assert by_code(store, "cd", "7391") == "CD"
    assert by_code(store, "ab", "9137") == "AB"
    assert by_code(store, "EF", "6284") == "EF"
    known = people.of_store(store)
    assert {p.initials: p.role for p in known.values()} == {"AB": people.LEAD, "CD": people.STAFF, "EF": people.STAFF}
    assert not known["EF"].retired
    for initials, pin in (("CD", "7391"), ("AB", "9137"), ("EF", "6284")):
        assert people.sign_in(store, initials, pin, NOW).initials == initials
    with pytest.raises(RecordError, match=r"people.wrong_pin"):
        people.sign_in(store, "AB", "2580", NOW)
    used = [(e.person, e.by) for e in store.person_events((people.CODE_USED,))]
    assert used == [("CD", "CD"), ("AB", "AB"), ("EF", "EF")]
    assert store.verify() == ()


@pytest.mark.parametrize("code", [SECRET, "NA43-SJZV-YHQS-FFPK-G19D-EX8K-PZ94-J68Y", ""])
def test_nothing_but_the_code_does(store, code):
    head = store.head()
    with pytest.raises(RecordError, match=r"people.wrong_code"):
        pin_by_code(store, "", NOW, NewPin("AB", "9137", code))
    assert store.head() == head


@pytest.mark.parametrize("pin", ["1234", "12", "abcd"])
def test_a_weak_pin_is_refused_and_nothing_is_kept(store, pin):
    head = store.head()
    with pytest.raises(RecordError, match=r"people.(weak|bad)_pin"):
        by_code(store, "CD", pin)
    assert store.head() == head


def test_a_plain_store_has_a_code_of_its_own_for_its_people(tmp_path, monkeypatch):
    monkeypatch.setattr(people.hashed, "__defaults__", (CHEAP,))
    with Store.create(tmp_path / "plain.luffmark", now=NOW) as plain:
        people.add(plain, "AB", "2580", people.LEAD, by="AB", now=NOW)
        people.add(plain, "CD", "7391", people.STAFF, by="AB", now=NOW)
        assert code_once(plain, "CD", NOW, None).value == ""  # a ward lead is shown it, nobody else
        code = code_once(plain, "AB", NOW, None).value
        assert len(code.replace("-", "")) == 32
        assert code_once(plain, "AB", NOW, None).value == ""  # this once
        assert not any(code in e.detail for e in plain.person_events())
        with pytest.raises(RecordError, match=r"people.wrong_code"):
            by_code(plain, "AB", "9137", "NA43-SJZV-YHQS-FFPK-G19D-EX8K-PZ94-J68Y")
        assert by_code(plain, "AB", "9137", code.lower().replace("-", " ")) == "AB"
        assert people.sign_in(plain, "AB", "9137", NOW).is_lead
        assert plain.verify() == ()


def test_an_encrypted_store_makes_no_second_code(store):
    assert code_once(store, "AB", NOW, None).value == ""


def test_wrong_tries_before_are_forgiven(store):
    for _ in range(5):
        try:
            people.sign_in(store, "AB", "0000", NOW)
        except RecordError:
            continue
    by_code(store, "AB", "9137")
    assert people.sign_in(store, "AB", "9137", NOW).initials == "AB"
