"""Spells: joined, clipped, begun and ended, whatever finds them."""

from itertools import pairwise

import numpy as np
from hypothesis import given
from hypothesis import strategies as st

from core.judgement.markers.spells import (
    Point,
    Spell,
    clipped,
    from_points,
    from_runs,
    held,
    united,
    without_flicker,
)
from core.record.message import Message

SAID = (Message("evidence.unknown", {"quantity": "ph"}),)


def spans(spells):
    return [(s.since, s.until) for s in spells]


def test_silence_ends_nothing_and_evidence_is_that_of_the_newest_met():
    points = [Point(1, True, ()), Point(2, None), Point(3, True, SAID), Point(9, False, ())]
    (spell,) = from_points(points)
    assert (spell.since, spell.until, spell.evidence) == (1, 9, SAID)


def test_evidence_is_made_only_for_the_newest():
    made = []

    def tell(name):
        return lambda: made.append(name) or SAID

    from_points([Point(1, True, tell("a")), Point(2, True, tell("b"))])
    assert made == ["b"]


def test_a_gap_shorter_than_the_rule_joins_and_an_end_younger_than_it_is_no_end():
    two = [Spell(0, 10, ()), Spell(14, 20, ())]
    assert spans(without_flicker(two, 5, 100)) == [(0, 20)]
    assert spans(without_flicker(two, 4, 100)) == [(0, 10), (14, 20)]
    assert spans(without_flicker(two, 5, 24)) == [(0, None)]
    assert spans(without_flicker(two, 5, 25)) == [(0, 20)]
    assert spans(without_flicker(two, 0, 20)) == [(0, 10), (14, 20)]


def test_spells_of_two_sources_that_overlap_are_one():
    assert spans(united([Spell(5, 12, ()), Spell(0, 6, ()), Spell(20, None, ())])) == [(0, 12), (20, None)]
    assert spans(united([Spell(0, None, ()), Spell(5, 6, ())])) == [(0, None)]


def test_clipping_keeps_what_lies_inside():
    spells = [Spell(0, 4, ()), Spell(3, 8, ()), Spell(9, None, ())]
    assert spans(clipped(spells, 5, 10)) == [(5, 8), (9, 10)]
    assert spans(clipped(spells, 2, None)) == [(2, 4), (3, 8), (9, None)]
    assert clipped(spells, None, 10) == []


def test_runs_of_samples():
    t = np.array([10, 20, 30, 40])
    found = from_runs(t, np.array([True, False, True, True]), lambda a, b: SAID if b > a else ())
    assert spans(found) == [(10, 20), (30, None)]
    assert found[1].evidence == SAID


@given(st.lists(st.tuples(st.booleans(), st.booleans()), max_size=30))
def test_held_is_on_from_a_switch_on_until_a_switch_off(events):
    on, off = (np.array([e[i] for e in events], np.bool_) for i in (0, 1))
    state, expected = False, []
    for a, b in events:
        state = True if a else (False if b else state)
        expected.append(state)
    assert held(on, off).tolist() == expected


@given(st.lists(st.tuples(st.integers(0, 50), st.integers(1, 9)), max_size=12), st.integers(0, 8))
def test_joined_spells_are_apart_and_in_order(raw, gap):
    spells = united([Spell(a, a + n, ()) for a, n in raw])
    joined = without_flicker(spells, gap, 1000)
    for before, after in pairwise(joined):
        assert before.until is not None
        assert after.since - before.until >= gap
    covered = {x for s in spells for x in range(s.since, s.until or 0)}
    assert covered <= {x for s in joined for x in range(s.since, s.until or 0)}
