"""Plain-words classes: vector and scalar agree, every gas has one, and the edges lie where they are stated."""

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from app.words import sentence
from core.physiology.classification import Disturbance, Second, classify, classify_codes


@given(ph=st.floats(6.5, 8.0), paco2=st.floats(5.0, 250.0))
def test_every_gas_has_a_class_and_its_reasons(ph: float, paco2: float) -> None:
    found = classify(ph, paco2)
    codes = classify_codes(ph, paco2)
    assert found.main is not Disturbance.NOT_KNOWN
    assert (found.main, found.second) == (int(codes.main), int(codes.second))
    assert [step.key for step in found.steps[:2]] == ["reason.ph", "reason.paco2"]
    assert len(found.steps) >= 3
    assert found.message.key == f"gas_class.{found.main.name.lower()}"


@given(ph=st.floats(7.36, 7.60), paco2=st.floats(5.0, 250.0))
def test_no_respiratory_acidosis_is_acute_where_ph_is_normal(ph: float, paco2: float) -> None:
    assert classify(ph, paco2).main is not Disturbance.ACUTE_RESPIRATORY_ACIDOSIS or paco2 < 57.0


@given(ph=st.floats(6.6, 7.34), paco2=st.floats(46.0, 250.0))
def test_acidotic_hypercapnia_is_always_a_respiratory_acidosis(ph: float, paco2: float) -> None:
    found = classify(ph, paco2)
    assert found.main.name.endswith("RESPIRATORY_ACIDOSIS")
    assert found.acidotic is (found.main is Disturbance.CHRONIC_RESPIRATORY_ACIDOSIS)


def test_missing_and_impossible_gases_are_not_known() -> None:
    assert classify(math.nan, 40.0).main is Disturbance.NOT_KNOWN
    assert classify(7.4, math.nan).steps[0].key == "undefined.missing"
    assert classify_codes([7.4, np.nan, 9.9], [40.0, 40.0, 40.0]).main.tolist() == [1, 0, 0]


@pytest.mark.parametrize(
    ("ph", "paco2", "main", "second"),
    [
        (7.10, 40.0, Disturbance.METABOLIC_ACIDOSIS, Second.RESPIRATORY_ACIDOSIS),
        (7.30, 30.0, Disturbance.METABOLIC_ACIDOSIS, Second.NONE),
        (7.30, 22.0, Disturbance.METABOLIC_ACIDOSIS, Second.RESPIRATORY_ALKALOSIS),
        (7.52, 44.0, Disturbance.METABOLIC_ALKALOSIS, Second.RESPIRATORY_ALKALOSIS),
        (7.50, 50.0, Disturbance.METABOLIC_ALKALOSIS, Second.NONE),
        (7.46, 60.0, Disturbance.METABOLIC_ALKALOSIS, Second.RESPIRATORY_ACIDOSIS),
        (7.40, 65.0, Disturbance.CHRONIC_RESPIRATORY_ACIDOSIS, Second.METABOLIC_ALKALOSIS),
        (7.15, 60.0, Disturbance.ACUTE_RESPIRATORY_ACIDOSIS, Second.METABOLIC_ACIDOSIS),
        (7.44, 28.0, Disturbance.CHRONIC_RESPIRATORY_ALKALOSIS, Second.NONE),
        (7.40, 25.0, Disturbance.CHRONIC_RESPIRATORY_ALKALOSIS, Second.METABOLIC_ACIDOSIS),
        (7.34, 43.0, Disturbance.BORDERLINE, Second.NONE),
    ],
)
def test_classes(ph: float, paco2: float, main: Disturbance, second: Second) -> None:
    """By the stated rules: common practice, no source."""
    found = classify(ph, paco2)
    assert (found.main, found.second) == (main, second)


def test_near_40_the_lines_cannot_be_told_apart_and_it_says_so() -> None:
    keys = [step.key for step in classify(7.33, 50.0).steps]
    assert "reason.lines_too_close" in keys
    assert "reason.lines_too_close" not in [step.key for step in classify(7.22, 80.0).steps]


def test_both_units_get_the_same_class() -> None:
    """45 mmHg and 6.0 kPa are one limit."""
    assert classify(7.34, 45.0).main == classify(7.34, 6.0 * 7.50062).main


@given(ph=st.floats(6.9, 7.7), paco2=st.floats(15.0, 120.0))
def test_what_cannot_be_told_apart_is_called_neither_acute_nor_chronic(ph: float, paco2: float) -> None:
    found = classify(ph, paco2)
    too_close = "reason.lines_too_close" in [step.key for step in found.steps]
    words = sentence(found.message)
    assert found.message.values["apart"] is not too_close
    named = found.main.name.startswith(("ACUTE_RESPIRATORY", "CHRONIC_RESPIRATORY"))
    assert words.startswith(("Acute respiratory", "Chronic respiratory")) is (named and not too_close)
    assert ("acute or chronic not to be told apart" in words) is too_close


def test_a_gas_that_fits_one_line_alone_is_called_by_it_though_the_lines_are_near() -> None:
    alkalosis = classify(7.49, 32.0)  # bicarbonate 24.1: 22.4 when acute, 20.8 when chronic
    assert sentence(alkalosis.message) == "Acute respiratory alkalosis."
    assert "reason.lines_too_close" not in [step.key for step in alkalosis.steps]
    both = classify(7.33, 50.0)
    assert sentence(both.message) == "Respiratory acidosis, acute or chronic not to be told apart."
