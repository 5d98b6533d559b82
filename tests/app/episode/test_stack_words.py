"""An episode's stack says what its figures say."""

import pytest

from app.chart.shapes import Drawn
from app.episode.feed import shipped_titles
from app.episode.on_screen import EpisodeOnScreen
from app.episode.panels import Panel, PanelSet, shipped
from app.episode.stack_words import stack_of
from app.look.theme import GasState, Verdict
from app.telling.support_course import course_of
from core.judgement.policy import shipped_policy
from core.judgement.shapes import EpisodeFigures
from tests.support.invented_record import Bed, record_of
from tests.support.invented_ward import NOW, at, ended, failing, leaking, on_cpap, ward


def shown(bed, panels=None, gas_unit="mmHg"):
    panels = panels or shipped("usual", shipped_titles())
    return EpisodeOnScreen(bed.record, bed.figures, course_of(bed.record, NOW), shipped_policy(), panels, gas_unit)


def test_ribbon_panels_brackets_and_events():
    spec = stack_of(shown(failing()), NOW)
    assert [s.ipap for s in spec.ribbon.steps] == [12, 16, 18, 20]
    assert spec.ribbon.breaks[0].start == at("01:10")
    assert [t.word for t in spec.ribbon.ticks] == ["16/5", "18/6 35 %", "20/6"]
    brackets = spec.panels[0].brackets
    assert [b.verdict for b in brackets][-1] is Verdict.WORSE
    assert brackets[-1].state is GasState.SEVERE
    assert spec.panels[1].brackets == ()
    assert [t.word for t in spec.events] == ["Mask off", "Mask on"]
    assert spec.now == NOW


@pytest.mark.parametrize(
    ("logged", "epap", "word"),
    [
        ({"ipap": "20", "epap": "5"}, 5, "mode not recorded"),  # its pressures are drawn beside it
        ({"cpap": "8"}, 8, "mode not recorded"),
        ({"ipap": "20"}, None, "EPAP not recorded"),
        ({"fio2": "0.28"}, None, "pressure not recorded"),
        ({"mode": "BPAP-ST", "ipap": "20", "epap": "5"}, 5, "BPAP-ST"),
        ({"mode": "off"}, None, "off"),
    ],
)
def test_what_stands_over_a_stretch_denies_nothing_that_is_drawn(logged, epap, word):
    record = record_of("E", [("02:00", {"label": "Bed 1"}), ("02:30", logged)])
    figures = EpisodeFigures("E", NOW, "Bed 1", "UTC")
    spec = stack_of(shown(Bed(record, figures)), NOW)
    assert [(s.epap, s.word) for s in spec.ribbon.steps] == [(epap, word)]


def test_an_open_window_reaches_past_now():
    spec = stack_of(shown(on_cpap()), NOW)
    assert spec.panels[0].brackets[0].still_open
    assert spec.end == at("06:05")
    assert spec.ribbon.steps[0].ipap is None
    assert spec.ribbon.steps[0].epap == 10


def test_an_oxygen_flow_says_that_fio2_is_not_known():
    step = stack_of(shown(leaking(2)), NOW).ribbon.steps[-1]
    assert not step.fio2_known
    assert step.fio2_word == "4 L/min, FiO2 not known"


def test_an_ended_episode_ends():
    spec = stack_of(shown(ended()), NOW)
    assert spec.end == at("00:10")
    assert spec.now is None


def test_any_panel_of_the_user_is_drawn():
    own = PanelSet((Panel("a", "Mine", ("hr", "sbp")), Panel("b", "Settings", ("pressure_support", "fio2"))))
    spec = stack_of(shown(failing(), own), NOW)
    assert [p.title for p in spec.panels] == ["Mine", "Settings"]
    assert spec.panels[0].traces == ()
    assert {t.drawn for t in spec.panels[1].traces} == {Drawn.STEPS}


def test_the_summary_tells_changes_and_verdicts():
    summary = stack_of(shown(failing()), NOW).summary
    assert "22:20 IPAP 12 to 16 cmH2O" in summary
    assert "worse" in summary


def test_every_bed_in_both_units_and_both_families():
    for bed in ward():
        for family in ("usual", "hypoxaemic"):
            for unit in ("mmHg", "kPa"):
                spec = stack_of(shown(bed, shipped(family, shipped_titles()), unit), NOW)
                assert spec.start < spec.end
                assert len(spec.panels) == 3
