"""After a silence time on the mask is presumed, and the figures say since when. The 12 h are common practice."""

import pytest

from core.figures.episode_figures import episode_figures
from core.judgement.policy import shipped_policy
from tests.support.flag_cases import COPD, START
from tests.support.log_cases import at, episode

POLICY = shipped_policy()
LOG = COPD + "00:30 rr 30\n" + START + "02:00 rr 24\n"


def support(as_of, log=LOG):
    return episode_figures(episode(log), at(as_of), POLICY).support


def test_within_twelve_hours_nothing_is_presumed():
    assert (support("14:00").silent_since, support("14:00").hours_presumed) == (None, None)


def test_beyond_them_the_hours_since_the_last_record_are_presumed():
    found = support("14:01")
    assert found.silent_since == at("02:00")
    assert found.hours_on_mask == pytest.approx(13 + 1 / 60)
    assert found.hours_presumed == found.hours_presumed_last_24h == pytest.approx(12 + 1 / 60)


def test_weeks_later_every_hour_of_the_last_day_is_presumed():
    found = support("d60 02:00")
    assert (found.hours_on_mask_last_24h, found.hours_presumed_last_24h) == (24.0, 24.0)
    assert found.hours_presumed == 60 * 24


@pytest.mark.parametrize("ending", ["02:00 stopped", "02:00 mask_off"])
def test_nothing_is_presumed_where_support_is_not_taken_to_run(ending):
    assert support("d2 02:00", LOG + ending).silent_since is None


def test_a_sample_of_the_device_or_an_entry_breaks_the_silence():
    assert support("14:01", LOG + "device rr_total 02:00 03:00 20 20").silent_since is None
    assert support("14:01", LOG + "13:00 rr 20").silent_since is None
    assert support("14:01", LOG + "13:00 height 170").silent_since == at("02:00")  # a fact is no look at the patient
