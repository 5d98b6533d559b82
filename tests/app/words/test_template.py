"""How templates and values become sentences."""

import doctest
import logging

import pytest

from app import words
from app.words import Reader, sentence, template
from core.judgement.markers.evidence import changed
from core.record.instant import parse
from core.record.message import Message


def test_examples() -> None:
    assert doctest.testmod(words).failed == 0
    assert doctest.testmod(template).failed == 0


def test_values_are_written_for_the_reader() -> None:
    at = parse("2026-03-28T02:10:00Z")
    message = Message("response.compared", {"quantity": "paco2", "before": 68.0, "after": 60.0, "change": -8.0,
                                            "noise": 5.44, "direction": "down"})  # fmt: skip
    assert sentence(message) == "PaCO2 68 mmHg to 60 mmHg (−8 mmHg): down beyond measurement error (5.4 mmHg)."
    assert sentence(message, Reader(gas_unit="kPa")) == (
        "PaCO2 9.1 kPa to 8.0 kPa (−1.1 kPa): down beyond measurement error (0.7 kPa)."
    )
    gained = Message("response.superseded", {"next_at": at})
    assert sentence(gained, Reader(zone="Europe/Madrid")).endswith("28-Mar-2026 03:10.")


def test_a_part_without_its_value_is_left_out() -> None:
    assert template.fill("Support[[ (was {before})]].", {"before": None}, Reader()) == "Support."
    assert template.fill("Support[[ (was {before})]].", {"before": "off"}, Reader()) == "Support (was off)."


def test_a_missing_value_is_shown_and_logged_and_never_raises(caplog: pytest.LogCaptureFixture) -> None:
    with caplog.at_level(logging.WARNING, "luffmark"):
        assert template.fill("{gone} left", {}, Reader()) == "? left"
    assert "gone" in caplog.text


def test_a_message_without_words_is_shown_with_its_values(caplog: pytest.LogCaptureFixture) -> None:
    with caplog.at_level(logging.WARNING, "luffmark"):
        assert sentence(Message("no.such", {"a": 1})) == "no.such: a 1"
    assert "no.such" in caplog.text


def test_a_sentence_passes_through_the_readers_language() -> None:
    reader = Reader(translate=lambda text: text.replace("is no channel", "ist kein Kanal"))
    assert "ist kein Kanal" in sentence(Message("channel.unknown", {"channel": "x", "accepted": "y"}), reader)


def test_markup_in_a_value_stays_text() -> None:
    text = sentence(Message("line.word_unknown", {"word": "<b>x</b>", "accepted": "16/6"}))
    assert "<b>x</b>" in text, "escaping is the business of the place that shows rich text"


def test_a_part_can_stand_only_where_a_value_is_absent() -> None:
    text = "{score}[[ {points}]][[!points| between {low} and {high}]]"
    assert template.fill(text, {"score": "X", "points": 3.0, "low": 3.0, "high": 3.0}, Reader()) == "X 3"
    values = {"score": "X", "points": None, "low": 1.0, "high": 5.0}
    assert template.fill(text, values, Reader()) == "X between 1 and 5"


def test_moments_near_the_page_are_told_by_the_clock_alone() -> None:
    at = parse("2026-03-28T02:10:00Z")
    reader = Reader(near=(at - 10, at + 10))
    assert template.fill("{at:time}", {"at": at}, reader) == "02:10"
    assert template.fill("{at:time}", {"at": at + 20}, reader) == "28-Mar-2026 02:10"


def test_a_ph_is_told_with_the_digits_it_was_reported_in() -> None:
    values = {"quantity": "ph", "value": 7.345, "text": "7.345"}
    assert template.fill("{value:qt}", values, Reader()) == "7.345"
    assert template.fill("{value:qt}", values | {"text": None}, Reader()) == "7.35"


def test_a_value_that_is_the_same_says_so_and_no_difference_of_nothing() -> None:
    before, at = parse("2026-03-28T00:47:00Z"), parse("2026-03-28T02:10:00Z")
    same = changed("gcs", 13, before, 13, at)
    assert sentence(same, Reader("UTC")) == "GCS unchanged, 13 (28-Mar-2026 00:47 and 28-Mar-2026 02:10)."
    small = sentence(changed("ph", 7.24, before, 7.26, at, 0.033), Reader("UTC"))
    assert small.endswith("+0.02, within measurement error (0.033).")
    assert "beyond measurement error (0.033)" in sentence(changed("ph", 7.2, before, 7.3, at, 0.033))


@pytest.mark.parametrize(
    ("quantity", "value", "limit", "relation", "unit", "shown"),
    [
        ("spo2", 92.4, 92.0, "above", "mmHg", "92.4 %"),
        ("spo2", 93.0, 92.0, "above", "mmHg", "93 %"),
        ("spo2", 97.0, 97.0, "at or above", "mmHg", "97 %"),
        ("rr", 25.04, 25.0, "above", "mmHg", "25.04/min"),
        ("paco2", 45.4, 45.0, "above", "mmHg", "45.4 mmHg"),
        ("pao2", 59.8, 60.0, "below", "kPa", "7.97 kPa"),
        ("vte_per_kg", 9.51, 9.5, "above", "mmHg", "9.51"),
    ],
)
def test_a_value_past_its_limit_shows_the_decimals_that_decide(quantity, value, limit, relation, unit, shown):
    told = {"quantity": quantity, "value": value, "limit": limit, "relation": relation}
    assert template.fill("{value:qt}", told, Reader(gas_unit=unit)) == shown
