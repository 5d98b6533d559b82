"""Words of events: none over another, none crossed by a tick, long ones cut before short ones fall silent."""

from itertools import pairwise

import pytest
from hypothesis import given
from hypothesis import strategies as st
from PySide6.QtGui import QFontMetricsF

from app.chart.event_rail import placed_words
from app.chart.shapes import Tick
from app.look.theme import LIGHT

WORDS = st.sampled_from(["Gas sent", "Mask on", "Reviewed: tired, secretions thick, plan agreed with the team", "x"])


@pytest.fixture(scope="module")
def metrics(qapp):
    return QFontMetricsF(LIGHT.font(LIGHT.type.caption))


def placed(metrics, places):
    return placed_words(places, metrics, 0.0, 620.0, lines=2, gap=10.0, least=36.0)


@given(data=st.lists(st.tuples(st.integers(0, 620), WORDS), max_size=30))
def test_no_word_lies_over_another(metrics, data):
    found = placed(metrics, [(Tick(x, word), float(x)) for x, word in sorted(data)])
    for line in (0, 1):
        row = [p for p in found if p.line == line]
        for one, other in pairwise(row):
            assert one.x + one.width < other.x
    assert all(p.x + p.width <= 620.5 for p in found)


def test_a_long_note_is_cut_rather_than_silence_others(metrics):
    long = "Reviewed: tired, secretions thick, plan agreed with the whole team at the bedside"
    places = [(Tick(0, long), 0.0), (Tick(1, long), 20.0), (Tick(2, "Gas sent"), 200.0), (Tick(3, "Mask on"), 300.0)]
    found = placed(metrics, places)
    assert [p.word for p in found[2:]] == ["Gas sent", "Mask on"]
    assert found[0].word.endswith("\N{HORIZONTAL ELLIPSIS}")


def test_a_word_with_room_stands_whole(metrics):
    found = placed(metrics, [(Tick(0, "Mask on"), 40.0), (Tick(1, "Gas sent"), 400.0)])
    assert [(p.word, p.line, p.x) for p in found] == [("Mask on", 0, 40.0), ("Gas sent", 0, 400.0)]
