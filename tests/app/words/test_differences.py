"""A difference is that of the numbers shown beside it, or has one more digit than they do."""

import re

import pytest
from hypothesis import given
from hypothesis import strategies as st

from app.figures.plain import episode_text
from app.look.formats import MINUS, PLUS_MINUS, fixed
from app.words import Reader, sentence
from app.words.differences import paco2_change
from app.words.shown_difference import difference_text, pressure_difference
from core.judgement.response_shapes import JudgedGas
from core.record.message import Message
from tests.support.sample_ward import sample_ward


def number(text: str) -> float:
    return float(text.replace(MINUS, "-").replace(PLUS_MINUS, ""))


@given(st.floats(30, 400), st.floats(30, 400))
def test_it_agrees_with_what_is_shown_or_is_more_exact(before: float, after: float) -> None:
    text = difference_text(before, after, 0)
    if "." not in text:
        assert number(text) == float(fixed(after, 0)) - float(fixed(before, 0))
    assert abs(number(text) - (after - before)) <= (0.051 if "." in text else 0.51)


@pytest.mark.parametrize(
    ("before", "after", "said"),
    [(239.4, 193.9, f"{MINUS}45.5 mmHg"), (246.45, 277.9, "+31.5 mmHg"), (63.4, 58.9, f"{MINUS}4.5 mmHg"),
     (60.0, 75.0, "+15 mmHg"), (60.2, 60.4, f"{PLUS_MINUS}0 mmHg")],
)  # fmt: skip
def test_what_was_printed_a_slip(before: float, after: float, said: str) -> None:
    assert pressure_difference(before, after, "mmHg") == said
    values = {"quantity": "pf", "before": before, "after": after, "change": round(after - before, 6), "noise": 33.5,
              "direction": "down"}  # fmt: skip
    assert f"({said})" in sentence(Message("response.compared", values), Reader())
    judged = JudgedGas(0, 60.0, "in_window", None, round(after - before, 6), paco2_mmHg=after)
    assert paco2_change(judged, "mmHg") == said


@pytest.mark.parametrize("unit", ["mmHg", "kPa"])
def test_of_the_sample_night_every_difference_fits_its_numbers(unit: str) -> None:
    """Read back from the text: 'PaCO2 34 mmHg to 41 mmHg (+7 mmHg)', 'SpO2 92 % to 93 % (+1 %)'."""
    pair = re.compile(rf"([\d.]+)(?: {unit})? to ([\d.]+) {unit} \(([{MINUS}+{PLUS_MINUS}]?[\d.]+) {unit}\)")
    seen = 0
    for f in sample_ward():
        for before, after, change in pair.findall(episode_text(f, Reader("Europe/London", unit))):
            seen += 1
            digits = len(after.partition(".")[2])
            if len(change.partition(".")[2]) == digits:
                assert number(change) == pytest.approx(float(after) - float(before), abs=1e-6), (
                    before,
                    after,
                    change,
                )
    assert seen > 40
