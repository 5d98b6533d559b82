"""Stretches of doubt are found as a plain look through all of them would find them."""

from itertools import pairwise

import numpy as np
from hypothesis import given
from hypothesis import strategies as st

from app.chart.doubts import Doubts
from app.chart.shapes import Span

SPANS = st.lists(
    st.tuples(st.integers(0, 60), st.integers(0, 20), st.sampled_from(["leak", "mask off"])), max_size=12
).map(lambda rows: [Span(a, a + length, word) for a, length, word in rows])


@given(SPANS)
def test_an_instant_is_in_doubt_where_a_span_holds_it(spans):
    t = np.arange(-1, 90)
    expected = [any(s.start <= at < s.end for s in spans) for at in t]
    assert Doubts(spans).covers(t).tolist() == expected


@given(SPANS, st.integers(0, 90))
def test_the_reason_is_that_of_a_span_that_holds_the_instant(spans, at):
    words = {s.word for s in spans if s.start <= at < s.end}
    said = Doubts(spans).word_at(at)
    assert said in words if words else said == ""


@given(SPANS, st.integers(0, 90), st.integers(1, 30), st.integers(0, 9))
def test_what_is_drawn_covers_every_doubt_in_view_and_joins_only_what_is_near(spans, start, length, joined):
    end = start + length
    drawn = list(Doubts(spans).between(start, end, joined=joined))
    for at in range(start, end):
        doubtful = any(s.start <= at < s.end for s in spans)
        covered = any(a <= at < b for a, b in drawn)
        near = any(s.start - joined <= at < s.end + joined for s in spans)
        assert covered or not doubtful
        assert near or not covered
    assert all(b[0] - a[1] > joined for a, b in pairwise(drawn))
