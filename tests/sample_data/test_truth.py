"""Truths: they follow from the course, differ between kinds, and are not the same for a whole kind."""

import numpy as np
import pytest

from sample_data.cohort import SimulatedEpisode, simulate_many
from sample_data.truth import lasting

N = 150


@pytest.fixture(scope="module")
def cohorts() -> dict[str, list[SimulatedEpisode]]:
    kinds = ("prompt_responder", "slow_responder", "non_responder", "large_leak", "hypoxaemic_failure",
             "pulmonary_oedema", "obesity_hypoventilation", "stable")  # fmt: skip
    return {kind: simulate_many(kind, range(N)) for kind in kinds}


def share(episodes: list[SimulatedEpisode], name: str) -> float:
    return float(np.mean([bool(getattr(e.truth, name)) for e in episodes]))


def test_those_who_should_answer_do_and_those_who_should_fail_do(
    cohorts: dict[str, list[SimulatedEpisode]],
) -> None:
    assert share(cohorts["prompt_responder"], "responded") > 0.95
    assert share(cohorts["prompt_responder"], "failed") < 0.05
    assert share(cohorts["non_responder"], "failed") > 0.85
    assert share(cohorts["pulmonary_oedema"], "responded") > 0.95
    assert share(cohorts["stable"], "failed") == 0.0


def test_a_kind_is_not_a_truth(cohorts: dict[str, list[SimulatedEpisode]]) -> None:
    for kind, name in (("slow_responder", "responded"), ("slow_responder", "failed"), ("non_responder", "responded"),
                       ("hypoxaemic_failure", "failed"), ("obesity_hypoventilation", "responded")):  # fmt: skip
        assert 0.03 < share(cohorts[kind], name) < 0.97, (kind, name)


def test_late_answers_come_later(cohorts: dict[str, list[SimulatedEpisode]]) -> None:
    def median(kind: str) -> float:
        return float(np.median([e.truth.responded_at for e in cohorts[kind] if e.truth.responded_at is not None]))

    assert median("prompt_responder") < 30 < 60 < median("slow_responder")
    assert median("obesity_hypoventilation") > 90


def test_the_truth_is_in_the_course(cohorts: dict[str, list[SimulatedEpisode]]) -> None:
    for episode in cohorts["non_responder"]:
        if episode.truth.failed_why == "acidosis":
            assert episode.truth.failed_at is not None
            at = episode.truth.failed_at - episode.first
            assert np.all(episode.true.ph[at : at + 15] < 7.25)
    for episode in cohorts["large_leak"]:
        assert episode.truth.leak_from is not None
        assert episode.true.leak[episode.truth.leak_from - episode.first] > 40.0


def test_the_prompt_course_is_of_the_size_that_is_seen_on_wards(
    cohorts: dict[str, list[SimulatedEpisode]],
) -> None:
    """Ward COPD, n = 110: pH 7.28 at 1 h and 7.34 on day 1 (cohort of the clinical reference, section 3a)."""
    ph = np.stack([e.true.ph for e in cohorts["prompt_responder"] + cohorts["slow_responder"]])
    assert np.median(ph[:, 45 + 60]) == pytest.approx(7.29, abs=0.03)
    assert np.median(ph[:, -1]) == pytest.approx(7.36, abs=0.03)


def test_lasting_needs_the_whole_time() -> None:
    assert lasting(np.array([True] * 14)) is None
    assert lasting(np.array([False] + [True] * 15)) == 1
    assert lasting(np.array([True] * 7 + [False] + [True] * 14)) is None
