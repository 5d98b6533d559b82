"""A gas off support says how it was drawn: nobody is told that the mask was off where it was on."""

from __future__ import annotations

import pytest

from app.telling.drawn import drawn_short, drawn_word
from app.words import Reader, sentence
from app.words.figure_lines import FigureLines
from core.figures.episode_figures import episode_figures
from core.judgement.policy import shipped_policy
from tests.support.log_cases import at, context, episode

BEGIN = "00:30 ph 7.25 paco2 70\n01:00 mode BPAP-ST ipap 20 epap 5 fio2 28%\n02:10 mask_off\n"
READER = Reader()
CASES = [
    ("02:40 {gas}", "drawn while the mask was off", "with mask off", "was drawn while the mask was off"),
    ("02:45 mask_on\n02:50 {gas}", "drawn 5 min after the mask went on again", "5 min after mask on",
     "was drawn 5 min after the mask went on again at 27-Mar-2026 02:45, so not yet steady"),
    ("02:45 mask_on\n02:50 stopped\n02:55 {gas}", "drawn after support ended", "after support",
     "was drawn after support ended"),
]  # fmt: skip


@pytest.mark.parametrize(("log", "word", "short", "said"), CASES)
def test_each_way_has_its_words(log: str, word: str, short: str, said: str) -> None:
    ctx = context(BEGIN + log.format(gas="ph 7.31 paco2 62 pao2 60 site arterial"), "03:00")
    gas = ctx.gases[-1]
    assert (drawn_word(gas), drawn_short(gas)) == (word, short)
    assert word in FigureLines(READER).gas(gas)


@pytest.mark.parametrize(("log", "word", "short", "said"), CASES[:2])
def test_flag_and_response_say_the_same(log: str, word: str, short: str, said: str) -> None:
    f = episode_figures(episode(BEGIN + log.format(gas="ph 7.31 paco2 62")), at("03:00"), shipped_policy())
    flag = next(flag for flag in f.flags if flag.marker == "acidosis_off_support")
    assert any(said in sentence(m, READER) for m in flag.evidence)
    why = [m for r in f.responses for g in r.gases if g.at == f.gases[-1].at for m in g.why]
    assert any(said in sentence(m, READER) for m in why)


def test_the_fio2_that_made_the_pf_is_named() -> None:
    gas = "ph 7.31 paco2 62 pao2 60 site arterial"
    lines = FigureLines(READER)
    set_again = context(f"{BEGIN}02:45 mask_on\n02:50 {gas}", "03:00").gases[-1]
    assert set_again.at == at("02:50")
    assert "FiO2 28 % (as set on the device), P/F 214 mmHg" in lines.gas(set_again)
    own = context(f"{BEGIN}02:40 {gas} gas_fio2 24%", "03:00").gases[-1]
    assert "FiO2 24 % (given with the gas), P/F 250 mmHg" in lines.gas(own)
    unknown = context(f"{BEGIN}02:40 {gas}", "03:00").gases[-1]
    assert "P/F not known" in lines.gas(unknown)
