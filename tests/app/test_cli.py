"""The command line end to end, on stores of its own: what it says, what it writes, and how it ends."""

from __future__ import annotations

import json
import os
import re
import subprocess
import sys
from pathlib import Path
from typing import Any

import pytest

from app.cli import DONE, REFUSED, WRONG_USAGE, main

HEADER = "episode,at,channel,value,unit,by,note\n"
ROWS = (
    "N4,2026-03-27T20:00:00+00:00,label,Bed 4,,AB,\n"
    "N4,2026-03-27T20:00:00+00:00,indication,copd,,AB,\n"
    "N4,2026-03-27T20:10:00+00:00,site,arterial,,AB,\n"
    "N4,2026-03-27T20:10:00+00:00,ph,7.26,,AB,\n"
    "N4,2026-03-27T20:10:00+00:00,paco2,68,mmHg,AB,\n"
    "N4,2026-03-27T20:10:00+00:00,pao2,60,mmHg,AB,\n"
    "N4,2026-03-27T20:10:00+00:00,gas_fio2,28,%,AB,\n"
    "N4,2026-03-27T20:20:00+00:00,mode,BPAP-ST,,AB,\n"
    "N4,2026-03-27T20:20:00+00:00,ipap,16,cmH2O,AB,\n"
    "N4,2026-03-27T20:20:00+00:00,epap,5,cmH2O,AB,\n"
    "N4,2026-03-27T20:20:00+00:00,fio2,28,%,AB,\n"
    "N4,2026-03-27T21:25:00+00:00,site,arterial,,AB,\n"
    "N4,2026-03-27T21:25:00+00:00,ph,7.33,,AB,\n"
    "N4,2026-03-27T21:25:00+00:00,paco2,57,mmHg,AB,\n"
)


@pytest.fixture
def store(tmp_path: Path) -> Path:
    return tmp_path / "ward.luffmark"


@pytest.fixture
def log_file(tmp_path: Path) -> Path:
    path = tmp_path / "log.csv"
    path.write_text(HEADER + ROWS, "utf-8")
    return path


@pytest.fixture
def run(store: Path, capsys: pytest.CaptureFixture[str]) -> Any:
    """Runs a command on the store; gives exit code, stdout and stderr."""

    def runner(*arguments: str | Path) -> tuple[int, str, str]:
        capsys.readouterr()
        try:
            code = main(["--store", str(store), "--zone", "UTC", *map(str, arguments)])
        except SystemExit as ended:
            code = int(ended.code or 0)
        said = capsys.readouterr()
        return code, said.out, said.err

    return runner


@pytest.fixture
def filled(run: Any, log_file: Path) -> Any:
    code, _, err = run("intake", log_file)
    assert code == DONE, err
    return run


def test_intake_tells_what_it_took_and_skips_what_is_there(run: Any, log_file: Path) -> None:
    code, out, err = run("intake", log_file)
    assert (code, "New store" in err) == (DONE, True)
    assert "14 entries" in out
    code, out, _ = run("intake", log_file, "--json")
    assert code == DONE
    taken = json.loads(out)["taken"][0]
    assert (taken["entries"], taken["repeated"]) == (0, 14)


BAD_ROWS = {
    "unknown channel": "N4,2026-03-27T22:00:00+00:00,ipapp,16,cmH2O,AB,\n",
    "unit that does not fit": "N4,2026-03-27T22:00:00+00:00,ipap,16,mmol/L,AB,\n",
    "past a hard limit": "N4,2026-03-27T22:00:00+00:00,ipap,160,cmH2O,AB,\n",
    "IPAP not above EPAP": "N4,2026-03-27T22:00:00+00:00,ipap,4,cmH2O,AB,\n",
    "no offset": "N4,2026-03-27T22:00:00,ipap,18,cmH2O,AB,\n",
    "in the future": "N4,2099-03-27T22:00:00+00:00,ipap,18,cmH2O,AB,\n",
    "no number": "N4,2026-03-27T22:00:00+00:00,ipap,high,cmH2O,AB,\n",
    "repeated": ROWS.splitlines(keepends=True)[3],
}


@pytest.mark.parametrize("what", BAD_ROWS)
def test_a_bad_row_is_refused_by_its_line_and_the_store_is_untouched(
    run: Any, filled: Any, tmp_path: Path, what: str
) -> None:
    _, before, _ = run("verify")
    bad = tmp_path / "bad.csv"
    bad.write_text(HEADER + ROWS + BAD_ROWS[what], "utf-8")
    code, out, err = run("intake", bad)
    assert code == REFUSED
    assert out == ""
    first, *rows = err.strip().splitlines()
    assert first.startswith("luffmark: ")
    assert "untouched" in first
    assert any(f"line {len((HEADER + ROWS).splitlines()) + 1}" in row for row in rows), err
    assert all("Accepted" in row or "already" in row or "later row counts" in row for row in rows), err
    assert run("verify")[1] == before


@pytest.mark.parametrize("content", [b"", b"\x00\x01\x02", b"a,b,c\n1,2,3\n", b"\xff\xfe\x00"])
def test_what_is_no_log_file_is_refused(run: Any, filled: Any, tmp_path: Path, content: bytes) -> None:
    bad = tmp_path / "bad.csv"
    bad.write_bytes(content)
    code, _, err = run("intake", bad)
    assert code == REFUSED
    assert "line 1" in err or "No mapping" in err
    assert "Traceback" not in err


def test_a_missing_file_makes_no_store(run: Any, store: Path, tmp_path: Path) -> None:
    code, _, err = run("intake", tmp_path / "gone.csv")
    assert code == REFUSED
    assert "is not there" in err
    assert not store.exists()


def test_figures_as_json_have_the_keys_of_the_format(filled: Any) -> None:
    code, out, _ = filled("figures", "--as-of", "2026-03-27T22:00Z", "--json")
    assert code == DONE
    (episode,) = json.loads(out)["episodes"]
    assert episode["episode"] == "N4"
    assert episode["support"]["ipap_cmH2O"] == 16.0
    assert episode["support"]["pressure_support_cmH2O"] == 11.0
    assert episode["support"]["fio2"] == 0.28
    (response,) = episode["responses"]
    assert (response["anchor"], response["headline"]) == ("start", "better")
    assert response["gases"][0]["minutes"] == 65.0
    assert response["gases"][0]["timing"] == "in_window"
    assert episode["gases"][0]["pf_mmHg"] == pytest.approx(60 / 0.28)
    assert episode["gases"][1]["pf_mmHg"] is None
    assert episode["gases"][1]["pf_mmHg_reason"]["text"]


def test_figures_of_an_earlier_moment_know_nothing_later(filled: Any) -> None:
    _, out, _ = filled("figures", "N4", "--as-of", "2026-03-27T21:00Z", "--json")
    (episode,) = json.loads(out)["episodes"]
    assert len(episode["gases"]) == 1
    assert episode["responses"][0]["headline"] == "not yet known"


def test_figures_as_text_are_complete_and_have_no_hole(filled: Any) -> None:
    code, out, _ = filled("figures", "N4", "--as-of", "2026-03-27T22:00Z")
    assert code == DONE
    for part in ("Bed 4 (N4), as of 27-Mar-2026 22:00", "IPAP 16 / EPAP 5 cmH2O (PS 11)", "FiO2 28 %", "pH 7.26",
                 "better: pH +0.07, PaCO2 -11 mmHg after 1 h 05 min", "P/F 214 mmHg", "Scores", "Due"):  # fmt: skip
        assert part in out, out
    for wrong in ("?", "None", "nan", "{", "}"):
        assert wrong not in out


def test_gas_pressures_in_the_readers_unit(filled: Any) -> None:
    _, out, _ = filled("figures", "N4", "--as-of", "2026-03-27T22:00Z", "--gas-unit", "kPa")
    assert "PCO2 9.1 kPa" in out
    own_words = "per 10 mmHg of PaCO2"  # what a source prints stays as it printed it
    assert "mmHg" not in out.replace("/mmHg", "").replace(own_words, "")


def test_an_episode_that_is_not_there_is_named_with_those_that_are(filled: Any) -> None:
    code, _, err = filled("figures", "N5")
    assert code == REFUSED
    assert "N5" in err
    assert "N4" in err
    assert len(err.strip().splitlines()) == 1


def test_log_says_what_it_recorded_with_units_and_support(filled: Any) -> None:
    code, out, _ = filled("log", "N4", "18/5 30", "--by", "CD")
    assert code == DONE
    assert "IPAP 18 cmH2O, EPAP 5 cmH2O, FiO2 30 %" in out
    assert "Pressure support 13 cmH2O (was 11)" in out


def test_log_asks_before_an_unusual_value(filled: Any) -> None:
    code, _, err = filled("log", "N4", "rr 55")
    assert code == REFUSED
    assert "55/min" in err
    assert "--yes" in err
    assert filled("log", "N4", "rr 55", "--yes")[0] == DONE


def test_a_line_may_be_dated_to_any_day_before(filled: Any) -> None:
    code, out, _ = filled("log", "N4", "rr 24", "--at", "2026-03-27T21:40Z")
    assert code == DONE
    assert "27-Mar-2026 21:40" in out
    code, _, err = filled("log", "N4", "21:30 rr 25", "--at", "2026-03-27T21:40Z")
    assert code == REFUSED
    assert "a time of its own" in err


@pytest.mark.parametrize("line", ["", "rr", "16", "quux 5", "ipap 4 epap 8", "ph 9"])
def test_log_refuses_in_one_line(filled: Any, line: str) -> None:
    code, out, err = filled("log", "N4", line)
    assert (code, out) == (REFUSED, "")
    assert len(err.strip().splitlines()) == 1
    assert err.startswith("luffmark: ")


def test_correct_lists_and_supersedes(filled: Any) -> None:
    _, out, _ = filled("correct", "N4", "--json")
    entry = next(e for e in json.loads(out)["entries"] if e["channel"] == "ph" and e["value"] == 7.33)
    assert filled("correct", "N4", entry["id"][:8], "--value", "7.13")[0] == REFUSED, "it needs a reason"
    assert filled("correct", "N4", entry["id"][:8], "--reason", "x")[0] == WRONG_USAGE
    code, _, err = filled("correct", "N4", entry["id"][:8], "--value", "7.91", "--reason", "misread")
    assert (code, "pH 7.91 is outside the usual 7.00 to 7.60" in err, "--yes" in err) == (REFUSED, True, True)
    paco2 = next(e for e in json.loads(out)["entries"] if e["channel"] == "paco2" and e["at"] == entry["at"])
    code, _, err = filled("correct", "N4", paco2["id"][:8], "--value", "9", "--unit", "mmHg", "--reason", "misread")
    assert (code, "which unit was meant" in err, "--yes" in err) == (REFUSED, True, True), err
    code, said, err = filled("correct", "N4", entry["id"][:8], "--value", "7.13", "--reason", "misread")
    assert code == DONE, err
    assert said == "Corrected in N4: pH of 27-Mar-2026 21:25, 7.33 to 7.13.\n"
    _, out, _ = filled("figures", "N4", "--as-of", "2026-03-27T22:00Z", "--json")
    gas = json.loads(out)["episodes"][0]["gases"][1]
    assert (gas["ph"], gas["corrected"]) == (7.13, True)


def test_backup_restore_and_export_bring_back_the_same_figures(filled: Any, tmp_path: Path) -> None:
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


def test_verify_tells_damage(filled: Any, store: Path) -> None:
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


def test_an_encrypted_store_needs_its_passphrase(run: Any, log_file: Path, store: Path) -> None:
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


def test_policy_is_shown_checked_and_put_in_force(filled: Any, tmp_path: Path) -> None:
    from core.judgement.policy import shipped_text

    _, shown, _ = filled("policy", "show")
    assert shown.strip() == shipped_text().strip()
    good, bad = tmp_path / "ward.toml", tmp_path / "bad.toml"
    good.write_text(shipped_text().replace('name = "Shipped policy"', 'name = "Ward 4"'), "utf-8")
    bad.write_text(shipped_text().replace("window_from_min", "window_form_min"), "utf-8")
    assert filled("policy", "check", bad)[0] == REFUSED
    assert "window_form_min" in filled("policy", "check", bad)[2]
    assert filled("policy", "check", good)[0] == DONE
    assert filled("policy", "put", good)[0] == DONE
    assert json.loads(filled("policy", "show", "--json")[1])["name"] == "Ward 4"
    assert filled("policy", "check")[0] == WRONG_USAGE


@pytest.mark.parametrize(
    "arguments",
    [("figures", "--as-of", "yesterday"), ("figures", "--as-of", "2026-03-27T20:00"), ("handover",), ("quux",),
     ("picture", "N4", "--out", "x.png", "--size", "10x10"), ("policy", "burn"), ("log", "N4")],
)  # fmt: skip
def test_wrong_usage_ends_with_2(run: Any, arguments: tuple[str, ...]) -> None:
    assert run(*arguments)[0] == WRONG_USAGE


@pytest.mark.parametrize("arguments", [("figures", "--as-of", "noon"), ("log", "N4", "rr 20", "--by", "")])
def test_wrong_usage_is_told_on_one_line(run: Any, arguments: tuple[str, ...]) -> None:
    code, _, err = run(*arguments)
    assert (code, len(err.splitlines())) == (WRONG_USAGE, 1), err
    assert "Accepted" in err


def test_the_login_name_is_said_once_where_nobody_is_named(filled: Any) -> None:
    _, _, err = filled("log", "N4", "rr 20")
    assert err.count("(login name)") == 1
    assert "login name" not in filled("log", "N4", "rr 21", "--by", "AB", "--yes")[2]
    assert "login name" not in filled("figures", "N4")[2]


def test_files_without_header_or_rows_say_so(filled: Any, tmp_path: Path) -> None:
    bare, only = tmp_path / "bare.csv", tmp_path / "only.csv"
    bare.write_text(ROWS.splitlines()[0] + "\n", "utf-8")
    only.write_text(HEADER, "utf-8")
    code, _, err = filled("intake", bare)
    assert (code, "episode,at,channel,value" in err) == (REFUSED, True)
    code, out, err = filled("intake", only)
    assert (code, out, "has no rows" in err) == (REFUSED, "", True)


def test_words_are_offered_only_where_they_are_near(filled: Any, tmp_path: Path) -> None:
    bad = tmp_path / "bad.csv"
    bad.write_text(HEADER + "N4,2026-03-27T22:00:00+00:00,banana,1,,AB,\nN4,2026-03-27T22:00:00+00:00,ipapp,1,,AB,\n",
                   "utf-8")  # fmt: skip
    err = filled("intake", bad)[2]
    assert "apnoea" not in err
    assert "'ipapp' is no channel. Accepted: ipap" in err


def test_a_unit_stands_once_and_times_to_the_second(filled: Any, tmp_path: Path) -> None:
    assert "pH 9.9 is not possible" in filled("log", "N4", "ph 9.9")[2]
    bad = tmp_path / "bad.csv"
    bad.write_text(HEADER + "N4,2098-03-27T22:00:00+00:00,rr,20,,AB,\n", "utf-8")
    assert not re.search(r":\d\d\.\d", filled("intake", bad)[2])


def test_a_picture_of_an_old_episode_ends_at_its_newest_moment_and_says_so(filled: Any, tmp_path: Path) -> None:
    code, _, err = filled("picture", "N4", "--out", tmp_path / "p.png")
    assert (code, "drawn as of 27-Mar-2026 21:25" in err) == (DONE, True), err
    _, _, err = filled("picture", "N4", "--out", tmp_path / "q.png", "--as-of", "2026-03-27T22:00Z")
    assert "drawn as of" not in err


def test_handover_as_text(filled: Any, tmp_path: Path) -> None:
    code, out, _ = filled("handover", *SHIFT, "--text")
    assert (code, "Bed 4" in out) == (DONE, True)
    assert filled("handover", *SHIFT, "--text", "--out", tmp_path / "h.pdf")[0] == WRONG_USAGE


def test_a_store_that_is_not_there_is_told_in_one_line(run: Any) -> None:
    for command in (("figures",), ("verify",), ("backup", "x"), ("correct", "N4")):
        code, _, err = run(*command)
        assert code == REFUSED
        assert "There is no store" in err
        assert len(err.strip().splitlines()) == 1


def test_every_command_has_help_with_the_cautions(capsys: pytest.CaptureFixture[str]) -> None:
    with pytest.raises(SystemExit):
        main(["--help"])
    said = capsys.readouterr().out
    for command in ("demo", "intake", "log", "figures", "handover", "picture", "screens", "verify", "backup",
                    "restore", "export", "correct", "policy"):  # fmt: skip
        assert f"    {command} " in said
        with pytest.raises(SystemExit) as ended:
            main([command, "--help"])
        assert ended.value.code == 0
        assert "no alarm" in " ".join(capsys.readouterr().out.split())


def test_help_and_verify_load_neither_qt_nor_pandas(store: Path, filled: Any) -> None:
    code = (
        "import sys; from app.cli import main\n"
        f"main(['verify', '--store', {str(store)!r}]); main(['log', 'N4', 'rr 20', '--store', {str(store)!r}])\n"
        "print([m for m in ('PySide6', 'pandas', 'scipy', 'pyqtgraph', 'alembic') if m in sys.modules])"
    )
    environment = dict(os.environ, TZ="Europe/London")
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, env=environment, check=True)
    assert done.stdout.strip().splitlines()[-1] == "[]"


SHIFT = ("--from", "2026-03-27T19:30Z", "--to", "2026-03-27T23:00Z")


def test_handover_is_written_as_pdf_and_as_text(filled: Any, tmp_path: Path) -> None:
    from pypdf import PdfReader

    pdf, txt = tmp_path / "h.pdf", tmp_path / "h.txt"
    code, out, err = filled("handover", *SHIFT, "--out", pdf, "--given-by", "A. Giver", "--paper", "Letter")
    assert code == DONE, err
    assert "2 pages, 1 episodes" in out
    reader = PdfReader(pdf)
    assert len(reader.pages) == 2
    assert round(reader.pages[0].mediabox.width) == 612
    assert filled("handover", *SHIFT, "--out", txt)[0] == DONE
    said = txt.read_text("utf-8")
    assert "BED 4: Acidotic: pH 7.33, PaCO2 57 mmHg at 21:25" in said
    assert "better: pH +0.07, PaCO2 -11 mmHg after 1 h 05 min" in said.replace("Better", "better")
    assert filled("handover", *SHIFT)[1].strip().splitlines()[0].startswith("HANDOVER. Shift 27-Mar-2026 19:30")


def test_handover_refuses_what_it_cannot_write_and_leaves_nothing(filled: Any, tmp_path: Path) -> None:
    code, _, err = filled("handover", *SHIFT, "--out", tmp_path / "gone" / "h.pdf")
    assert code == REFUSED
    assert "folder" in err
    assert filled("handover", *SHIFT, "--out", tmp_path / "h.docx")[0] == WRONG_USAGE
    backwards = ("--from", "2026-03-27T23:00Z", "--to", "2026-03-27T19:30Z")
    assert "before it starts" in filled("handover", *backwards, "--out", tmp_path / "h.pdf")[2]
    assert not [p for p in tmp_path.iterdir() if p.name.startswith("h.")]


@pytest.mark.parametrize(("suffix", "start"), [("png", b"\x89PNG"), ("svg", b"<?xml"), ("pdf", b"%PDF")])
def test_a_picture_is_drawn_in_each_format(filled: Any, tmp_path: Path, suffix: str, start: bytes) -> None:
    out = tmp_path / f"n4.{suffix}"
    code, _, err = filled("picture", "N4", "--out", out, "--as-of", "2026-03-27T23:00Z", "--size", "900x600")
    assert code == DONE, err
    assert out.read_bytes().startswith(start)
    assert out.stat().st_size > 3000


def test_a_picture_that_cannot_be_is_refused(filled: Any, tmp_path: Path) -> None:
    assert filled("picture", "N4", "--out", tmp_path / "x.gif")[0] == WRONG_USAGE
    assert filled("picture", "N4", "--out", tmp_path / "gone" / "x.png")[0] == REFUSED
    assert filled("picture", "N9", "--out", tmp_path / "x.png")[0] == REFUSED
    assert not (tmp_path / "x.png").exists()
