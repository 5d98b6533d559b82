"""Logging one line by the command line, as it is typed in the window."""

import json
from pathlib import Path

import pytest

from app.cli import DONE, REFUSED
from tests.support.command_line import HEADER, Run


def test_log_says_what_it_recorded_with_units_and_support(filled: Run) -> None:
    code, out, _ = filled("log", "N4", "18/5 30", "--by", "CD")
    assert code == DONE
    assert "IPAP 18 cmH2O, EPAP 5 cmH2O, FiO2 30 %" in out
    assert "Pressure support 13 cmH2O (was 11)" in out


def test_log_asks_before_an_unusual_value(filled: Run) -> None:
    code, _, err = filled("log", "N4", "rr 55")
    assert code == REFUSED
    assert "55/min" in err
    assert "--yes" in err
    assert filled("log", "N4", "rr 55", "--yes")[0] == DONE


def test_a_line_may_be_dated_to_any_day_before(filled: Run) -> None:
    code, out, _ = filled("log", "N4", "rr 24", "--at", "2026-03-27T21:40Z")
    assert code == DONE
    assert "27-Mar-2026 21:40" in out
    code, _, err = filled("log", "N4", "21:30 rr 25", "--at", "2026-03-27T21:40Z")
    assert code == REFUSED
    assert "a time of its own" in err


@pytest.mark.parametrize("line", ["", "rr", "16", "quux 5", "ipap 4 epap 8", "ph 9"])
def test_log_refuses_in_one_line(filled: Run, line: str) -> None:
    code, out, err = filled("log", "N4", line)
    assert (code, out) == (REFUSED, "")
    assert len(err.strip().splitlines()) == 1
    assert err.startswith("luffmark: ")


def test_the_login_name_is_said_once_where_nobody_is_named(filled: Run) -> None:
    _, _, err = filled("log", "N4", "rr 20")
    assert err.count("(login name)") == 1
    assert "login name" not in filled("log", "N4", "rr 21", "--by", "AB", "--yes")[2]
    assert "login name" not in filled("figures", "N4")[2]


def test_a_mask_off_and_on_in_one_minute_leaves_it_on(filled: Run) -> None:
    at = ("--at", "2026-03-27T20:40Z")
    assert filled("log", "N4", "mask off", *at)[0] == DONE
    code, _, err = filled("log", "N4", "mask on", *at)
    assert code == REFUSED
    assert "counts as on" in err
    assert filled("log", "N4", "mask on", *at, "--yes")[0] == DONE
    told = json.loads(filled("figures", "N4", "--as-of", "2026-03-27T22:00Z", "--json")[1])["episodes"][0]
    assert told["support"]["on_mask"]
    assert [g["off_support"] for g in told["gases"]] == [False, False]


@pytest.mark.parametrize(("rows", "on"), [(("mask_off", "mask_on"), True), (("mask_on", "mask_off"), False)])
def test_rows_of_one_minute_in_a_file_act_in_the_order_of_the_file(
    filled: Run, tmp_path: Path, rows: tuple[str, str], on: bool
) -> None:
    log = tmp_path / "more.csv"
    log.write_text(HEADER + "".join(f"N4,2026-03-27T21:30:00+00:00,{r},,,AB,\n" for r in rows))
    assert filled("intake", log)[0] == DONE
    told = json.loads(filled("figures", "N4", "--as-of", "2026-03-27T22:00Z", "--json")[1])["episodes"][0]
    assert told["support"]["on_mask"] is on


def test_an_unusual_value_is_asked_about_as_it_was_typed(filled: Run) -> None:
    err = filled("log", "N4", "paco2 6.6")[2]
    assert "PaCO2 6.6 mmHg is outside the usual" in err, err
    assert (
        "PaCO2 3.1 kPa is outside the usual 3.3 kPa to 16.0 kPa"
        in filled("log", "N4", "paco2 3.1kPa", "--gas-unit", "kPa")[2]
    )


def test_an_entry_that_is_none_is_refused_in_a_sentence(filled: Run) -> None:
    err = filled("correct", "N4", "zzz", "--withdraw", "--reason", "x")[2]
    assert "Accepted: an id that 'luffmark correct N4' lists." in err
