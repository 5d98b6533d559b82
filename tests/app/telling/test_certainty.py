"""How sure a threshold is stands wherever it is shown, and never covers numbers that are ours."""

import pytest

from app.telling.certainty import certainty_words, starred
from app.words import Reader
from app.words.figure_lines import FigureLines
from core.judgement.policy import read_policy, shipped_policy, shipped_text
from tests.support.flag_cases import flags
from tests.support.sample_ward import sample_ward

DURATIONS = {
    "minutes", "of_minutes", "after_min", "from_min", "to_min", "within_min", "within_h", "hold_min", "support_h",
    "pf_within_h", "clear",
}  # fmt: skip
AT_HOURS = {"ph_not_better_severe", "ph_not_better"}
"""Judged within the response's window 'at 1-2 h', which is common practice."""


@pytest.mark.parametrize("key", sorted(shipped_policy().markers))
def test_a_duration_of_ours_is_never_called_confirmed(key):
    rule = shipped_policy().markers[key]
    if rule.sure != "common practice" and (DURATIONS & rule.limits.keys() or key in AT_HOURS):
        assert rule.detail_sure == "common practice"


def test_a_combination_of_ours_is_called_one():
    """The guideline says `or`; here both are asked together."""
    rule = shipped_policy().markers["hdu_criterion"]
    assert " or " in rule.source
    assert rule.source.endswith("both together asked here")
    assert rule.sure == "common practice"


def test_the_flag_says_how_sure_its_timing_is_on_the_screen_and_in_print():
    found = [f for one in sample_ward() for f in one.flags if f.marker == "over_oxygenation"]
    assert found
    for flag in found:
        assert (flag.sure, flag.detail_sure) == ("confirmed", "common practice")
        assert certainty_words(flag).endswith("for how long and the like: common practice, no source found")
        told = FigureLines(Reader()).certainty(flag)
        assert told.endswith("[confirmed; for how long and the like: common practice]")


def test_a_rule_that_is_sure_throughout_says_one_thing():
    (flag,) = [f for f in flags("00:00 ph 7.20 paco2 70 site arterial", "01:00") if f.marker == "ph_below_severe"]
    assert certainty_words(flag) == "confirmed in the source's own text"


@pytest.mark.parametrize(
    ("sure", "marked"),
    [("from memory", True), ("common practice", True), ("confirmed", False), ("secondary", False),
     ("computed here", False)],
)  # fmt: skip
def test_the_star_stands_where_a_ward_must_confirm(sure, marked):
    assert starred("pH below 7.15", sure).endswith("*") is marked


def test_a_wards_older_copy_is_no_surer_of_its_durations_than_the_shipped_policy():
    line = 'detail_sure = "common practice"'
    old = read_policy(shipped_text().replace(f"{line}\n", ""))
    assert {k: r.detail_sure for k, r in old.markers.items()} == {
        k: r.detail_sure for k, r in shipped_policy().markers.items()
    }
    confirmed = read_policy(shipped_text().replace(line, 'detail_sure = "confirmed"'))
    assert confirmed.markers["rr_above_30"].detail_sure == "confirmed"
