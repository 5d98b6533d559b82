"""Two patients under one label are told apart by their start, and by their keys where that is the same."""

from dataclasses import replace

import pytest

from app.ward.moves import told_apart, what_tells_apart
from core.figures.episode_figures import episode_figures
from core.judgement.policy import shipped_policy
from tests.support.log import episode, moment

NOW = moment("05:00")
BEGUN = "00:50 label Bed 7\n00:50 rr 30\n{} mode bpap-st ipap 14 epap 5"


def figures(key, start, label="Bed 7"):
    log = BEGUN.format(start) if start else "00:50 label Bed 7\n00:50 rr 30"
    found = episode_figures(episode(log, key), NOW, shipped_policy())
    return replace(found, label=label)


@pytest.mark.parametrize(
    ("ward", "apart"),
    [
        ([("A", "01:00"), ("B", "01:30")], {"A": "from 01:00", "B": "from 01:30"}),
        ([("A", "01:00"), ("B", "01:00")], {"A": "from 01:00, A", "B": "from 01:00, B"}),
        ([("A", "01:00"), ("B", "01:00"), ("C", "02:00")],
         {"A": "from 01:00, A", "B": "from 01:00, B", "C": "from 02:00"}),
        ([("A", ""), ("B", "")], {"A": "A", "B": "B"}),
        ([("A", "01:00")], {}),
    ],
)  # fmt: skip
def test_what_tells_them_apart(ward, apart):
    assert what_tells_apart([figures(*w) for w in ward], NOW, "UTC") == apart


def test_labels_are_compared_as_people_read_them():
    ward = [figures("A", "01:00"), figures("B", "01:00", " bed  7")]
    assert told_apart(ward[0], ward, NOW, "UTC") == "Bed 7 (from 01:00, A)"
    assert told_apart(ward[0], ward[:1], NOW, "UTC") == "Bed 7"
