"""Files that commands write: never over another unasked, whole or not at all, and what stood in the way is told."""

from __future__ import annotations

import json
from pathlib import Path

import pytest

from storage.store import Store
from tests.support.command_line import run

SPAN = ("--from", "2026-03-27T19:30:00Z", "--to", "2026-03-28T05:30:00Z")
WRITERS = {
    "handover": ("x.pdf", (*SPAN, "--out")),
    "handover text": ("x.txt", (*SPAN, "--out")),
    "handover blank": ("x.pdf", ("--blank", "--out")),
    "statistics": ("x.csv", (*SPAN, "--csv")),
    "picture": ("x.svg", ("N-0327-04", "--what", "map", "--out")),
    "export": ("x.csv", ("--episode", "N-0327-04", "--channel", "ph", "--out")),
    "export deidentified": ("x.csv", ("--episode", "N-0327-04", "--channel", "ph", "--deidentified", "--out")),
}


def write(capsys, name: str, store: Path, path: Path, *more: str) -> tuple[int, str, str]:
    _, arguments = WRITERS[name]
    deidentified = ("--deidentified",) if name == "export deidentified" else ()
    arguments = tuple(a for a in arguments if a != "--deidentified")
    return run(capsys, name.partition(" ")[0], "--store", store, "--by", "AB", *deidentified, *arguments, path, *more)


@pytest.mark.parametrize("name", WRITERS)
def test_a_file_that_is_there_stays_unless_it_is_to_be_replaced(capsys, night, tmp_path, name):
    path = tmp_path / WRITERS[name][0]
    path.write_bytes(b"kept")
    code, out, err = write(capsys, name, night, path)
    assert (code, out) == (1, "")
    assert len(err.strip().splitlines()) == 1
    assert path.name in err
    assert "--replace" in err
    assert path.read_bytes() == b"kept"
    assert [p.name for p in tmp_path.iterdir()] == [path.name]
    assert write(capsys, name, night, path, "--replace")[0] == 0
    assert path.read_bytes() != b"kept"


@pytest.mark.parametrize("name", WRITERS)
def test_a_folder_that_is_not_there_is_named_and_nothing_is_left(capsys, night, tmp_path, name):
    code, _, err = write(capsys, name, night, tmp_path / "nowhere" / WRITERS[name][0])
    assert code == 1
    assert "nowhere" in err
    assert list(tmp_path.iterdir()) == []


@pytest.mark.parametrize("name", ["handover", "handover text", "handover blank", "statistics", "picture"])
def test_a_full_disk_is_told(capsys, night, tmp_path, name):
    """A real full device stands behind the name."""
    path = tmp_path / WRITERS[name][0]
    path.symlink_to("/dev/full")
    code, out, err = write(capsys, name, night, path)
    assert (code, out) == (1, "")
    assert path.name in err
    assert "full" in err.replace(path.name, "").lower() or "space" in err.lower()


def test_a_print_that_failed_is_not_in_the_chain(capsys, own, tmp_path):
    (tmp_path / "x.pdf").symlink_to("/dev/full")
    with Store.open(own) as store:
        head = store.head()
    assert write(capsys, "handover", own, tmp_path / "x.pdf")[0] == 1
    with Store.open(own) as store:
        assert store.head() == head
    assert write(capsys, "handover", own, tmp_path / "y.pdf")[0] == 0
    with Store.open(own) as store:
        assert store.head() > head


def test_closing_onto_a_file_that_is_there_closes_nothing(capsys, own, tmp_path):
    names = ("--close", "--given-by", "AB", "--taken-by", "CD")
    (tmp_path / "x.pdf").write_bytes(b"kept")
    assert write(capsys, "handover", own, tmp_path / "x.pdf", *names)[0] == 1
    assert json.loads(run(capsys, "handovers", "--store", own, "--json")[1])["handovers"] == []
    (tmp_path / "full.pdf").symlink_to("/dev/full")
    code, out, err = write(capsys, "handover", own, tmp_path / "full.pdf", *names)
    assert code == 1
    assert "Closed as " in out, "what is kept is told though its copy has no room"
    assert "full.pdf" in err
    assert len(json.loads(run(capsys, "handovers", "--store", own, "--json")[1])["handovers"]) == 1


def test_a_copy_of_a_closed_one_is_written_over_nothing(capsys, own, tmp_path):
    names = ("--close", "--given-by", "AB", "--taken-by", "CD", "--json")
    _, out, _ = run(capsys, "handover", "--store", own, *SPAN, *names)
    path = tmp_path / "c.pdf"
    path.write_bytes(b"kept")
    assert run(capsys, "handovers", json.loads(out)["id"], "--store", own, "--out", path)[0] == 1
    assert path.read_bytes() == b"kept"
    assert run(capsys, "handovers", json.loads(out)["id"], "--store", own, "--out", path, "--replace")[0] == 0
    assert path.read_bytes().startswith(b"%PDF")


def test_an_export_without_its_statement_is_none(capsys, night, tmp_path):
    """What is beside the file stands or falls with it."""
    (tmp_path / "x.about.txt").write_text("kept")
    code, _, err = write(capsys, "export deidentified", night, tmp_path / "x.csv")
    assert code == 1
    assert "x.about.txt" in err
    assert not (tmp_path / "x.csv").exists()
    assert (tmp_path / "x.about.txt").read_text() == "kept"
