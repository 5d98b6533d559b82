"""Restore, salvage and witness on the command line."""

import json

import pytest

from app.cli import main
from core.record.entries import NewEntry
from core.record.instant import HOUR
from storage.keys import Cost, envelope_path
from storage.store import Store
from tests.support.open_window import NOW, make_store


@pytest.fixture
def ward(tmp_path):
    return make_store(tmp_path / "ward.luffmark")


def said(capsys, *words):
    capsys.readouterr()
    code = main(list(map(str, words)))
    out = capsys.readouterr()
    return code, out.out, out.err


def test_restore_says_what_the_old_store_holds_beyond_the_backup(ward, tmp_path, capsys):
    copy, new = tmp_path / "copy.luff", tmp_path / "new.luffmark"
    assert said(capsys, "--store", ward, "--by", "AB", "backup", copy)[0] == 0
    assert said(capsys, "--store", ward, "--by", "AB", "log", "bed-7", "rr 26", "--yes")[0] == 0
    code, out, err = said(capsys, "--store", new, "--by", "AB", "restore", copy, "--against", ward)
    assert code == 0, err
    assert "  bed-7: 1 logged" in out
    assert "rr 26/min, AB" in out
    assert "bed-3" not in out
    new.unlink()
    code, out, _ = said(capsys, "--store", new, "--by", "AB", "--json", "restore", copy, "--against", ward)
    told = json.loads(out)
    assert told["checked"]
    assert [e["episode"] for e in told["newer_in_old"]["episodes"]] == ["bed-7"]
    assert [(t["channel"], t["value"]) for t in told["newer_in_old"]["episodes"][0]["logged"]] == [("rr", "26")]
    assert said(capsys, "--store", new, "verify")[0] == 0


def test_a_store_that_cannot_be_compared_is_restored_all_the_same(ward, tmp_path, capsys):
    copy, new, broken = tmp_path / "copy.luff", tmp_path / "new.luffmark", tmp_path / "broken.luffmark"
    said(capsys, "--store", ward, "backup", copy)
    broken.write_bytes(b"SQLite format 3\x00" + bytes(9000))
    code, out, _ = said(capsys, "--store", new, "restore", copy, "--against", broken)
    assert code == 0
    assert "could not be compared" in out
    assert said(capsys, "--store", new, "verify")[0] == 0


def test_without_the_passphrase_it_is_said_what_was_not_checked(tmp_path, capsys):
    copy, new = tmp_path / "copy.luff", tmp_path / "new.luffmark"
    with Store.create(
        tmp_path / "ward.luffmark", now=NOW, passphrase="five boats at night", cost=Cost(64, 1, 1)
    ) as w:
        w.backup(copy)
    code, out, err = said(capsys, "--store", new, "restore", copy)
    assert code == 0, err
    assert "were not checked" in out
    new.unlink()
    envelope_path(new).unlink()
    assert json.loads(said(capsys, "--json", "--store", new, "restore", copy)[1])["checked"] is False


def test_salvage_says_what_was_lost(ward, tmp_path, capsys):
    code, out, err = said(capsys, "salvage", ward, tmp_path / "saved.luffmark")
    assert code == 0, err
    assert "Saved: " in out
    assert "Nothing was lost." in out
    code, out, _ = said(capsys, "--json", "salvage", ward, tmp_path / "again.luffmark")
    told = json.loads(out)
    assert told["lost_rows"] == 0
    assert told["episodes"] == 2
    assert "recovery_code" not in told
    code, _, err = said(capsys, "salvage", ward, tmp_path / "again.luffmark")
    assert code == 1
    assert "never overwritten" in err


def test_verify_checks_a_witness_and_adds_to_one(ward, tmp_path, capsys):
    file = tmp_path / "witness.txt"
    assert said(capsys, "--store", ward, "verify", "--add-witness", file)[0] == 0
    assert said(capsys, "--store", ward, "verify", "--witness", file)[0] == 0
    with Store.open(ward, read_only=True) as store:
        head = store.printed_head()
    file.write_text(file.read_text().replace(head, f"{head.split()[0]} 0123456789abcdef"))
    code, _, err = said(capsys, "--store", ward, "verify", "--witness", file)
    assert code == 1
    assert "cut off or replaced" in err


def test_archive_and_remove(ward, tmp_path, capsys):
    with Store.open(ward) as store:
        ended = NewEntry("bed-3", "ended_at", NOW - HOUR, float(NOW - HOUR))
        store.append([ended], by="AB", operation="log", now=NOW)
    old = tmp_path / "old.luffmark"
    assert "bed-3  ended 28-Mar-2026" in said(capsys, "--store", ward, "archive", "list")[1]
    code, out, err = said(capsys, "--store", ward, "archive", "write", old, "bed-3")
    assert code == 0, err
    assert "1 episode," in out
    code, _, err = said(capsys, "--store", ward, "archive", "write", tmp_path / "b.luffmark", "bed-7")
    assert code == 1
    assert "no recorded end" in err
    assert "how long it keeps" in said(capsys, "--store", ward, "archive", "remove", "bed-3")[2]
    assert said(capsys, "--store", ward, "archive", "retention", "soon")[0] == 1
    assert said(capsys, "--store", ward, "archive", "retention", "1")[0] == 0
    code, out, err = said(capsys, "--store", ward, "archive", "remove", "bed-3")
    assert code == 0, err
    assert "expires by" in out
    assert said(capsys, "--store", ward, "verify")[0] == 0
    assert "Bed 3" in said(capsys, "--store", old, "figures", "bed-3")[1]
    code, _, err = said(capsys, "--store", old, "log", "bed-3", "rr 20", "--yes")
    assert code == 1
    assert "reading only" in err
