"""The process pool of the replay: the same answer as one process, and nothing left behind however it ends."""

import multiprocessing

import pytest

from app.operations.outcome import CancelledError
from app.policy.replay_pool import replay_all
from core.figures.replay import PastEpisode
from core.figures.replay_summary import Span
from core.judgement.policy import shipped_text
from core.record.message import RecordError
from tests.support.flag_cases import BEFORE, COPD, START
from tests.support.log_cases import device, entries

LOG = COPD + BEFORE + START + "02:00 ph 7.19 paco2 82\n03:30 rr 24\ndevice spo2 02:00 04:00 80 80"


def cohort(count):
    return [PastEpisode(k, tuple(entries(LOG, k)), tuple(device(LOG, k))) for k in (f"E{n}" for n in range(count))]


def silent():
    """No news."""


def test_processes_and_one_process_say_the_same():
    texts = [shipped_text(), shipped_text().replace("ph = 7.25 }", "ph = 7.19 }")]
    ways = [list(replay_all(cohort(5), 5, texts, Span(), beat=silent, workers=n)) for n in (1, 2)]
    alone, together = (sorted(found, key=lambda e: e.episode) for found in ways)
    assert alone == together
    assert [e.episode for e in together] == [f"E{n}" for n in range(5)]
    assert len(together[0].flags) == 2
    assert multiprocessing.active_children() == []


def test_stopped_it_leaves_no_process():
    beats = []

    def beat():
        beats.append(1)
        if len(beats) > 2:
            raise CancelledError

    with pytest.raises(CancelledError):
        list(replay_all(cohort(40), 40, [shipped_text()], Span(), beat=beat, workers=2))
    assert multiprocessing.active_children() == []


def test_a_caller_that_leaves_early_ends_the_workers():
    found = replay_all(cohort(8), 8, [shipped_text()], Span(), beat=silent, workers=2)
    assert next(found) is not None
    found.close()
    assert multiprocessing.active_children() == []


def test_episodes_are_fetched_as_they_are_needed():
    fetched = []

    def source():
        for one in cohort(30):
            fetched.append(one.key)
            yield one

    found = replay_all(source(), 30, [shipped_text()], Span(), beat=silent, workers=2)
    next(found)
    assert len(fetched) <= 2 * 2 + 4
    found.close()


def test_a_bad_policy_starts_no_process():
    with pytest.raises(RecordError):
        next(replay_all(cohort(5), 5, ["name = 1"], Span(), beat=silent, workers=2))
    assert multiprocessing.active_children() == []
