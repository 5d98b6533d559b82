"""Typed texts become values; what does not fit is refused by name."""

from contextlib import suppress

import pytest
from hypothesis import given
from hypothesis import strategies as st

from app.words import sentence
from core.record.channels import CHANNELS, Kind, channel
from core.record.message import RecordError
from core.record.reading import read_value


@pytest.mark.parametrize(
    ("key", "text", "unit", "number"),
    [
        ("fio2", "35", "", 0.35), ("fio2", "1", "", 1.0), ("fio2", "0.35", "", 0.35), ("fio2", "35", "%", 0.35),
        ("fio2", "21", "%", 0.21), ("fio2", "100", "", 1.0), ("ph", "7,40", "", 7.40), ("ipap", "16", "", 16.0),
        ("vte", "0.45", "L", 450.0), ("height", "1.75", "m", 175.0), ("temp", "98.6", "F", 37.0),
        ("weight", "70", "kg", 70.0), ("hb", "13.5", "g/dL", 135.0), ("ti", "900", "ms", 0.9),
    ],
)  # fmt: skip
def test_numbers_are_read_in_any_accepted_unit(key, text, unit, number):
    assert read_value(channel(key), text, unit).number == pytest.approx(number, abs=1e-9)


def test_what_was_typed_is_kept():
    reading = read_value(channel("paco2"), "8,30", "kPa")
    assert (reading.raw, reading.raw_unit, reading.decimals) == ("8,30", "kPa", 2)


def test_hydrogen_ion_is_read_as_ph():
    assert read_value(channel("ph"), "56.2", "nmol/L").number == pytest.approx(7.25, abs=0.001)


@pytest.mark.parametrize(
    ("key", "text", "unit", "refusal"),
    [
        ("ipap", "61", "", "value.past_hard_limit"), ("ipap", "-2", "", "value.past_hard_limit"),
        ("fio2", "1", "%", "value.past_hard_limit"), ("fio2", "0.2", "", "value.past_hard_limit"),
        ("ph", "74", "", "value.past_hard_limit"), ("rr", "twenty", "", "value.not_a_number"),
        ("rr", "nan", "", "value.not_a_number"), ("rr", "1e3", "", "value.not_a_number"),
        ("rr", "", "", "value.not_a_number"), ("ipap", "16", "mmHg", "unit.unknown"),
        ("mode", "bilevel", "", "value.not_a_choice"), ("mode", "CPAP", "cmH2O", "unit.unknown"),
        ("label", "", "", "value.missing"), ("started_at", "2026-03-28T02:10", "", "instant.no_offset"),
        ("started_at", "yesterday", "", "instant.unreadable"),
    ],
)  # fmt: skip
def test_a_refusal_names_the_value_and_what_is_accepted(key, text, unit, refusal):
    with pytest.raises(RecordError) as refused:
        read_value(channel(key), text, unit)
    assert refused.value.message.key == refusal


def test_a_soft_limit_asks_and_does_not_refuse():
    reading = read_value(channel("ipap"), "34")
    assert reading.number == 34.0
    assert [d.key for d in reading.doubts] == ["doubt.unusual"]


@given(st.sampled_from([c for c in CHANNELS.values() if c.kind is Kind.NUMBER]), st.floats(0.001, 0.999))
def test_a_number_inside_hard_limits_is_never_refused_in_any_unit(c, part):
    low, high = c.hard
    inside = low + (high - low) * part
    for unit in c.units:
        typed = unit.from_canonical(inside)
        if typed != typed or abs(typed) > 1e12:
            continue
        reading = read_value(c, f"{typed:.9f}", unit.name)
        assert reading.number == pytest.approx(inside, rel=1e-3, abs=1e-3)


@given(st.text(max_size=40), st.sampled_from(list(CHANNELS.values())), st.sampled_from(["", "kPa", "%", "x"]))
def test_no_text_raises_anything_but_a_refusal_in_words(text, c, unit):
    with suppress(RecordError):
        read_value(c, text, unit)


@pytest.mark.parametrize(
    ("key", "text", "said"),
    [
        (
            "temp",
            "99",
            "Temperature 99 °C is not possible (99 °F would be). Accepted: a number, 25 to 45 °C, or in °F.",
        ),
        ("dyspnoea", "14", "Dyspnoea 14 is not possible. Accepted: a number, 0 to 10."),
        ("ph", "9", "pH 9 is not possible. Accepted: a number, 6.5 to 8, or in nmol/L."),
        ("fio2", "300", "FiO2 300 % is not possible. Accepted: a number, 21 to 100 %, or as a fraction."),
    ],
)
def test_a_refusal_writes_units_as_people_do(key, text, said):
    with pytest.raises(RecordError) as refused:
        read_value(channel(key), text)
    assert sentence(refused.value.message) == said


def test_a_refusal_tells_its_bounds_in_the_unit_that_was_typed_and_which_other_was_likelier_meant():
    with pytest.raises(RecordError) as refused:
        read_value(channel("paco2"), "62", "kPa")
    said = sentence(refused.value.message)
    assert (
        said
        == "PaCO2 62 kPa is not possible (62 mmHg would be). Accepted: a number, 0.6666 to 33.33 kPa, or in mmHg."
    )
