"""Backup, restore, export and verify by the command line; a store with a passphrase."""

import json
import os
from pathlib import Path
from typing import Any

from app.cli import DONE, REFUSED
from tests.support.command_line import Run


def test_backup_restore_and_export_bring_back_the_same_figures(filled: Run, tmp_path: Path) -> None:
    want = filled("figures", "--as-of", "2026-03-27T22:00Z", "--json")[1]
    backup, copy, log = tmp_path / "b.luffmark", tmp_path / "c.luffmark", tmp_path / "out.csv"
    assert filled("backup", backup)[0] == DONE
    assert filled("backup", backup)[0] == REFUSED
    assert filled("restore", backup, "--store", copy)[0] == DONE
    assert filled("restore", backup, "--store", copy)[0] == REFUSED
    assert filled("figures", "--store", copy, "--as-of", "2026-03-27T22:00Z", "--json")[1] == want
    assert filled("export", "--out", log)[0] == DONE
    other = tmp_path / "d.luffmark"
    assert filled("intake", log, "--store", other)[0] == DONE
    got = json.loads(filled("figures", "--store", other, "--as-of", "2026-03-27T22:00Z", "--json")[1])
    assert _without_ids(got) == _without_ids(json.loads(want))


def _without_ids(value: Any) -> Any:
    """Figures without the ids that name entries of one store."""
    if isinstance(value, dict):
        return {k: _without_ids(v) for k, v in value.items() if k not in ("ids", "flag_id")}
    return [_without_ids(v) for v in value] if isinstance(value, list) else value


def test_verify_tells_damage(filled: Run, store: Path) -> None:
    code, out, _ = filled("verify", "--json")
    assert (code, json.loads(out)["sound"]) == (DONE, True)
    data = bytearray(store.read_bytes())
    spot = data.rfind(b"Bed 4")
    data[spot : spot + 5] = b"Bed 5"
    store.write_bytes(bytes(data))
    code, _, err = filled("verify")
    assert code == REFUSED
    assert "not sound" in err
    assert len(err.strip().splitlines()) >= 2


def test_an_encrypted_store_needs_its_passphrase_and_its_backup_the_key_file(
    run: Run, log_file: Path, store: Path, tmp_path: Path
) -> None:
    def with_passphrase(text: str, *arguments: str | Path) -> tuple[int, str, str]:
        read, write = os.pipe()
        os.write(write, text.encode())
        os.close(write)
        try:
            return run("--passphrase-fd", read, *arguments)
        finally:
            os.close(read)

    code, _, err = with_passphrase("correct horse battery\n", "intake", log_file)
    assert code == DONE
    assert "Recovery code" in err
    assert run("verify")[0] == REFUSED
    assert "encrypted" in run("verify")[2]
    code, _, err = with_passphrase("wrong horse battery\n", "verify")
    assert code == REFUSED
    assert "wrong" in err
    assert with_passphrase("correct horse battery\n", "verify")[0] == DONE

    backup = tmp_path / "b.luff"
    code, out, _ = with_passphrase("correct horse battery\n", "backup", backup)
    assert code == DONE
    assert f"keep {backup}.key beside it" in out
    alone = tmp_path / "alone" / "b.luff"
    alone.parent.mkdir()
    alone.write_bytes(backup.read_bytes())
    restored = tmp_path / "new.luff"
    assert with_passphrase("correct horse battery\n", "restore", alone, "--store", restored)[0] == REFUSED
    alone.with_name("b.luff.key").write_bytes(backup.with_name("b.luff.key").read_bytes())
    assert with_passphrase("correct horse battery\n", "restore", alone, "--store", restored)[0] == DONE


def test_a_plain_backup_speaks_of_no_key_file(filled: Run, tmp_path: Path) -> None:
    _code, out, _ = filled("backup", tmp_path / "b.luff")
    assert "key" not in out
    assert json.loads(filled("backup", tmp_path / "c.luff", "--json")[1])["key_file"] is None
