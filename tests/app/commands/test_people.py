"""People on the command line: nobody writes as somebody else, and only a ward lead changes policy and people."""

import os

import pytest

from app.cli import main
from core.judgement.policy import shipped_text
from storage import people
from storage.keys import Cost
from storage.store import Store

LEAD_PIN, STAFF_PIN = "2580", "7391"


@pytest.fixture
def store(tmp_path, monkeypatch):
    monkeypatch.setattr(people.hashed, "__defaults__", (Cost(64, 1, 1),))
    path = tmp_path / "ward.luffmark"
    Store.create(path, now=1_774_000_000_000_000, by="AB").close()
    return path


@pytest.fixture
def run(store, capsys):
    """Runs a command with secrets on descriptors; gives exit code, stdout and stderr."""

    def runner(*words, **secrets):
        given = []
        for name, text in secrets.items():
            out, into = os.pipe()
            os.write(into, f"{text}\n".encode())
            os.close(into)
            given += [f"--{name}-fd", str(out)]
        capsys.readouterr()
        code = main(["--store", str(store), "--zone", "UTC", *words, *given])
        for descriptor in given[1::2]:
            os.close(int(descriptor))
        said = capsys.readouterr()
        return code, said.out, said.err

    return runner


@pytest.fixture
def ward(run):
    assert run("--by", "AB", "people", "add", "AB", "--lead", **{"new-pin": LEAD_PIN})[0] == 0
    code, out, err = run("--by", "AB", "people", "add", "cd", pin=LEAD_PIN, **{"new-pin": STAFF_PIN})
    assert (code, out) == (0, "CD was added as staff.\n"), err
    return run


def test_people_are_listed(ward):
    code, out, _ = ward("people", "list")
    assert code == 0
    assert out.splitlines()[0].startswith("AB  ward lead, since ")
    assert out.splitlines()[1].startswith("CD  staff")


def test_nobody_writes_without_a_pin_or_as_somebody_else(ward):
    log = ("log", "N4", "rr 24", "--new")
    code, _, err = ward("--by", "CD", *log)
    assert code == 1
    assert "--pin-fd" in err
    assert "wrong" in ward("--by", "CD", *log, pin=LEAD_PIN)[2]
    code, _, err = ward("--by", "EF", *log, pin=LEAD_PIN)
    assert code == 1
    assert "AB, CD" in err
    assert ward("figures")[0] == 0  # reading asks for nothing: the passphrase keeps the file
    code, _, err = ward("--by", "CD", *log, pin=STAFF_PIN)
    assert code == 0, err


def test_only_a_ward_lead_changes_people_and_policy(ward, tmp_path):
    code, _, err = ward("--by", "CD", "people", "add", "EF", pin=STAFF_PIN, **{"new-pin": "8642"})
    assert code == 1
    assert "Only a ward lead" in err
    assert "Accepted: AB" in err
    assert ward("--by", "CD", "people", "retire", "AB", pin=STAFF_PIN)[0] == 1
    policy = tmp_path / "policy.toml"
    policy.write_text(shipped_text(), "utf-8")
    assert "Only a ward lead" in ward("--by", "CD", "policy", "put", str(policy), pin=STAFF_PIN)[2]
    assert ward("--by", "AB", "policy", "put", str(policy), pin=LEAD_PIN)[0] == 0
    assert ward("--by", "AB", "people", "retire", "CD", pin=LEAD_PIN)[0] == 0
    assert ward("--by", "CD", "log", "N4", "rr 24", "--new", pin=STAFF_PIN)[0] == 1


def test_a_person_changes_their_own_pin_and_no_other(ward):
    assert ward("--by", "CD", "people", "pin", "CD", pin=STAFF_PIN, **{"new-pin": "8642"})[0] == 0
    assert ward("--by", "CD", "log", "N4", "rr 24", "--new", pin="8642")[0] == 0
    assert ward("--by", "CD", "people", "pin", "AB", pin="8642", **{"new-pin": "9753"})[0] == 1


def test_the_recovery_code_gives_a_lead_who_forgot_a_new_pin(tmp_path, capsys, monkeypatch):
    monkeypatch.setattr(people.hashed, "__defaults__", (Cost(64, 1, 1),))
    path = tmp_path / "secret.luffmark"
    with Store.create(path, passphrase="five boats at night", now=1_774_000_000_000_000) as made:
        people.add(made, "AB", LEAD_PIN, people.LEAD, by="AB", now=1_774_000_000_000_000)
        code = made.recovery_code

    def pipe(text):
        out, into = os.pipe()
        os.write(into, f"{text}\n".encode())
        os.close(into)
        return str(out)

    words = ["--store", str(path), "--by", "CD", "people", "pin", "AB"]
    wrong = [*words, "--passphrase-fd", pipe(code), "--recovery-fd", pipe("0" * 32), "--new-pin-fd", pipe("8642")]
    assert main(wrong) == 1
    right = [*words, "--passphrase-fd", pipe(code), "--recovery-fd", pipe(code), "--new-pin-fd", pipe("8642")]
    assert main(right) == 0
    with Store.open(path, passphrase=code) as store:
        assert people.sign_in(store, "AB", "8642", 1_774_000_000_000_000).is_lead
