"""Figures by the command line: as JSON and as text, now and at an earlier moment."""

import json

import pytest

from app.cli import DONE, REFUSED
from tests.support.command_line import Run


def test_figures_as_json_have_the_keys_of_the_format(filled: Run) -> None:
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


def test_figures_of_an_earlier_moment_know_nothing_later(filled: Run) -> None:
    _, out, _ = filled("figures", "N4", "--as-of", "2026-03-27T21:00Z", "--json")
    (episode,) = json.loads(out)["episodes"]
    assert len(episode["gases"]) == 1
    assert episode["responses"][0]["headline"] == "not yet known"


def test_figures_as_text_are_complete_and_have_no_hole(filled: Run) -> None:
    code, out, _ = filled("figures", "N4", "--as-of", "2026-03-27T22:00Z")
    assert code == DONE
    for part in ("Bed 4 (N4), as of 27-Mar-2026 22:00", "IPAP 16 / EPAP 5 cmH2O (PS 11)", "FiO2 28 %", "pH 7.26",
                 "better: pH +0.07, PaCO2 -11 mmHg after 1 h 05 min", "P/F 214 mmHg", "Scores", "Due"):  # fmt: skip
        assert part in out, out
    for wrong in ("?", "None", "nan", "{", "}"):
        assert wrong not in out


def test_gas_pressures_in_the_readers_unit(filled: Run) -> None:
    _, out, _ = filled("figures", "N4", "--as-of", "2026-03-27T22:00Z", "--gas-unit", "kPa")
    assert "PCO2 9.1 kPa" in out
    own_words = "per 10 mmHg of PaCO2"  # what a source prints stays as it printed it
    assert "mmHg" not in out.replace("/mmHg", "").replace(own_words, "")


def test_an_episode_that_is_not_there_is_named_with_those_that_are(filled: Run) -> None:
    code, _, err = filled("figures", "N5")
    assert code == REFUSED
    assert "N5" in err
    assert "N4" in err
    assert len(err.strip().splitlines()) == 1
