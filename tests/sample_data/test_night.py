"""The night's files: made again byte for byte, in the log's format, inside the channels' limits, small."""

import csv
import doctest
import importlib
import json
import math
import pkgutil
from collections import defaultdict
from datetime import datetime, timedelta
from pathlib import Path

import pytest

import sample_data
from core.record.channels import CHANNELS, Group
from core.record.reading import read_value
from sample_data.make import main

CLOCK = datetime.fromisoformat(sample_data.DEMO_CLOCK)
HEADER = ["episode", "at", "channel", "value", "unit", "by", "note"]


@pytest.fixture(scope="module")
def rows() -> list[dict[str, str]]:
    found = []
    for path in sample_data.files():
        with path.open(encoding="utf-8", newline="") as file:
            found += [{**row, "file": path.name} for row in csv.DictReader(file)]
    return found


@pytest.fixture(scope="module")
def truth() -> dict[str, dict[str, object]]:
    text = (sample_data.night_folder() / "truth.json").read_text("utf-8")
    return {e["episode"]: e for e in json.loads(text)["episodes"]}


def test_the_files_are_made_again_byte_for_byte(tmp_path: Path) -> None:
    assert main([str(tmp_path)]) == 0
    made = {p.name: p.read_bytes() for p in tmp_path.iterdir()}
    kept = {p.name: p.read_bytes() for p in sample_data.night_folder().iterdir()}
    assert made.keys() == kept.keys()
    assert [name for name in made if made[name] != kept[name]] == []


def test_together_they_are_under_three_megabytes() -> None:
    assert sum(p.stat().st_size for p in sample_data.night_folder().iterdir()) < 3_000_000
    assert len(sample_data.files()) == 13


def test_headers_are_the_logs() -> None:
    for path in sample_data.files():
        header = path.read_text("utf-8").partition("\n")[0].split(",")
        assert header[:7] == HEADER
        assert header[7:] == ([] if path.name == "notes.csv" else ["leak_definition"])


def test_every_value_is_one_that_the_record_takes(rows: list[dict[str, str]]) -> None:
    for row in rows:
        reading = read_value(CHANNELS[row["channel"]], row["value"], row["unit"])
        if CHANNELS[row["channel"]].group is not Group.DEVICE and row["by"] != "device":
            assert reading.doubts == () or row["channel"] in {"paco2", "rr", "hr", "pao2"}, row


def test_times_have_an_offset_and_lie_before_the_pretended_clock(rows: list[dict[str, str]]) -> None:
    for row in rows:
        at = datetime.fromisoformat(row["at"])
        assert at.utcoffset() == timedelta(0)
        assert CLOCK - timedelta(hours=13) < at <= CLOCK


def test_no_row_is_there_twice(rows: list[dict[str, str]]) -> None:
    keys = [(r["episode"], r["at"], r["channel"], r["by"] == "device") for r in rows]
    assert len(keys) == len(set(keys))


def test_machines_and_people_are_told_apart(rows: list[dict[str, str]]) -> None:
    for row in rows:
        if row["file"] == "notes.csv":
            assert row["by"].isalpha()
            assert row["by"].isupper()
        else:
            assert row["by"] == "device"
            assert row["episode"] in row["file"]


def test_every_episode_says_that_it_is_invented(rows: list[dict[str, str]]) -> None:
    episodes = {r["episode"] for r in rows}
    assert {r["episode"] for r in rows if "invented" in r["note"]} == episodes
    assert len(episodes) == 12
    assert "invented" in (sample_data.night_folder().parent / "README.md").read_text("utf-8")


def test_gases_agree_with_themselves(rows: list[dict[str, str]]) -> None:
    """pH, PCO2 and bicarbonate within 1 mmol/L by Henderson-Hasselbalch; kPa in one episode alone."""
    gases: dict[tuple[str, str], dict[str, float]] = defaultdict(dict)
    in_kpa = set()
    for row in rows:
        if row["channel"] in ("ph", "paco2", "hco3"):
            factor = 7.50062 if row["unit"] == "kPa" else 1.0
            gases[row["episode"], row["at"]][row["channel"]] = float(row["value"]) * factor
            if row["unit"] == "kPa":
                in_kpa.add(row["episode"])
    assert in_kpa == {"N-0327-10"}
    assert len(gases) > 40
    for gas in gases.values():
        expected = 0.0307 * gas["paco2"] * math.pow(10.0, gas["ph"] - 6.1)
        assert gas["hco3"] == pytest.approx(expected, abs=1.0)


def test_no_lung_gives_blood_more_oxygen_than_it_holds(rows: list[dict[str, str]]) -> None:
    """Alveolar gas equation, R 0.8: a gas on a known FiO2 has a gradient above zero."""
    known: dict[str, float] = {}
    checked = 0
    typed = [r for r in rows if r["file"] == "notes.csv"]
    gases = {
        (r["episode"], r["at"]): float(r["value"]) for r in typed if r["channel"] == "pao2" and r["unit"] != "kPa"
    }
    for row in sorted(typed, key=lambda r: r["at"]):
        if row["channel"] in ("fio2", "o2_flow"):
            known[row["episode"]] = float(row["value"]) / 100 if row["channel"] == "fio2" else math.nan
        if row["channel"] == "paco2" and (row["episode"], row["at"]) in gases:
            fio2 = known[row["episode"]]
            if not math.isnan(fio2):
                assert fio2 * 713 - float(row["value"]) / 0.8 > gases[row["episode"], row["at"]]
                checked += 1
    assert checked > 35


def test_ipap_is_above_epap_whenever_both_are_set(rows: list[dict[str, str]]) -> None:
    now: dict[str, dict[str, float]] = defaultdict(dict)
    typed = [r for r in rows if r["channel"] in ("ipap", "epap")]
    moments = sorted({(r["at"], r["episode"]) for r in typed})
    for at, episode in moments:
        now[episode] |= {r["channel"]: float(r["value"]) for r in typed if (r["at"], r["episode"]) == (at, episode)}
        assert now[episode]["ipap"] > now[episode]["epap"]


def test_the_night_tells_its_twelve_stories(rows: list[dict[str, str]], truth: dict[str, dict[str, object]]) -> None:
    assert len({t["kind"] for t in truth.values()}) == 12
    by_kind = {t["kind"]: t for t in truth.values()}
    assert [k for k, t in by_kind.items() if t["failed"]] == ["non_responder", "hypoxaemic_failure"]
    assert by_kind["prompt_responder"]["responded"]
    assert by_kind["large_leak"]["gain_lost_at"]
    assert by_kind["large_leak"]["leak_from"]
    overdue = by_kind["overdue_gas"]["episode"]
    gases = [r["at"] for r in rows if r["episode"] == overdue and r["channel"] == "ph"]
    raised = [r["at"] for r in rows if r["episode"] == overdue and r["channel"] == "ipap"]
    assert CLOCK - datetime.fromisoformat(max(raised)) > timedelta(hours=2)
    assert max(gases) < max(raised)


def test_a_break_silences_the_ventilator_and_not_the_monitor(rows: list[dict[str, str]]) -> None:
    weaning = [r for r in rows if r["episode"] == "N-0327-08" and "T22:50" < r["at"][10:] < "T23:25"]
    channels = {r["channel"] for r in weaning if r["by"] == "device"}
    assert channels == {"spo2", "hr"}


def test_an_unlogged_break_shows_as_leak_at_the_ceiling(rows: list[dict[str, str]]) -> None:
    leaks = [float(r["value"]) for r in rows if r["episode"] == "N-0327-03" and r["channel"] == "leak"]
    assert sum(leak >= 115 for leak in leaks) >= 5


def test_examples_in_the_docstrings_hold() -> None:
    for module in pkgutil.iter_modules(sample_data.__path__, "sample_data."):
        result = doctest.testmod(importlib.import_module(module.name))
        assert result.failed == 0, module.name
