"""S/F as it is drawn: by hand, and agreeing with the newest S/F of the figures."""

import pytest

from core.figures.episode_figures import episode_figures
from core.figures.sf_course import sf_course
from core.judgement.policy import shipped_policy
from tests.support.log import device, episode, moment

POLICY = shipped_policy()
LOG = """
-20:00 spo2 90
-21:00 mode BPAP-ST ipap 16 epap 5 fio2 0.4
-21:10 spo2 92
-21:20 spo2 99
-22:00 fio2 0.5
-22:10 spo2 90
-22:30 mask off
-22:40 spo2 85
-22:50 mask on
-23:00 spo2 94
"""


def test_by_hand() -> None:
    t, v = sf_course(episode(LOG), moment("00:00"), POLICY)
    assert list(t) == [moment("-21:10"), moment("-22:10"), moment("-23:00")]
    assert v.tolist() == pytest.approx([92 / 0.4, 90 / 0.5, 94 / 0.5])


def test_nothing_later_is_in_it() -> None:
    assert sf_course(episode(LOG), moment("-22:05"), POLICY)[0].size == 1


def test_the_newest_agrees_with_the_figures() -> None:
    record = episode(LOG, samples=[device("spo2", "-23:05", [91.0] * 40)])
    figures = episode_figures(record, moment("00:00"), POLICY)
    t, v = sf_course(record, moment("00:00"), POLICY)
    assert (int(t[-1]), float(v[-1])) == (figures.sf.at, pytest.approx(figures.sf.latest))
