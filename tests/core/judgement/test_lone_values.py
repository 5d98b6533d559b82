"""A lactate by itself is no blood gas: it is no baseline, closes nothing that is due, and hides no state."""

import pytest

from core.figures.episode_figures import episode_figures
from core.judgement.policy import shipped_policy
from tests.support.flag_cases import COPD, due, met
from tests.support.log_cases import at, episode

NIGHT = (
    COPD
    + "00:10 mode BPAP-ST ipap 15 epap 5 fio2 28 rate_set 14\n"
    + "00:35 ph 7.25 paco2 74 pao2 60 site arterial rr 30\n{lone}00:55 ipap 24\n"
    + "02:00 ph 7.19 paco2 84 pao2 60 site arterial rr 34\n"
)
LONE = ["00:40 lactate 2.4\n", "00:40 hb 11\n", "00:40 be -3\n", "00:40 hco3 30\n", "00:40 lactate 2.4 site venous\n"]


def figures(lone: str):
    return episode_figures(episode(NIGHT.format(lone=lone)), at("02:10"), shipped_policy())


@pytest.mark.parametrize("lone", LONE)
def test_it_changes_no_verdict_no_state_and_no_flag_of_the_gases(lone):
    plain, beside = figures(""), figures(lone)
    assert [(r.headline, r.baseline_at) for r in beside.responses] == [
        (r.headline, r.baseline_at) for r in plain.responses
    ]
    assert beside.responses[-1].headline == "worse"
    assert beside.now.state == plain.now.state == "severe"
    assert [g.at for g in beside.gases] == [g.at for g in plain.gases]
    expected = {f.marker for f in plain.flags}
    assert expected <= {f.marker for f in beside.flags}
    assert "ph_not_better_severe" in expected


def test_it_closes_no_due_gas():
    log = COPD + "00:50 ph 7.25 paco2 74 site arterial\n01:00 mode BPAP-ST ipap 15 epap 5 fio2 28\n"
    waiting = due(log, "02:00", "gas")
    assert [d.state for d in waiting] == [d.state for d in due(log + "01:50 lactate 3\n", "02:00", "gas")]
    assert waiting
    assert waiting[0].state != "done"


def test_its_own_flag_is_raised_by_it_and_ended_by_it():
    log = COPD + "01:00 mode BPAP-ST ipap 15 epap 5 fio2 28\n01:30 lactate 4.4\n"
    assert met("lactate_above_4", log) == "01:30-"
    assert met("lactate_above_4", log + "02:30 lactate 1.5\n") == "01:30-02:30"
