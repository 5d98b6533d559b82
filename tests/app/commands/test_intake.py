"""Taking a log file in by the command line: what is told, and what is refused by its line."""

import json
import re
from pathlib import Path

import pytest

from app.cli import DONE, REFUSED, WRONG_USAGE
from tests.support.command_line import HEADER, ROWS, Run


def test_intake_tells_what_it_took_and_skips_what_is_there(run: Run, log_file: Path) -> None:
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
    run: Run, filled: Run, tmp_path: Path, what: str
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
def test_what_is_no_log_file_is_refused(run: Run, filled: Run, tmp_path: Path, content: bytes) -> None:
    bad = tmp_path / "bad.csv"
    bad.write_bytes(content)
    code, _, err = run("intake", bad)
    assert code == REFUSED
    assert "line 1" in err or "No mapping" in err
    assert "Traceback" not in err


def test_a_missing_file_makes_no_store(run: Run, store: Path, tmp_path: Path) -> None:
    code, _, err = run("intake", tmp_path / "gone.csv")
    assert code == REFUSED
    assert "is not there" in err
    assert not store.exists()


def test_files_without_header_or_rows_say_so(filled: Run, tmp_path: Path) -> None:
    bare, only = tmp_path / "bare.csv", tmp_path / "only.csv"
    bare.write_text(ROWS.splitlines()[0] + "\n", "utf-8")
    only.write_text(HEADER, "utf-8")
    code, _, err = filled("intake", bare)
    assert (code, "episode,at,channel,value" in err) == (REFUSED, True)
    code, out, err = filled("intake", only)
    assert (code, out, "has no rows" in err) == (REFUSED, "", True)


def test_words_are_offered_only_where_they_are_near(filled: Run, tmp_path: Path) -> None:
    bad = tmp_path / "bad.csv"
    bad.write_text(HEADER + "N4,2026-03-27T22:00:00+00:00,banana,1,,AB,\nN4,2026-03-27T22:00:00+00:00,ipapp,1,,AB,\n",
                   "utf-8")  # fmt: skip
    err = filled("intake", bad)[2]
    assert "apnoea" not in err
    assert "'ipapp' is no channel. Accepted: ipap" in err


def test_a_unit_stands_once_and_times_to_the_second(filled: Run, tmp_path: Path) -> None:
    assert "pH 9.9 is not possible" in filled("log", "N4", "ph 9.9")[2]
    bad = tmp_path / "bad.csv"
    bad.write_text(HEADER + "N4,2098-03-27T22:00:00+00:00,rr,20,,AB,\n", "utf-8")
    assert not re.search(r":\d\d\.\d", filled("intake", bad)[2])


def test_an_episode_that_a_withdrawal_emptied_is_nowhere_and_may_begin_again(filled: Run, log_file: Path) -> None:
    _code, out, _err = filled("--json", "taken")
    key = json.loads(out)["taken"][0]["id"]
    code, out, _err = filled("--by", "AB", "taken", "--withdraw", key)
    assert code == DONE
    assert "Nothing stands any more of N4" in out
    assert "N4" not in filled("figures")[1]
    code, _out, err = filled("figures", "N4")
    assert (code, "Nothing stands of episode 'N4'" in err) == (REFUSED, True)
    span = ("--from", "2026-03-27T20:00:00+00:00", "--to", "2026-03-28T06:00:00+00:00")
    assert "BED 4" not in filled("handover", *span)[1]
    code, out, _err = filled("intake", log_file)
    assert code == DONE
    assert "14 entries" in out
    assert "7.33" in filled("figures", "N4")[1]


def test_a_channel_that_is_none_is_told_with_those_it_may_mean(filled: Run, tmp_path: Path) -> None:
    bad = tmp_path / "bad.csv"
    row = "N4,2026-03-27T20:00:00+00:00,support_started,2026-03-27T20:00:00+00:00,,AB,\n"
    bad.write_text(HEADER + row + row.replace("support_started", "banana"), "utf-8")
    err = filled("intake", bad)[2]
    assert "'support_started' is no channel. Accepted: started_at" in err
    assert err.count("'luffmark channels' lists all") == 2


def test_a_code_that_nobody_knows_is_answered_by_command_once(filled: Run, tmp_path: Path) -> None:
    """3150-6 is no LOINC code, though senders use it for the inhaled oxygen: nobody but a person may say so."""
    path = tmp_path / "gas.hl7"
    path.write_text(SENT.replace("\n", "\r"), "utf-8")
    code, out, err = filled("intake", path, "--episode", "N4")
    assert code == DONE, err
    hint = "luffmark intake --code 'http://loinc.org|3150-6=CHANNEL'"
    assert ("left aside" in out, hint in out, "'luffmark channels' lists the channels" in out) == (True, True, True)
    code, _, err = filled("intake", path, "--episode", "N4", "--code", "http://loinc.org|3150-6=gas_fi")
    assert (code, "Accepted: gas_fio2" in err) == (REFUSED, True)
    code, out, err = filled("intake", path, "--episode", "N4", "--code", "http://loinc.org|3150-6=gas_fio2")
    assert (code, "1 entry" in out, "left aside" in out) == (DONE, True, False), (out, err)
    gas = json.loads(filled("figures", "N4", "--json")[1])["episodes"][0]["gases"][-1]
    assert gas["pf_mmHg"] == pytest.approx(61 / 0.30)
    later = tmp_path / "later.hl7"
    later.write_text(SENT.replace("\n", "\r").replace("0240", "0250").replace("M1", "M2"), "utf-8")
    assert "left aside" not in filled("intake", later, "--episode", "N4")[1]  # it is kept
    assert filled("intake", path, "--code", "3150-6=none", "--episode", "N4")[0] == DONE
    assert filled("intake", path, "--code", "3150-6")[0] == WRONG_USAGE


SENT = "\n".join([
    r"MSH|^~\&|LAB|WARD|LM|WARD|202603280240+0000||ORU^R01^ORU_R01|M1|P|2.5.1|||||||UNICODE UTF-8",
    "PID|1||P1^^^HOSP^MR", "PV1|1|I|RHDU",
    "OBR|1|OM1|FM1|24336-0^Gas panel^LN|||202603280240+0000|||||||202603280240+0000|"
    "BLDA^Arterial blood^HL70487||||||||||F",
    *(f"OBX|{i}|NM|{what}|{unit}^^UCUM|||||F|||202603280240+0000" for i, (what, unit) in enumerate(
        [("2744-1^x^LN||7.27", ""), ("2019-8^x^LN||68", "mm[Hg]"), ("2703-7^x^LN||61", "mm[Hg]"),
         ("3150-6^x^LN||30", "%")], 1)),
]) + "\n"  # fmt: skip
