"""A gas in doubt reassures nobody: no better, no flag ended; and its doubt stands where the verdict stands."""

import dataclasses

import pytest

from core.figures.episode_figures import episode_figures
from core.judgement.policy import shipped_policy
from core.record.entries import Entry
from core.record.episode import build_episode
from core.record.knowledge import standing
from tests.support.flag_cases import COPD, START
from tests.support.log_cases import at, entries, episode

POLICY = shipped_policy()
SICK = COPD + "00:30 ph 7.20 paco2 80 pao2 60 site arterial rr 34 gcs 15\n" + START + "02:00 ph 7.18 paco2 84\n"
"""The sickest bed: severe, not better."""
BETTER = "03:10 ph {ph} paco2 {paco2}\n"


def figures(log: str, unconfirmed: tuple[str, ...] = (), as_of: str = "03:20"):
    """The figures of a log; channels whose last entry nobody confirmed."""
    made = entries(log)
    last = made[-1].at

    def as_taken(e: Entry) -> Entry:
        doubtful = e.channel in unconfirmed and e.at == last
        return dataclasses.replace(e, doubt="doubt.unusual" if doubtful else "")

    return episode_figures(build_episode("E", standing(as_taken(e) for e in made)), at(as_of), POLICY)


def open_markers(found):
    return {f.marker for f in found.flags if f.state == "raised"}


def newest(found):
    return next(r for r in reversed(found.responses) if r.headline_gas_at is not None)


def test_a_sound_gas_is_judged_and_carries_no_doubt():
    found = figures(SICK + BETTER.format(ph=7.28, paco2=62))
    assert (found.now.headline, newest(found).in_doubt, found.gases[-1].doubt) == ("better", False, False)
    assert "ph_below_720_on_support" not in open_markers(found)


@pytest.mark.parametrize("unconfirmed", [(), ("paco2",)])
def test_values_that_hardly_belong_together_make_nobody_better(unconfirmed):
    """pH 7.24 with PaCO2 12 mmHg is a bicarbonate of 5.1 mmol/L (Henderson-Hasselbalch): kPa were meant."""
    found = figures(SICK + BETTER.format(ph=7.24, paco2=12), unconfirmed)
    gas = found.gases[-1]
    assert gas.hco3_calculated_mmol_L == pytest.approx(5.1, abs=0.1)
    assert (gas.doubt, gas.in_doubt) == (True, True)
    assert gas.implausible is not None
    told = newest(found)
    assert (told.headline, told.headline_gas_at, told.in_doubt) == ("not judged", at("03:10"), True)
    assert told.why[0].key == "response.not_better_in_doubt"
    assert found.now.since_start != "better"
    assert {"ph_below_720_on_support", "ph_not_better_severe"} <= open_markers(found)


def test_an_unusual_value_that_nobody_confirmed_makes_nobody_better():
    found = figures(SICK + BETTER.format(ph=7.28, paco2=24), ("paco2",))
    assert found.gases[-1].implausible is None
    assert found.gases[-1].unconfirmed
    assert (newest(found).headline, newest(found).in_doubt) == ("not judged", True)
    assert "ph_below_720_on_support" in open_markers(found)


def test_an_unusual_value_that_was_confirmed_is_judged_and_keeps_its_mark():
    found = figures(SICK + BETTER.format(ph=7.28, paco2=24))
    gas, told = found.gases[-1], newest(found)
    assert (gas.doubt, gas.in_doubt, told.headline, told.in_doubt) == (True, False, "better", True)
    assert any(m.key == "response.unusual" for m in told.why)
    assert "ph_below_720_on_support" not in open_markers(found)


def test_worse_by_a_doubtful_gas_stands_with_its_doubt():
    found = figures(SICK + BETTER.format(ph=6.95, paco2=99), ("ph",))
    assert (newest(found).headline, newest(found).in_doubt) == ("worse", True)


def test_a_doubtful_baseline_makes_no_better_either():
    log = SICK.replace("ph 7.20 paco2 80", "ph 6.90 paco2 80").replace("02:00 ph 7.18 paco2 84\n", "")
    log = log + BETTER.format(ph=7.28, paco2=62)
    made = [dataclasses.replace(e, doubt="doubt.unusual" if e.channel == "ph" and e.at == at("00:30") else "")
            for e in entries(log)]  # fmt: skip
    found = episode_figures(build_episode("E", standing(made)), at("03:20"), POLICY)
    assert (newest(found).headline, newest(found).in_doubt) == ("not judged", True)


def test_what_no_verdict_rests_on_withholds_none():
    found = figures(SICK + "03:10 ph 7.28 paco2 62 lactate 19\n", ("lactate",))
    assert (newest(found).headline, found.gases[-1].in_doubt) == ("better", False)
    assert found.gases[-1].doubt


def test_an_older_better_does_not_stand_in_for_a_newest_gas_in_doubt():
    log = SICK + BETTER.format(ph=7.28, paco2=62) + "04:00 ph 7.24 paco2 12\n"
    found = episode_figures(episode(log), at("04:10"), POLICY)
    assert found.now.headline == "not judged"
    assert newest(found).headline_gas_at == at("04:00")


def test_a_gas_in_doubt_asks_for_another_soon():
    log = SICK.replace("7.20", "7.27").replace("7.18", "7.28") + "03:10 ph 7.36 paco2 12\n"
    found = episode_figures(episode(log), at("03:20"), POLICY)
    item = next(d for d in found.due if d.what == "repeat_gas" and d.done_at is None)
    assert (item.because.key, item.because.values["why"]) == ("due.repeat_gas_soon", "doubtful")
