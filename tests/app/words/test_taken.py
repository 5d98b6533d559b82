"""A rate or an SpO2 in a sentence is a median over a span, or one value of a moment; it never goes without either."""

from __future__ import annotations

from app.words import Reader, sentence
from core.judgement import response_reasons as why
from core.judgement.markers import evidence as say
from core.judgement.vitals_near import Found
from core.record.instant import MINUTE
from tests.support.flag_cases import BEFORE, COPD, START, told
from tests.support.log_cases import at

READER = Reader(near=(0, 1000 * MINUTE))
MACHINE = Found(32.0, 30 * MINUTE, True, 16 * MINUTE)
COUNT = Found(24.0, 90 * MINUTE, False)


def test_a_change_says_of_either_side_how_it_was_taken() -> None:
    assert sentence(say.moved("rr", MACHINE, COUNT, 4), READER) == (
        "Respiratory rate 32/min (median from 00:16 to 00:30) to 24/min (01:30), \N{MINUS SIGN}8/min, beyond "
        "measurement error (4/min)."
    )


def test_a_value_against_its_limit_says_how_it_was_taken() -> None:
    median = say.value_is("spo2", 91, say.AT_LEAST, 88, 90 * MINUTE, since=76 * MINUTE)
    assert sentence(median, READER) == "SpO2 91 % (median from 01:16 to 01:30), at or above 88 %."
    one = say.value_is("ph", 7.2, say.BELOW, 7.25, 90 * MINUTE, "7.200")
    assert sentence(one, READER) == "pH 7.200 at 01:30, below 7.25."


def test_the_oxygen_arm_says_of_when_its_saturations_are() -> None:
    after = Found(91.0, 90 * MINUTE, True, 76 * MINUTE)
    assert sentence(why.spo2_range(None, after, 88, 92, "within"), READER) == (
        "SpO2 91 % (median from 01:16 to 01:30), within 88 to 92 %."
    )
    both = why.spo2_range(Found(85.0, 30 * MINUTE, False), after, 88, 92, "within")
    assert sentence(both, READER) == ("SpO2 85 % (00:30) to 91 % (median from 01:16 to 01:30), within 88 to 92 %.")
    assert sentence(why.tiring(MACHINE, COUNT, 4, True), READER).startswith(
        "Respiratory rate 32 (median from 00:16 to 00:30) to 24/min (01:30) while PaCO2 rose"
    )


def test_a_fall_after_a_raised_pressure_names_the_level_before_as_a_median() -> None:
    log = COPD + BEFORE + START + "03:00 ipap 24\ndevice spo2 02:00 03:20 92 92\ndevice spo2 03:20 03:40 86 86"
    change = told("spo2_fall_after_pressure", log, "03:40")["evidence.change"].values
    assert (change["before_since"], change["before_at"]) == (at("02:45"), at("03:00"))
    assert change["since"] is None
