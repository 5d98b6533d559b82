"""`luffmark policy` end to end: show, check, put, history, and one that cannot be read said beside every answer."""

from __future__ import annotations

import json
from pathlib import Path

import pytest

from app.cli import DONE, REFUSED, WRONG_USAGE, main
from core.judgement.policy import policy_hash, shipped_text
from core.record.instant import parse
from storage.store import Store
from tests.support.command_line import Run, on_store

WARD = (
    shipped_text()
    .replace('name = "Shipped policy"', 'name = "Ward 7"')
    .replace("limits = { ph = 7.25 }", "limits = { ph = 7.2 }", 1)
)
ROWS = (
    "episode,at,channel,value,unit,by,note\n"
    "N4,2026-03-27T20:10:00+00:00,site,arterial,,AB,\n"
    "N4,2026-03-27T20:10:00+00:00,ph,7.22,,AB,\n"
    "N4,2026-03-27T20:10:00+00:00,paco2,68,mmHg,AB,\n"
)


@pytest.fixture
def run(store: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> Run:
    log = tmp_path / "log.csv"
    log.write_text(ROWS, "utf-8")
    runner = on_store(store, capsys, "--by", "CD", "--zone", "UTC")
    runner("intake", log)
    return runner


@pytest.fixture
def ward_file(tmp_path: Path) -> Path:
    path = tmp_path / "ward7.toml"
    path.write_text(WARD, "utf-8")
    return path


def test_a_new_store_has_its_own_copy(run: Run) -> None:
    told = json.loads(run("policy", "show", "--json")[1])
    assert (told["shipped"], told["text"]) == (False, shipped_text())
    assert run("policy", "history")[1].count("Shipped policy, version 1  by CD") == 1


@pytest.mark.parametrize("imported", [False, True])
def test_a_store_of_files_has_its_copy_once_they_are_in(tmp_path: Path, store: Path, imported: bool) -> None:
    log = tmp_path / "log.csv"
    log.write_text(ROWS, "utf-8")
    options = ["--keep-recording-times"] if imported else []
    for _ in range(2):
        assert main(["--store", str(store), "intake", str(log), *(options if not store.exists() else [])]) == DONE
    with Store.open(store, read_only=True) as opened:
        assert opened.imported is imported
        assert [k.text for k in opened.policies()] == [shipped_text()]


def test_check_says_what_differs_and_put_puts_it_in_force(run: Run, ward_file: Path) -> None:
    code, out, _ = run("policy", "check", ward_file)
    assert code == DONE
    assert "markers.ph_below_severe.limits.ph: 7.2 (shipped 7.25)" in out
    assert "pH below 7.25" in _flags(run)
    code, out, _ = run("policy", "put", ward_file)
    assert (code, out.startswith("In force now: Ward 7, version 1")) == (DONE, True)
    assert not _flags(run)
    lines = run("policy", "history")[1].splitlines()
    assert [line.split("  ")[2] for line in lines] == ["Ward 7, version 1", "Shipped policy, version 1"]


def _flags(run: Run) -> str:
    told = json.loads(run("figures", "N4", "--as-of", "2026-03-27T21:00:00Z", "--json")[1])
    return "pH below 7.25" if "ph_below_severe" in [f["marker"] for f in told["episodes"][0]["flags"]] else ""


def test_a_bad_file_changes_nothing_and_says_which_stays(run: Run, tmp_path: Path) -> None:
    bad = tmp_path / "bad.toml"
    text = WARD.replace("ph = 7.2 }", "ph = 72 }").replace('sure = "confirmed"', 'sure = "certain"', 1)
    bad.write_text(text, "utf-8")
    code, out, err = run("policy", "put", bad)
    assert (code, out) == (REFUSED, "")
    assert err.splitlines()[-1].startswith("In force as before: Shipped policy, version 1")
    assert "certain" in err
    assert len(run("policy", "history")[1].splitlines()) == 1


def test_what_is_no_text_is_refused(run: Run, tmp_path: Path) -> None:
    bad = tmp_path / "bad.toml"
    for content in (b"\xff\xfe\x00", b"x" * 1_000_001):
        bad.write_bytes(content)
        code, _, err = run("policy", "put", bad)
        assert code == REFUSED
        assert err.startswith("luffmark: ")
    bad.write_bytes(b"\xef\xbb\xbf" + WARD.encode())  # editors of one system begin with a mark
    assert run("policy", "check", bad)[0] == DONE


def test_one_that_cannot_be_read_is_said_and_the_last_good_one_judges(run: Run, store: Path, ward_file: Path) -> None:
    run("policy", "put", ward_file)
    with Store.open(store) as opened:
        opened.put_policy("x = 1", policy_hash("x = 1"), "EF", parse("2099-01-01T00:00:00Z"))
    for command in (("figures", "N4"), ("policy", "show"), ("log", "N4", "rr 24", "--yes")):
        _, _, err = run(*command)
        assert "cannot be read" in err
        assert "Ward 7, version 1, stays in force" in err
    told = json.loads(run("policy", "show", "--json")[1])
    assert (told["name"], len(told["passed_over"])) == ("Ward 7", 1)
    assert "cannot be read" in run("policy", "history")[1].splitlines()[0]


def test_policy_is_shown_checked_and_put_in_force(run: Run, tmp_path: Path) -> None:
    _, shown, _ = run("policy", "show")
    assert shown.strip() == shipped_text().strip()
    good, bad = tmp_path / "ward.toml", tmp_path / "bad.toml"
    good.write_text(shipped_text().replace('name = "Shipped policy"', 'name = "Ward 4"'), "utf-8")
    bad.write_text(shipped_text().replace("window_from_min", "window_form_min"), "utf-8")
    assert run("policy", "check", bad)[0] == REFUSED
    assert "window_form_min" in run("policy", "check", bad)[2]
    assert run("policy", "check", good)[0] == DONE
    assert run("policy", "put", good)[0] == DONE
    assert json.loads(run("policy", "show", "--json")[1])["name"] == "Ward 4"
    assert run("policy", "check")[0] == WRONG_USAGE
