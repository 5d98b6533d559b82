"""A marker's name says the limit in force: a ward's own where it has one, never the shipped number beside it."""

import re

import pytest

from app.policy.names import OWN, by_policy
from app.telling.finding_names import marker_name
from core.judgement.markers.registry import MARKERS
from core.judgement.policy import read_policy, shipped_policy, shipped_text


def named(key: str, old: str, new: str) -> str:
    """The name of a marker under the shipped policy with one change inside the marker's own table."""
    head = f"[markers.{key}]"
    before, _, rest = shipped_text().partition(head)
    table, mark, after = rest.partition("\n[")
    assert old in table
    return by_policy(key, marker_name(key), read_policy(before + head + table.replace(old, new) + mark + after))


@pytest.mark.parametrize("key", sorted(MARKERS))
def test_under_the_shipped_policy_names_are_as_written(key: str) -> None:
    assert by_policy(key, marker_name(key), shipped_policy()) == marker_name(key)


@pytest.mark.parametrize(
    ("key", "old", "new", "name"),
    [
        ("ph_below_severe", "7.25 }", "7.2 }", "pH below 7.20"),
        ("ph_720_725_twice", "7.25,", "7.24,", "pH 7.24 or lower twice, 1 h apart"),
        ("pf_below_150_ards", "150", "140", "P/F at or below 140 mmHg (18.7 kPa) in ARDS"),
        ("pf_low_at_1h", "146,", "150,", "P/F at or below 150 mmHg (20 kPa) after 1 h"),
        ("pao2_below_60", "mmHg = 60, kpa = 8.0", "mmHg = 55, kpa = 7.3", "PaO2 below 55 mmHg (7.3 kPa)"),
        ("rr_above_30", "rr = 30", "rr = 32", "Respiratory rate of 32 or more"),
        ("gcs_below_11", "gcs = 11", "gcs = 10", "GCS below 10"),
        ("sf_below_985", "98.5", "100", "S/F below 100"),
        ("hacor_8_or_more", "points = 7", "points = 8", f"HACOR of 8 or more ({OWN})"),
        ("gcs_fall", "points = 2", "points = 3", "GCS fallen"),
    ],
)
def test_a_limit_of_the_ward_stands_in_the_name(key: str, old: str, new: str, name: str) -> None:
    assert named(key, old, new) == name


def test_the_state_of_a_gas_is_in_the_name_that_uses_it() -> None:
    text = shipped_text().replace("severe_below_ph = { value = 7.25", "severe_below_ph = { value = 7.22")
    name = by_policy("ph_not_better_severe", marker_name("ph_not_better_severe"), read_policy(text))
    assert name == "pH below 7.22 and not better at 1-2 h"


def test_no_number_of_a_name_stays_when_its_limit_moves() -> None:
    """Every limit that a name shows is either replaced or the name says that it is another."""
    shipped = shipped_policy()
    for key, rule in shipped.markers.items():
        for limit, value in rule.limits.items():
            shown = {f"{value:.2f}", f"{value:g}"} & set(re.findall(r"\d+(?:\.\d+)?", marker_name(key)))
            if shown:
                moved = named(key, f"{limit} = {value:g}", f"{limit} = {value + 0.01:g}")
                assert moved != marker_name(key), (key, limit)
