"""What is laid over each other, and by which name."""

from dataclasses import replace

from app.compare.courses import compare
from app.operations.figures import EpisodeAnswer
from app.telling.support_course import course_of
from app.ward.lane_words import OnWard
from core.figures.episode_figures import episode_figures
from core.judgement.policy import shipped_policy
from tests.support.log import episode, moment

NOW = moment("05:00")


def of(key, label, start="01:00 mode bpap-st ipap 14 epap 5"):
    record = episode(f"00:50 rr 30\n{start}\n02:00 ph 7.30 paco2 60", key)
    figures = replace(episode_figures(record, NOW, shipped_policy()), label=label)
    return EpisodeAnswer(record, figures), OnWard(figures, course_of(record, NOW))


def names_of(*beds):
    answers = {a.figures.episode: a for a, _ in beds}
    made = compare([on for _, on in beds], answers, "mmHg")
    return made.names, made.left_out


def test_two_of_one_label_are_named_with_their_keys():
    names, left_out = names_of(of("A", "Bed 9"), of("B", "bed  9"), of("C", "Bed 3"))
    assert names == {1: "Bed 9 (A)", 2: "bed  9 (B)", 3: "Bed 3"}
    assert left_out == ()


def test_one_that_is_left_out_is_told_apart_too():
    names, left_out = names_of(of("A", "Bed 9"), of("B", "Bed 9", "01:00 spo2 90"))
    assert names == {1: "Bed 9 (A)"}
    assert left_out == ("Bed 9 (B)",)
