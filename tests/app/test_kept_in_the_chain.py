"""What people do beside entries stands in the one chain: exports, prints, policies."""

import pytest

from app.cli import main
from core.judgement.policy import shipped_text
from storage.store import Store
from tests.support.open_window import make_store, open_window, settled, until


@pytest.fixture
def path(tmp_path):
    return make_store(tmp_path / "ward.luffmark")


def events(path, *kinds):
    with Store.open(path, read_only=True) as store:
        assert store.verify() == ()
        return [(e.person, e.event, e.detail) for e in store.person_events(kinds)]


def test_a_print_and_an_export_from_the_window(qtbot, path, tmp_path):
    with open_window(qtbot, path) as window:
        window.doers.ward.save_handover(tmp_path / "sheet.pdf")
        until(qtbot, lambda: (tmp_path / "sheet.pdf").exists())
        settled(qtbot, window)
        assert "was written" in window.strip.plain()
        window.doers.review._printed = "Shift, head"
        window.doers.review._note_print()
        settled(qtbot, window)
    told = events(path, "print")
    assert [(who, what) for who, what, _ in told] == [("AB", "print"), ("AB", "print")]
    assert "Shift" in told[0][2]


def test_a_print_and_an_export_from_the_command_line(path, tmp_path, capsys):
    span = ("--from", "2026-03-27T19:30Z", "--to", "2026-03-28T07:30Z")
    base = ("--store", str(path), "--by", "CD")
    assert main([*base, "handover", *span, "--out", str(tmp_path / "sheet.txt")]) == 0
    assert main([*base, "export", "--out", str(tmp_path / "values.csv")]) == 0
    assert main([*base, "handover", *span]) == 0  # on the screen: nothing was printed
    assert [(who, what) for who, what, _ in events(path, "print", "export")] == [("CD", "print"), ("CD", "export")]


def test_a_policy_names_who_put_it_in_force(path, tmp_path, capsys):
    (tmp_path / "policy.toml").write_text(shipped_text(), "utf-8")
    assert main(["--store", str(path), "--by", "CD", "policy", "put", str(tmp_path / "policy.toml")]) == 0
    with Store.open(path, read_only=True) as store:
        assert store.policies()[0].by == "CD"
