"""What must not go without a verdict or a state: a gain lost, the sum since the start, oxygen, a mask that is off."""

from dataclasses import replace

import pytest

from app.look.theme import Verdict
from app.telling.headline import (
    Headline,
    deciding,
    gas_state_word,
    headline,
    off_mask_word,
    response_state_word,
    sign_of,
    state_now,
)
from app.words import Reader
from app.words.figure_lines import FigureLines
from core.judgement.response_shapes import JudgedGas, ResponseFigure
from core.judgement.shapes import EpisodeFigures, GasFigure, NowFigure, SupportFigure
from core.record.message import Message
from tests.support.sample_ward import sample_ward


def bed(label: str) -> EpisodeFigures:
    return next(f for f in sample_ward() if f.label == label)


@pytest.mark.parametrize(
    ("label", "short", "sign"),
    [
        ("Bed 5", "gain lost, still better", Verdict.MIXED),
        ("Bed 4", "no clear change, worse since start", Verdict.WORSE),
        ("Bed 2", "no clear change, better since start", Verdict.NO_CLEAR_CHANGE),
        ("Bay A 1", "worse", Verdict.WORSE),  # pH 7.49 to 7.40: an alkalosis was no gain
        ("Bed 3", "better", Verdict.BETTER),
    ],
)
def test_the_sample_night(label: str, short: str, sign: Verdict) -> None:
    told = headline(bed(label))
    assert told is not None
    assert (told.short, told.sign) == (short, sign)


@pytest.mark.parametrize("verdict", [Verdict.BETTER, Verdict.NO_CLEAR_CHANGE, Verdict.MIXED])
def test_a_lost_gain_is_the_first_word(verdict: Verdict) -> None:
    assert Headline(verdict, gain_lost=True).short.startswith("gain lost")
    assert Headline(Verdict.WORSE, gain_lost=True).short == "worse, gain lost"


def test_a_gain_that_a_newer_gas_lost_is_not_called_still_better() -> None:
    judged = JudgedGas(5, 60.0, "in_window", verdict="better")
    told = ResponseFigure(1, "start", 1, headline="better", headline_gas_at=5, gases=(judged,))
    relapsed = EpisodeFigures("E", 9, responses=(told,), now=NowFigure(since_start_gain_lost=True))
    found = headline(relapsed)
    assert found is not None
    assert (found.word, found.sign) == ("gain lost since, was better", Verdict.MIXED)


def test_no_sign_of_better_stands_over_a_relapse() -> None:
    for verdict in Verdict:
        for since in (None, *Verdict):
            assert sign_of(verdict, lost=True, since_start=since) is not Verdict.BETTER
        assert sign_of(verdict, lost=False, since_start=Verdict.WORSE) is not Verdict.BETTER
        assert sign_of(verdict, lost=False) is verdict


def test_what_waits_still_says_the_sum_since_the_start() -> None:
    waiting = EpisodeFigures("E", 9, responses=(ResponseFigure(5, "change", 5),), now=NowFigure(since_start="worse"))
    told = headline(waiting)
    assert told == Headline(Verdict.NOT_YET_KNOWN, gain_lost=False, since_start=Verdict.WORSE)
    assert told.short == "not yet known, worse since start"
    assert headline(EpisodeFigures("E", 9)) is None


def test_what_never_was_acidotic_has_not_resolved() -> None:
    f = bed("Bay B 5")
    assert gas_state_word(f, f.gases[-1]) == "not acidotic"
    assert state_now(f, f.gases[-1], "mmHg", "UTC") == "not acidotic"
    resolved = bed("Bed 3")
    assert gas_state_word(resolved, resolved.gases[-1]) == "resolved"


def test_a_gas_from_before_the_acidosis_has_not_resolved_by_it() -> None:
    """Of pH 7.41, 7.29 and 7.38 the first never was acidotic, whatever came after; the last has resolved."""
    states = ("resolved", "acidotic", "resolved")
    gases = tuple(GasFigure(at, "arterial", ph=7.4, state=s) for at, s in enumerate(states, 1))
    f = EpisodeFigures("E", 9, gases=gases, now=NowFigure(ever_acidotic=True))
    assert [gas_state_word(f, g) for g in gases] == ["not acidotic", "acidotic", "resolved"]
    lines = FigureLines(Reader()).of(f)
    assert [lines.state(str(g.state), g.at) for g in gases] == ["not acidotic", "acidotic", "resolved"]


def test_where_oxygen_fails_it_comes_first_in_the_readers_unit() -> None:
    f = bed("Bay A 1")
    assert state_now(f, f.gases[-1], "mmHg", "UTC") == "P/F 107 mmHg; not acidotic"
    assert state_now(f, f.gases[-1], "kPa", "UTC") == "P/F 14.3 kPa; not acidotic"
    off = replace(f.gases[-1], off_support=True, state="acidotic")
    assert state_now(f, off, "mmHg", "UTC") == "P/F 107 mmHg; acidotic, last gas with mask off"


def test_a_pf_of_an_older_gas_says_its_own_time() -> None:
    minute = 60_000_000
    old = GasFigure(325 * minute, "arterial", ph=7.40, pf_mmHg=107.0, state="resolved")
    new = GasFigure(336 * minute, "arterial", ph=7.41, state="resolved")
    now = NowFigure(oxygen_failure=True, pf_mmHg=107.0, pf_at=old.at)
    f = EpisodeFigures("E", new.at, gases=(old, new), now=now)
    assert state_now(f, new, "mmHg", "UTC") == "P/F 107 mmHg at 05:25; not acidotic"
    assert state_now(replace(f, gases=(old,)), old, "mmHg", "UTC") == "P/F 107 mmHg; not acidotic"


def test_beside_a_verdict_stands_what_decided_it() -> None:
    ph = Message("response.compared", {"quantity": "ph", "direction": "inside noise"})
    paco2 = Message("response.compared", {"quantity": "paco2", "direction": "down"})
    early = Message("response.early", {"gas_at": 1})
    lost = Message("response.gain_lost", {"quantity": "ph"})
    assert deciding((ph, paco2, early)) == (paco2,)
    assert deciding((ph, paco2, lost)) == (paco2, lost)
    assert deciding((ph, early)) == (ph,)
    assert deciding(()) == ()


def test_a_low_pf_never_reads_as_resolved() -> None:
    gas = GasFigure(5, "arterial", ph=7.38, state="resolved", pf_mmHg=273.0)
    now = NowFigure(ever_acidotic=True, oxygen_failure=True, pf_mmHg=273.0)
    assert (
        state_now(EpisodeFigures("E", 9, gases=(gas,), now=now), gas, "mmHg", "UTC") == "P/F 273 mmHg; not acidotic"
    )


def test_a_ph_above_its_limits_is_no_normal_one() -> None:
    gas = GasFigure(5, "arterial", ph=7.49, state="resolved", ph_above=7.45)
    for once in (True, False):
        f = EpisodeFigures("E", 9, gases=(gas,), now=NowFigure(ever_acidotic=once))
        assert gas_state_word(f, gas) == "not acidotic, pH above 7.45"
        assert FigureLines(Reader()).of(f).gas_marks(gas)[0] == "not acidotic, pH above 7.45"
        told = ResponseFigure(1, "start", 1, headline="better", headline_gas_at=5, state="resolved")
        assert response_state_word(f, told) == "not acidotic, pH above 7.45"


def test_the_mask_off_and_when() -> None:
    at = 5 * 3_600_000_000 + 31 * 60_000_000
    f = EpisodeFigures("E", at, now=NowFigure(off_mask_since=at), gases=(GasFigure(1, "arterial", state="severe"),))
    assert off_mask_word(f, "UTC") == "mask off since 05:31"
    assert off_mask_word(replace(f, support=SupportFigure(ended_at=at)), "UTC") == ""
    assert off_mask_word(replace(f, now=NowFigure()), "UTC") == ""


def test_a_doubtful_value_is_said_beside_its_verdict() -> None:
    judged = JudgedGas(5, 60.0, "in_window", verdict="better")
    told = ResponseFigure(1, "start", 1, headline="better", headline_gas_at=5, gases=(judged,), in_doubt=True)
    found = headline(EpisodeFigures("E", 9, responses=(told,)))
    assert found is not None
    assert found.short == "better (doubtful value)"
    line = FigureLines(Reader(zone="UTC")).headline(told, judged)
    assert line == "better (doubtful value)"
