"""Completions: what the word at the cursor could become, and nothing for numbers or free text."""

import pytest
from hypothesis import given
from hypothesis import strategies as st

from app.strip.completion import completed, completions, token_at, words


@pytest.mark.parametrize(
    ("text", "first"),
    [
        ("ip", "ipap"),
        ("14:20 sp", "spo2"),
        ("gas", "gas sent"),
        ("mas", "mask off"),
        ("16/6 35 pac", "paco2"),
        ("bp", "bpap-st"),
    ],
)
def test_the_likeliest_comes_first(text, first):
    found = completions(text, len(text))
    assert found[:1] == ((first,) if text != "bp" else ()) or found[0] == first


@pytest.mark.parametrize(
    ("text", "offered", "made"),
    [
        ("paco2 8.3 k", ("kPa",), "paco2 8.3 kPa "),
        ("paco2 8,3k", ("8,3kPa",), "paco2 8,3kPa "),
        ("o2 4 l", ("L/min",), "o2 4 L/min "),
        ("hb 120 g", ("g/L", "g/dL"), "hb 120 g/L "),
        ("ph 7.30 pa", ("paco2", "pao2"), "ph 7.30 paco2 "),
        ("acvpu v", ("voice",), "acvpu voice "),
        ("ceiling of care no", ("no intubation", "not recorded"), "ceiling of care no intubation "),
        ("ceiling of care ward s", ("support is the ceiling",), "ceiling of care ward support is the ceiling "),
        ("end_reason w", ("weaned",), "end_reason weaned "),
    ],
)
def test_units_and_choices_are_completed(text, offered, made):
    found = completions(text, len(text))
    assert found[: len(offered)] == offered
    assert completed(text, len(text), found[0])[0] == made


@pytest.mark.parametrize("text", ["", "16", "16/6", "14:20", "ipap", "note ip", "told dr", "zzz"])
def test_nothing_where_nothing_fits(text):
    assert completions(text, len(text)) == ()


def test_only_the_word_at_the_cursor_is_replaced():
    assert completed("ip 16 ep", 8, "epap") == ("ip 16 epap ", 11)
    assert completed("ip 16", 2, "ipap") == ("ipap 16", 5)


@given(st.text(alphabet="abi pr/:1620", max_size=30), st.data())
def test_completing_keeps_what_stands_before(text, data):
    cursor = data.draw(st.integers(0, len(text)))
    start, token = token_at(text, cursor)
    assert text[start:cursor] == token
    for word in completions(text, cursor):
        made, place = completed(text, cursor, word)
        assert made.startswith(text[:start] + word)
        assert made[:place].endswith(word + " ")


def test_every_offered_word_is_understood_by_the_line():
    from core.record.channels import MODES
    from core.record.line_words import words_of_channels

    known = words_of_channels().keys() | {m.casefold() for m in MODES}
    assert [w for w in words() if w not in known] == []


@pytest.mark.parametrize(
    ("typed", "rest"),
    [("mask o", {"off", "on"}), ("rr 20 mask of", {"off"}), ("gas s", {"sent"})],
)
def test_the_rest_of_a_name_of_several_words_comes_before_anything_else(typed, rest):
    assert set(completions(typed, len(typed))) == rest
    done, _ = completed(typed, len(typed), completions(typed, len(typed))[0])
    assert completions(done, len(done)) == ()
