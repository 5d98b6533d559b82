"""No lever says that there is no need while a flag about what it acts on is open, whatever the night.

What a flag is about is asked here by its group, which the table of markers and levers knows nothing of.
"""

from __future__ import annotations

from functools import cache

import pytest

from app.telling.lever_words import asks, lever_standing
from app.words import Reader
from core.figures.episode_figures import episode_figures
from core.judgement.flags import open_flags
from core.judgement.lever_flags import ACTS_ON
from core.judgement.levers import levers
from core.judgement.markers.registry import MARKERS
from core.judgement.policy import shipped_policy
from core.judgement.shapes import EpisodeFigures, LeverFigure
from core.record.instant import MINUTE
from sample_data.cohort import SCENARIOS, simulate_many
from tests.support.log_cases import context
from tests.support.night_check import END, night
from tests.support.simulated import as_episode, instant

READER = Reader()
NO_NEED = "no need seen in what was logged"
OF_GROUP = {
    "acidosis": {"time_on_mask", "pressure_support"},
    "oxygen": {"fio2"},
    "consciousness": {"secretions"},
    "breathing": {"secretions", "pressure_support"},
    "mask": {"mask"},
}
OTHERWISE = frozenset({
    "too_little_support", "skin_check_overdue", "gas_overdue", "vt_high_hypoxaemic", "backup_takeover", "news2_rise",
})  # fmt: skip
"""Markers whose group says less than they do."""
SEEDS = (3,)


def test_every_marker_is_placed_and_every_lever_named_is_one() -> None:
    assert ACTS_ON.keys() == MARKERS.keys()
    on_support = levers(context("01:00 rr 30\n02:00 mode BPAP-ST ipap 16 epap 5", "03:00"))
    assert {lever for acting in ACTS_ON.values() for lever in acting} == {lever.key for lever in on_support}


@cache
def moments() -> tuple[EpisodeFigures, ...]:
    """The sample night by the hour, simulated nights by the hour and a half."""
    policy = shipped_policy()
    sample = [(e, END - k * 30 * MINUTE) for e in night().values() for k in range(0, 18, 2)]
    simulated = [(as_episode(one), instant(m)) for kind in SCENARIOS for one in simulate_many(kind, SEEDS)
                 for m in range(45, 600, 90)]  # fmt: skip
    return tuple(episode_figures(e, at, policy) for e, at in (*sample, *simulated))


def no_need(f: EpisodeFigures) -> dict[str, LeverFigure]:
    return {x.key: x for x in f.levers if lever_standing(x, READER) == NO_NEED}


@pytest.mark.parametrize("group", sorted(OF_GROUP))
def test_no_lever_is_called_needless_under_an_open_flag_of_its_group(group: str) -> None:
    seen = 0
    for f in moments():
        standing = [x for x in open_flags(f.flags) if x.group == group and x.marker not in OTHERWISE]
        seen += bool(standing and f.levers)
        if standing:
            contradicted = OF_GROUP[group] & no_need(f).keys()
            assert not contradicted, (f.label, f.as_of, [x.marker for x in standing])
    assert seen > 3, "no moment of these nights asks"


def test_no_lever_is_called_needless_under_an_open_flag_about_it() -> None:
    named = 0
    for f in moments():
        for marker in (x.marker for x in open_flags(f.flags)):
            assert not set(ACTS_ON[marker]) & no_need(f).keys(), (f.label, f.as_of, marker)
        flagged = [x for x in f.levers if asks(x) and not x.can_act]
        named += len(flagged)
        assert all(lever_standing(x, READER) == "to be judged: a flag is open" for x in flagged)
    assert named > 50


def test_a_lever_without_such_a_flag_still_says_that_no_need_was_seen() -> None:
    assert sum(len(no_need(f)) for f in moments()) > 100


def test_an_acidosis_off_support_asks_for_time_on_the_mask() -> None:
    """pH fell in a break, and the mask is on again: the newest gas on support, from before, says nothing of it."""
    log = """01:00 rr 30 indication copd
        02:00 mode BPAP-ST ipap 16 epap 5 fio2 28%
        06:00 ph 7.38 paco2 50
        07:00 mask_off
        08:00 ph 7.33 paco2 58
        08:15 mask_on"""
    lever = next(x for x in levers(context(log, "08:30")) if x.key == "time_on_mask")
    assert lever.can_act
    assert [m.key for m in lever.why] == ["lever.acidosis_off_support"]
    after = next(x for x in levers(context(log + "\n10:00 ph 7.38 paco2 50", "10:05")) if x.key == "time_on_mask")
    assert not after.can_act


def test_of_several_limits_of_one_quantity_a_lever_names_the_strongest_alone() -> None:
    for f in moments():
        for lever in f.levers:
            rates = [str(m.values["marker"]) for m in lever.flags if str(m.values["marker"]).startswith("rr_above")]
            assert len(rates) <= 1
            over_35 = any(x.marker == "rr_above_35" for x in open_flags(f.flags))
            assert not rates or not over_35 or rates == ["rr_above_35"]
