"""The map in words: class and why for each gas, venous and capillary marked apart, in the reader's unit."""

import pytest

from app.look.theme import GasState
from app.map.words import (
    doubt_sentence,
    gas_sentence,
    map_spec,
    map_table,
    response_words,
    steps_of,
    summary,
    titled_spec,
)
from app.words import Reader
from core.figures.episode_figures import episode_figures
from core.figures.gas_path import gas_path
from core.judgement.policy import shipped_policy
from tests.support.log import episode, moment
from tests.support.sample_ward import sample_ward

LOG = """
-21:00 ph 7.22 paco2 80 site arterial
-21:30 mode BPAP-ST ipap 16 epap 5 fio2 0.28
-22:30 ph 7.27 paco2 70 site capillary
-22:40 ph 7.23 paco2 78 site venous
-23:00 ph 7.30 site arterial
00:30 ph 7.31 paco2 62 site arterial
"""
FIGURES = episode_figures(episode(LOG), moment("01:00"), shipped_policy())
READER = Reader("UTC")


def test_each_gas_has_number_mark_and_place():
    spec = map_spec(FIGURES, READER)
    assert [(g.number, g.mark, g.joined) for g in spec.gases] == [
        (1, "", True), (2, "capillary", True), (3, "venous", False), (5, "", True)]  # fmt: skip
    assert spec.gases[0].state is GasState.SEVERE
    assert spec.gases[2].state is GasState.UNKNOWN  # a venous pH gives no arterial state
    assert all(g.word.startswith(f"{g.number}. ") for g in spec.gases)


def test_class_and_reasoning_are_told_and_none_for_venous():
    first, _, venous, _ = gas_path(FIGURES).gases
    assert "Acute-on-chronic respiratory acidosis" in gas_sentence(first, READER)
    assert any("expected when acute" in step for step in steps_of(first, READER))
    assert "acidosis" not in gas_sentence(venous, READER)
    assert not steps_of(venous, READER)


def test_the_response_of_a_gas_is_told_with_its_differences():
    second = gas_path(FIGURES).gases[1]
    assert "better after the start of support (pH +0.05" in gas_sentence(second, READER)


def test_a_response_on_the_map_never_goes_without_the_sum_since_the_start():
    worse = next(f for f in sample_ward() if f.label == "Bed 4")
    last = gas_path(worse).gases[-1]
    assert "no clear change after" in response_words(last, READER)
    assert response_words(last, READER).endswith("; since the start: worse")


def test_summary_and_table_hold_every_gas_also_those_that_cannot_be_placed():
    table = map_table(FIGURES, READER)
    assert [row[0] for row in table.rows] == ["1", "2", "3", "4", "5"]
    assert table.rows[3][4] == "-"
    assert "Not on the map" in summary(FIGURES, READER)
    assert table.text == summary(FIGURES, READER)


def test_the_axis_is_in_the_readers_unit_and_holds_every_gas():
    usual, kpa = map_spec(FIGURES, READER), map_spec(FIGURES, Reader("UTC", "kPa"))
    assert (usual.paco2_word, kpa.paco2_word) == ("PaCO2 (mmHg)", "PaCO2 (kPa)")
    assert kpa.gases[0].paco2 == pytest.approx(80 / 7.50062, rel=1e-5)
    for spec in (usual, kpa):
        for gas in spec.gases:
            assert spec.paco2_scale.low <= gas.paco2 <= spec.paco2_scale.high
            assert spec.ph_scale.low <= gas.ph <= spec.ph_scale.high
    assert kpa.normal[0] == pytest.approx(4.67, abs=0.01)


def test_a_picture_says_whose_it_is_and_as_of_when():
    assert titled_spec(FIGURES, READER).notes[0] == "E1, as of 28-Mar-2026 01:00"


def test_an_extreme_gas_widens_the_map():
    wild = episode_figures(episode("-21:00 ph 6.90 paco2 140 site arterial"), moment("01:00"), shipped_policy())
    spec = map_spec(wild, READER)
    assert spec.paco2_scale.high >= 140
    assert spec.ph_scale.low <= 6.90


def test_a_gas_whose_values_hardly_belong_together_says_so_on_the_map():
    odd = episode_figures(episode(LOG + "00:40 ph 7.45 paco2 120 site arterial"), moment("01:00"), shipped_policy())
    *others, last = gas_path(odd).gases
    assert last.gas.implausible is not None
    assert "doubtful: its values hardly belong together" in gas_sentence(last, READER)
    assert doubt_sentence(last) == "Doubtful: its values hardly belong together."
    assert not any(doubt_sentence(p) for p in others)
    assert map_table(odd, READER).rows[-1][7].startswith("doubtful: ")
