"""The span that evidence tells of and the one of its flag never contradict each other unexplained."""

from app.telling.flag_spans import with_gaps
from app.words import Reader
from app.words.figure_lines import FigureLines
from tests.support.sample_ward import sample_ward


def test_a_flag_that_was_met_with_gaps_says_so() -> None:
    f = next(f for f in sample_ward() if f.label == "Bed 3")
    flag = next(x for x in f.flags if x.marker == "over_oxygenation")
    assert with_gaps(flag, Reader()) == "With short gaps since 28-Mar-2026 02:21."
    told = FigureLines(Reader()).evidence(flag)
    assert "1 h 44 min in all since 28-Mar-2026 03:19" in told
    assert told.endswith("With short gaps since 28-Mar-2026 02:21.")


def test_one_that_was_met_all_along_needs_no_such_words() -> None:
    f = next(f for f in sample_ward() if f.label == "Bay A 4")
    flag = next(x for x in f.flags if x.marker == "over_oxygenation" and x.ended_at is None)
    assert with_gaps(flag, Reader()) == ""
