"""No state stands without its doubt where a verdict on it would be in doubt."""

from dataclasses import replace

import pytest

from app.telling.gas_doubt import doubt_reason, doubt_word, rests_on_doubt, state_in_doubt
from app.telling.headline import state_now
from core.judgement.shapes import EpisodeFigures, GasFigure
from core.record.message import Message
from tests.support.sample_ward import sample_ward

PLAIN = GasFigure(0, "arterial", ph=7.3, state="acidotic")
ODD = GasFigure(0, "arterial", ph=7.3, state="acidotic", doubt=True, implausible=Message("gas.implausible", {}))
UNCONFIRMED = GasFigure(0, "arterial", ph=7.3, state="acidotic", doubt=True, unconfirmed=True)
CONFIRMED = GasFigure(0, "arterial", ph=6.9, state="severe", doubt=True)
DISPUTED = GasFigure(0, "arterial", ph=7.3, state="acidotic", disputed=True)


def test_what_else_was_recorded_for_the_moment_is_told() -> None:
    rival = replace(DISPUTED, rivals=(("ph", "7.19"), ("paco2", "9.1 kPa")))
    assert doubt_word(rival) == "doubtful: pH 7.19, PaCO2 9.1 kPa was recorded for it too"


@pytest.mark.parametrize("gas", [ODD, UNCONFIRMED, DISPUTED])
def test_what_a_state_cannot_rest_on_stands_before_it(gas: GasFigure) -> None:
    assert rests_on_doubt(gas)
    assert state_in_doubt(gas, "severe") == "doubtful: severe"


@pytest.mark.parametrize("gas", [PLAIN, CONFIRMED])
def test_a_sure_or_confirmed_gas_has_its_state_alone(gas: GasFigure) -> None:
    assert state_in_doubt(gas, "severe") == "severe"


def test_each_doubt_has_its_own_reason() -> None:
    reasons = [doubt_reason(g) for g in (ODD, UNCONFIRMED, CONFIRMED, DISPUTED)]
    assert len(set(reasons)) == 4
    assert all(reasons)
    assert doubt_reason(PLAIN) == doubt_word(PLAIN) == ""
    assert doubt_word(ODD) == "doubtful: its values hardly belong together"


def test_the_heading_says_it_first() -> None:
    f: EpisodeFigures = sample_ward()[0]
    assert state_now(f, ODD, "mmHg", "UTC").startswith("doubtful: ")
    assert not state_now(f, PLAIN, "mmHg", "UTC").startswith("doubtful")
